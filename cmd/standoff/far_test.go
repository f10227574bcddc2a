package main

import (
	"math"
	"path/filepath"
	"strings"
	"testing"

	"standoff/measure"
)

// From 200 mm on the spacing leaves next to no trace: the mix comes with an honest ±,
// the spacing is not resolved, has a limit, and the cure is named.
func TestFarDistancesOnly(t *testing.T) {
	t.Parallel() // after all others, which may listen to an audio server
	for _, w := range []world{worlds[0], worlds[3]} {
		r := w.meet(t, 4)
		r.Distances = nil
		for _, d := range []measure.Distance{{Label: "200mm", Metres: 0.2}, {Label: "280mm", Metres: 0.28}, {Label: "400mm", Metres: 0.4}, {Label: "560mm", Metres: 0.56}, {Label: "800mm", Metres: 0.8}} {
			r.Distances = append(r.Distances, d)
		}
		r.Virtual.Noise = math.Pow(10, -70.0/20)
		a := measured(t, r, filepath.Join(t.TempDir(), "s"))
		mix, gap := a.result.Capsule.GradientFraction, a.result.Capsule.PortSpacing
		if !mix.Resolved {
			t.Fatalf("%s: the mix is not resolved", w.name)
		}
		t.Logf("%s: mix %+.4f ± %.4f (k = %.2f), spacing %v", w.name, *mix.Value-w.beta, *mix.Expanded, mix.CoverageFactor, gap)
		if math.Abs(*mix.Value-w.beta) > *mix.Expanded {
			t.Errorf("%s: the mix is off by %.4f, ± %.4f", w.name, *mix.Value-w.beta, *mix.Expanded)
		}
		if gap.Resolved {
			t.Logf("%s: spacing %.2f ± %.2f mm", w.name, 1e3**gap.Value, 1e3**gap.Expanded)
			if math.Abs(*gap.Value-w.spacing) > *gap.Expanded {
				t.Errorf("%s: the spacing is off by %.2f mm, ± %.2f mm", w.name, 1e3*(*gap.Value-w.spacing), 1e3**gap.Expanded)
			}
			t.Errorf("%s: the spacing is resolved from 200 mm on", w.name)
		} else if l := gap.UpperLimit; l != nil && *l < w.spacing {
			t.Errorf("%s: the spacing is said to be below %.1f mm, it is %.1f mm", w.name, 1e3**l, 1e3*w.spacing)
		}
		said := false
		for _, warning := range a.result.Warnings {
			t.Logf("%s: %s (%s)", warning.Code, warning.Text, warning.Hint)
			said = said || warning.Code == "spacing-not-resolved" && strings.Contains(warning.Hint, "35 mm")
		}
		if !said {
			t.Errorf("%s: the cure is not named", w.name)
		}
	}
}
