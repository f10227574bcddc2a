//go:build linux && cgo && !noaudio

package main

import (
	"encoding/json"
	"fmt"
	"math"
	"path/filepath"
	"strings"
	"testing"

	"standoff/measure/audio/portaudio/jackbench"
	"standoff/measure/wav"
)

const jackRig = `unit: {tag: SC-41, claimed: cardioid}
capsule: {setback: 6mm, setback_uncertainty: 1mm}
source: {kind: piston, radius: 17mm, radius_uncertainty: 1mm}
air: {temperature: 20C, humidity: 50%%}
sweep: {from: 20Hz, to: 20kHz, duration: 2s, level: -12dBFS, repeats: 1}
audio: {backend: %s, sample_rate: 48000, input: mic, output: mic, loopback_channel: %s}
distances: [30mm, 45mm, 80mm, 160mm, 320mm, 600mm]
mover: {command: [%s, "{distance_label}"], settle: 0s}
`

// The whole job through a real audio server: jackd and jconvolver make the acoustic
// path, a mover swaps it, and what is found is what the same responses give by way
// of WAV files.
func TestRunThroughAnAudioServer(t *testing.T) {
	if testing.Short() {
		t.Skip("needs an audio server")
	}
	b := jackbench.Start(t, jackbench.Options{Fast: true})
	dir := t.TempDir()
	sweep := filepath.Join(dir, "sweep.wav")
	plain := write(t, filepath.Join(dir, "wav.yaml"), fmt.Sprintf(outsideRig, "auto"))
	if code, _, e := standoff(t, "-q", "sweep", plain, "--out", sweep); code != 0 {
		t.Fatalf("exit %d: %s", code, e)
	}
	labels := outside(t, dir, sweep)
	for _, l := range labels {
		b.Place(l, coefficients(t, filepath.Join(dir, l+".txt")))
	}
	b.Path("mic", []float32{1})

	into := filepath.Join(dir, "jack")
	rig := write(t, filepath.Join(dir, "jack.yaml"), fmt.Sprintf(jackRig, "portaudio", "2", b.Mover("mic")))
	code, o, e := standoff(t, "run", rig, "--into", into)
	if code != 0 {
		t.Fatalf("exit %d\n%s%s", code, o, e)
	}
	through := resultIn(t, into)
	within(t, "mix", through.Capsule.GradientFraction, 0.5, 0.02)
	within(t, "spacing", through.Capsule.PortSpacing, 0.027, 0.003)
	if through.Fit.Clock != "common" {
		t.Errorf("clock %s, want common", through.Fit.Clock)
	}

	into = filepath.Join(dir, "files")
	if code, o, e := standoff(t, append([]string{"import", plain, "--into", into}, takeArgs(dir, labels)...)...); code != 0 {
		t.Fatalf("exit %d\n%s%s", code, o, e)
	}
	files := resultIn(t, into)
	if d := *through.Capsule.GradientFraction.Value - *files.Capsule.GradientFraction.Value; math.Abs(d) > 0.005 {
		t.Errorf("the mix differs by %.4f between the audio server and WAV files", d)
	} else {
		t.Logf("the mix differs by %.5f", d)
	}
	checkLoopback(t, filepath.Join(dir, "jack", "takes", "30mm-1.wav"))
}

// coefficients reads what was written for sox.
func coefficients(t *testing.T, path string) (x []float32) {
	t.Helper()
	for _, line := range strings.Fields(readFile(t, path)) {
		var v float32
		if _, err := fmt.Sscan(line, &v); err != nil {
			t.Fatal(err)
		}
		x = append(x, v)
	}
	return x
}

// checkLoopback: the wire's channel is kept beside the microphone's.
func checkLoopback(t *testing.T, path string) {
	t.Helper()
	f, err := wav.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if f.Channels != 2 {
		t.Errorf("%s has %d channels, want microphone and loopback", path, f.Channels)
	}
}

// Devices are listed by the names that a rig uses.
func TestDevicesOfAnAudioServer(t *testing.T) {
	if testing.Short() {
		t.Skip("needs an audio server")
	}
	b := jackbench.Start(t, jackbench.Options{})
	b.Path("booth", []float32{1})
	code, o, e := standoff(t, "devices", "--json")
	var list []struct {
		Name    string `json:"name"`
		Inputs  int    `json:"inputs"`
		Outputs int    `json:"outputs"`
	}
	if err := json.Unmarshal([]byte(o), &list); err != nil || code != 0 {
		t.Fatalf("exit %d, %v\n%s%s", code, err, o, e)
	}
	for _, d := range list {
		if d.Name == "booth" && d.Inputs == 2 && d.Outputs == 1 {
			return
		}
	}
	t.Errorf("no device booth with 2 inputs and 1 output: %s", o)
}
