package main

import (
	"math"
	"path/filepath"
	"slices"
	"testing"

	"standoff/fit"
	"standoff/measure"
)

// A piston of 15 mm taken for what it is gives the mix; taken for a point, it is the
// source that is named.
func TestPistonTakenForAPoint(t *testing.T) {
	t.Parallel() // after all others, which may listen to an audio server
	names := func(a *analysed) bool {
		return slices.ContainsFunc(a.result.Warnings, func(w measure.Warning) bool { return w.Code == "source-size" })
	}
	for _, kind := range []string{fit.PistonSource, fit.PointSource} {
		r := worlds[0].meet(t, 3)
		r.Source.Radius, r.Virtual.Source.Radius, r.Source.Kind = 0.015, 0.015, kind
		a := measured(t, r, filepath.Join(t.TempDir(), "s"))
		mix, gap := a.fit.Best().Acoustics.Beta, a.fit.Best().Acoustics.Spacing
		t.Logf("%s: mix %.4f, spacing %.2f mm, left over %.4f", kind, mix, 1e3*gap, a.result.Fit.Unexplained)
		for _, w := range a.result.Warnings {
			t.Logf("  %s: %s", w.Code, w.Text)
		}
		if kind == fit.PistonSource && math.Abs(mix-0.5) > 0.01 {
			t.Errorf("the mix is %.4f", mix)
		}
		if named := names(a); named != (kind == fit.PointSource) {
			t.Errorf("%s: the source is named: %v", kind, named)
		}
	}
}
