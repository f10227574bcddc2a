package main

import (
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"

	"standoff/fit"
	"standoff/measure/rig"
	"standoff/measure/session"
)

// world is a kind of microphone on the virtual bench.
type world struct {
	name               string
	form, body, rear   string
	beta, spacing      float64
	pattern            string
	worstMix, worstGap float64 // what the mix and the spacing (m) may be off by, whatever they say
}

var worlds = []world{
	{"cardioid, sphere, delay", "phase-shift", "sphere", "delay", 0.5, 0.027, "cardioid", 0.01, 0.002},
	{"supercardioid, sphere, delay", "phase-shift", "sphere", "delay", 0.63, 0.03, "supercardioid", 0.01, 0.002},
	{"cardioid, sphere, low-pass", "phase-shift", "sphere", "low-pass", 0.5, 0.027, "cardioid", 0.03, 0.006},
	{"figure-8, open", "phase-shift", "open", "delay", 1, 0.03, "figure-8", 0.01, 0.003},
	{"subcardioid, open, summed", "summed", "open", "delay", 0.3, 0.02, "subcardioid", 0.01, 0.006},
	{"omni", "summed", "open", "delay", 0, 0.02, "omni", 0.005, 0},
}

const studyRig = `unit: {tag: W-01}
audio: {backend: virtual}
sweep: {duration: 1s, repeats: 1}
distances: [30mm, 40mm, 63mm, 90mm, 140mm, 220mm, 350mm, 600mm]
virtual: {}
`

// meet is one bench of a world: tape, setback, source and room are a little off,
// as the rig says they may be.
func (w world) meet(t *testing.T, seed uint64) *rig.Rig {
	t.Helper()
	r, err := rig.Parse("study.yaml", []byte(studyRig))
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(seed, 11))
	v := r.Virtual
	v.Seed = seed
	v.Capsule.Form, v.Capsule.Body, v.Capsule.Rear = w.form, w.body, w.rear
	v.Capsule.GradientFraction, v.Capsule.PortSpacing = w.beta, w.spacing
	v.Capsule.Setback = r.Capsule.Setback + r.Capsule.SetbackUncertainty*rng.NormFloat64()
	v.Source.Radius = r.Source.Radius + r.Source.RadiusUncertainty*rng.NormFloat64()
	v.TapeError = r.DistanceUncertainty
	v.Room.Size[0] += 0.5 * rng.NormFloat64()
	v.Room.Size[1] += 0.3 * rng.NormFloat64()
	return r
}

// measured does the whole job on a bench, files included.
func measured(t *testing.T, r *rig.Rig, dir string) *analysed {
	t.Helper()
	f := recorded(t, r, dir)
	defer f.Close()
	a, err := analyse(t.Context(), f, "study")
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// recorded makes all takes of a bench.
func recorded(t *testing.T, r *rig.Rig, dir string) *session.Folder {
	t.Helper()
	rec, err := openRecorder(t.Context(), r)
	if err != nil {
		t.Fatal(err)
	}
	defer rec.Close()
	f, err := session.OpenOrCreate(dir, r, session.Options{Version: "study", Recorder: rec.Name()})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { f.Close() })
	e := &env{ctx: t.Context(), voice: &voice{out: io.Discard, err: io.Discard, quiet: true}}
	tk, err := newTaker(e, f, rec)
	if err != nil {
		t.Fatal(err)
	}
	tk.stand = atOnce{}
	if err := tk.all(r.Distances); err != nil {
		t.Fatal(err)
	}
	return f
}

// score is what many benches of one world say.
type score struct {
	mix, mixPull, gap, gapPull []float64
	unresolved, named          int
}

// add notes one result and complains of what is plainly wrong.
func (s *score) add(t *testing.T, w world, r *fit.Result) {
	c := r.Capsule
	if !c.GradientFraction.Resolved {
		t.Errorf("%s: the mix is not resolved", w.name)
		return
	}
	off, u := *c.GradientFraction.Value-w.beta, *c.GradientFraction.Expanded/2
	s.mix, s.mixPull = append(s.mix, off), append(s.mixPull, off/u)
	if math.Abs(off) > w.worstMix {
		t.Errorf("%s: the mix is off by %.4f", w.name, off)
	}
	if c.Pattern == w.pattern {
		s.named++
	}
	if !c.PortSpacing.Resolved {
		s.unresolved++
		return
	}
	off, u = *c.PortSpacing.Value-w.spacing, *c.PortSpacing.Expanded/2
	s.gap, s.gapPull = append(s.gap, off), append(s.gapPull, off/u)
	if w.worstGap == 0 {
		t.Errorf("%s: a spacing of %.1f mm where there is none to be known", w.name, *c.PortSpacing.Value*1e3)
	} else if math.Abs(off) > w.worstGap {
		t.Errorf("%s: the spacing is off by %.2f mm", w.name, 1e3*off)
	}
}

// Benches whose truth is known, by the whole chain. Two of each kind in every run;
// with STUDY set to a number that many, and the table of fit/STUDY.md.
func TestWorlds(t *testing.T) {
	t.Parallel() // after all others, which may listen to an audio server
	if testing.Short() {
		t.Skip("takes half a minute")
	}
	n := 2
	if s := os.Getenv("STUDY"); s != "" {
		fmt.Sscan(s, &n)
	}
	t.Log("| world | mix off by, rms | rms pull | spacing off by, rms | rms pull | not resolved | named right |")
	for _, w := range worlds {
		var s score
		for seed := range n {
			a := measured(t, w.meet(t, uint64(seed)+1), filepath.Join(t.TempDir(), "s"))
			s.add(t, w, a.result)
		}
		if s.named < n {
			t.Errorf("%s: named right %d times of %d", w.name, s.named, n)
		}
		gap, pull := "", ""
		if len(s.gap) > 0 {
			gap, pull = fmt.Sprintf("%.2f mm", 1e3*rms(s.gap)), fmt.Sprintf("%.2f", rms(s.gapPull))
		}
		t.Logf("| %s | %.4f | %.2f | %s | %s | %d of %d | %d of %d |", w.name, rms(s.mix), rms(s.mixPull), gap, pull, s.unresolved, n, s.named, n)
	}
}

func rms(x []float64) float64 {
	var sum float64
	for _, v := range x {
		sum += v * v
	}
	return math.Sqrt(sum / float64(len(x)))
}
