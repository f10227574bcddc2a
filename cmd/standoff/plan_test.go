package main

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"testing"

	"standoff/measure/rig"
)

// noisy is a bench whose noise matters: a free field, -50 dBFS.
func (w world) noisy(t *testing.T, seed uint64) *rig.Rig {
	t.Helper()
	r := w.meet(t, seed)
	r.Virtual.Room, r.Virtual.Noise = nil, math.Pow(10, -50.0/20)
	r.Fit.Gate = 0.008
	r.Capsule.Model, r.Capsule.Body = w.form, w.body
	return r
}

// What the plan foresees is what many benches then scatter by: six seeds of
// one capsule in every run, by which a standard deviation is known to 1/√10 = 32 %;
// with PLAN=40, as the table of fit/STUDY.md has it, to 11 %. The factor 1.5 is asked for there, and three
// times its own uncertainty more in a short run. The method's floor does not scatter
// and is left out.
func TestPlanForeseesTheScatter(t *testing.T) {
	t.Parallel() // after all others, which may listen to an audio server
	if testing.Short() {
		t.Skip("takes half a minute")
	}
	n, kinds := 6, []world{worlds[0]}
	if s := os.Getenv("PLAN"); s != "" {
		fmt.Sscan(s, &n)
		kinds = []world{worlds[0], worlds[1], worlds[3]}
	}
	limit := 1.5
	if n < 40 {
		limit *= 1 + 3/math.Sqrt(2*float64(n-1)) - 3/math.Sqrt(78)
	}
	t.Log("| capsule | mix: foreseen σ | scatter | ratio | spacing: foreseen σ | scatter | ratio |")
	for _, w := range kinds {
		c := planCmd{Pattern: w.pattern, Spacing: fmt.Sprintf("%.0fmm", 1e3*w.spacing), Clear: 80, LeftOver: "0.03%"}
		p, err := c.prepare(w.noisy(t, 1))
		if err != nil {
			t.Fatal(err)
		}
		if err := p.forecast(); err != nil {
			t.Fatal(err)
		}
		var mix, gap []float64
		for seed := range n {
			a := measured(t, w.noisy(t, uint64(seed)+1), filepath.Join(t.TempDir(), "s"))
			ac := a.fit.Best().Acoustics
			mix, gap = append(mix, ac.Beta-w.beta), append(gap, ac.Spacing-w.spacing)
		}
		foreseen := p.found[0].Scatter
		ratios := [2]float64{rms(mix) / foreseen[0], rms(gap) / foreseen[1]}
		t.Logf("| %s | %.5f | %.5f | %.2f | %.3f mm | %.3f mm | %.2f |", w.name, foreseen[0], rms(mix), ratios[0], 1e3*foreseen[1], 1e3*rms(gap), ratios[1])
		for i, r := range ratios {
			if r > limit || r < 1/limit {
				t.Errorf("%s: %s scatters by %.2f of what was foreseen", w.name, []string{"the mix", "the spacing"}[i], r)
			}
		}
	}
}
