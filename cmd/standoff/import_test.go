package main

import (
	"fmt"
	"path/filepath"
	"testing"
)

// places of the outside world: label → source to capsule centre, m. The setback
// is 6.4 mm where the rig believes 6.
var outsidePlaces = []struct {
	label  string
	metres float64
}{{"30mm", 0.0364}, {"45mm", 0.0514}, {"80mm", 0.0864}, {"160mm", 0.1664}, {"320mm", 0.3264}, {"600mm", 0.6064}}

const outsideRig = `unit: {tag: SC-40, claimed: cardioid}
capsule: {setback: 6mm, setback_uncertainty: 1mm}
source: {kind: piston, radius: 17mm, radius_uncertainty: 1mm}
air: {temperature: 20C, humidity: 50%%}
sweep: {from: 20Hz, to: 20kHz, duration: 2s, level: -12dBFS, repeats: 1}
audio: {backend: wav, sample_rate: 48000, clock: %s}
distances: [30mm, 45mm, 80mm, 160mm, 320mm, 600mm]
`

// outside makes recordings without any of our code but the sweep: sox convolves it
// with impulse responses that scipy computed.
func outside(t *testing.T, dir, sweep string) (labels []string) {
	t.Helper()
	sox, py := need(t, "sox"), python(t)
	args := []string{"testdata/capsule.py", dir, "48000", "16383", "0.5", "0.027", "0.017", "343.987"}
	for _, p := range outsidePlaces {
		args = append(args, fmt.Sprintf("%s=%g", p.label, p.metres))
		labels = append(labels, p.label)
	}
	command(t, py, args...)
	for _, l := range labels {
		command(t, sox, sweep, "-e", "floating-point", "-b", "32", filepath.Join(dir, l+".wav"), "fir", filepath.Join(dir, l+".txt"))
	}
	return labels
}

// A sweep convolved by sox with a cardioid from scipy's sphere series comes back as
// that cardioid, with a common clock and, its delays forgotten, with a free one.
func TestImportOfARecordingMadeOutside(t *testing.T) {
	if testing.Short() {
		t.Skip("takes some seconds")
	}
	dir := t.TempDir()
	sweep := filepath.Join(dir, "sweep.wav")
	rig := write(t, filepath.Join(dir, "rig.yaml"), fmt.Sprintf(outsideRig, "auto"))
	if code, _, e := standoff(t, "sweep", rig, "--out", sweep); code != 0 {
		t.Fatalf("exit %d: %s", code, e)
	}
	labels := outside(t, dir, sweep)
	for _, clock := range []string{"auto", "free"} {
		t.Run(clock, func(t *testing.T) {
			rig := write(t, filepath.Join(dir, clock+".yaml"), fmt.Sprintf(outsideRig, clock))
			into := filepath.Join(dir, "session-"+clock)
			args := append([]string{"import", rig, "--into", into}, takeArgs(dir, labels)...)
			if code, o, e := standoff(t, args...); code != 0 {
				t.Fatalf("exit %d\n%s%s", code, o, e)
			}
			r := resultIn(t, into)
			within(t, "mix", r.Capsule.GradientFraction, 0.5, 0.02)
			within(t, "spacing", r.Capsule.PortSpacing, 0.027, 0.003)
			if want := map[string]string{"auto": "common", "free": "free"}[clock]; r.Fit.Clock != want {
				t.Errorf("clock %s, want %s", r.Fit.Clock, want)
			}
			if len(r.Takes) != len(labels) {
				t.Errorf("%d takes of %d", len(r.Takes), len(labels))
			}
		})
	}
	t.Run("twice", func(t *testing.T) { importTwice(t, dir, rig, labels) })
}

// What is there already is not taken again.
func importTwice(t *testing.T, dir, rig string, labels []string) {
	into := filepath.Join(dir, "session-twice")
	args := append([]string{"import", rig, "--into", into}, takeArgs(dir, labels)...)
	standoff(t, args...)
	standoff(t, args...)
	if r := resultIn(t, into); len(r.Takes) != len(labels) {
		t.Errorf("%d takes after importing %d twice", len(r.Takes), len(labels))
	}
}
