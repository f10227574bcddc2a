package fit

import (
	"math"
	"testing"
)

// Over many made-up measurements, each with its own noise and its own errors of
// tape, setback, radius and temperature, (value − truth)/standard error has mean
// 0 and standard deviation 1, and intervals of k = 2 hold the truth in 95 % of
// cases (JCGM 100:2008, annex G). With 40 of them the standard deviation is known
// to ±0.11, the mean to ±0.16 and the count of intervals to ±1.3.
func TestUncertaintiesAreHonest(t *testing.T) {
	const seeds = 40
	for _, w := range []struct {
		model Model
		truth Acoustics
	}{
		{Model{Form: PhaseShift, Body: Open, Source: PistonSource}, Acoustics{Beta: 0.5, Spacing: 0.025}},
		{Model{Form: Summed, Body: Open, Source: PistonSource}, Acoustics{Beta: 0.4, Spacing: 0.030}},
		{Model{Form: PhaseShift, Body: Sphere, Source: PistonSource}, Acoustics{Beta: 0.6, Spacing: 0.027}},
	} {
		t.Run(w.model.String(), func(t *testing.T) {
			t.Parallel()
			var beta, spacing []float64
			for seed := range seeds {
				j, err := FitModel(everyThird(world(w.model, w.truth, uint64(1000+seed))), w.model)
				if err != nil {
					t.Fatal(err)
				}
				beta = append(beta, (j.Acoustics.Beta-w.truth.Beta)/j.BetaSE)
				spacing = append(spacing, (j.Acoustics.Spacing-w.truth.Spacing)/j.SpacingSE)
			}
			honest(t, "mix", beta)
			honest(t, "spacing", spacing)
		})
	}
}

// everyThird keeps a third of the frequencies, so that many fits take little time.
func everyThird(d *Dataset) *Dataset {
	out := *d
	out.Hz, out.Points = nil, nil
	for j := 0; j < len(d.Hz); j += 3 {
		out.Hz = append(out.Hz, d.Hz[j])
	}
	for _, p := range d.Points {
		q := p
		q.Value, q.Variance = nil, nil
		for j := 0; j < len(d.Hz); j += 3 {
			q.Value, q.Variance = append(q.Value, p.Value[j]), append(q.Variance, p.Variance[j])
		}
		out.Points = append(out.Points, q)
	}
	return &out
}

func honest(t *testing.T, name string, pulls []float64) {
	t.Helper()
	n := float64(len(pulls))
	var mean, variance float64
	covered := 0
	for _, p := range pulls {
		mean += p / n
		if math.Abs(p) <= Coverage {
			covered++
		}
	}
	for _, p := range pulls {
		variance += (p - mean) * (p - mean) / (n - 1)
	}
	sd := math.Sqrt(variance)
	t.Logf("%s: mean pull %.2f, standard deviation %.2f, %d of %d covered", name, mean, sd, covered, len(pulls))
	if !(sd > 0.75 && sd < 1.3) || !(math.Abs(mean) < 0.5) || covered < 35 {
		t.Errorf("%s: mean pull %.2f, standard deviation %.2f, %d of %d covered", name, mean, sd, covered, len(pulls))
	}
}
