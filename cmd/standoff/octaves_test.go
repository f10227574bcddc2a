package main

import (
	"math"
	"path/filepath"
	"slices"
	"testing"

	"standoff/measure"
)

// A capsule that is a cardioid at 1 kHz and an omni at 100 Hz shows it, by octave and
// in a warning; one that is a cardioid everywhere does not.
func TestMixByOctave(t *testing.T) {
	t.Parallel() // after all others, which may listen to an audio server
	for _, from := range []float64{0, 350} {
		r := worlds[0].meet(t, 6)
		c := &r.Virtual.Capsule
		c.Form, c.Body, c.GradientFrom = "summed", "open", from
		r.Virtual.Room = nil // a gate that holds 63 Hz
		a := measured(t, r, filepath.Join(t.TempDir(), "s"))
		for _, o := range a.result.Octaves {
			v := o.GradientFraction
			f := math.Sqrt(o.From * o.To)
			if !v.Resolved {
				t.Logf("around %.0f Hz: not resolved", f)
				continue
			}
			// Over the octave the true mix goes from here to there.
			truth := func(f float64) float64 { return c.GradientFraction * f * f / (f*f + from*from) }
			t.Logf("around %.0f Hz: %.3f ± %.3f, truth %.3f to %.3f", f, *v.Value, *v.Expanded, truth(o.From), truth(o.To))
			if *v.Value+*v.Expanded < truth(o.From) || *v.Value-*v.Expanded > truth(o.To) {
				t.Errorf("around %.0f Hz the mix is %.3f ± %.3f, the truth goes from %.3f to %.3f", f, *v.Value, *v.Expanded, truth(o.From), truth(o.To))
			}
		}
		said := slices.ContainsFunc(a.result.Warnings, func(w measure.Warning) bool { return w.Code == "mix-varies" })
		for _, w := range a.result.Warnings {
			t.Logf("%s: %s", w.Code, w.Text)
		}
		if said != (from > 0) {
			t.Errorf("fading from %g Hz: said %v", from, said)
		}
	}
}
