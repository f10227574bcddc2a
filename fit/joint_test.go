package fit

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"standoff/measure"
)

// world is a made-up measurement of a model by the model itself: it tests the
// solver and its uncertainties, not the formulas.
func world(m Model, a Acoustics, seed uint64) *Dataset {
	rng := rand.New(rand.NewPCG(seed, 7))
	d := &Dataset{Setback: 0.006, SetbackUncertainty: 0.001, Radius: 0.017, RadiusUncertainty: 0.001,
		Speed: 344, SpeedUncertainty: 0.6, Hz: measure.Grid(80, 5000, 0.007)}
	setback := 0.006 + 0.001*rng.NormFloat64()
	a.Radius = 0.017 + 0.001*rng.NormFloat64()
	a.Speed = 344 + 0.6*rng.NormFloat64()
	s := make([]complex128, len(d.Hz))
	for j, f := range d.Hz {
		s[j] = cmplx.Rect(1/(1+f/9000), -2*math.Pi*f*0.004)
	}
	for _, r := range []float64{0.03, 0.04, 0.0635, 0.09, 0.14, 0.22, 0.35, 0.6} {
		p := Point{Label: fmt.Sprint(r), Nominal: r, Tape: 0.0005}
		truth := r + setback + 0.0005*rng.NormFloat64()
		e := newEvaluator(m, a, d.Hz)
		for j := range d.Hz {
			y := e.output(j, truth) * s[j]
			sigma := 0.01 * cmplx.Abs(y)
			p.Value = append(p.Value, y+complex(rng.NormFloat64(), rng.NormFloat64())*complex(sigma/math.Sqrt2, 0))
			p.Variance = append(p.Variance, sigma*sigma)
		}
		d.Points = append(d.Points, p)
	}
	return d
}

func TestJointRecoversItsWorld(t *testing.T) {
	for _, m := range []Model{{Form: Summed, Body: Open, Source: PistonSource}, {Form: PhaseShift, Body: Open, Source: PistonSource}, {Form: Summed, Body: Sphere, Source: PistonSource}, {Form: PhaseShift, Body: Sphere, Source: PistonSource}} {
		for _, beta := range []float64{0.3, 0.5, 0.75, 1} {
			truth := Acoustics{Beta: beta, Spacing: 0.025}
			j, err := FitModel(world(m, truth, 3), m)
			if err != nil {
				t.Fatal(err)
			}
			t.Logf("%v β %.2f: %.4f±%.4f  d %.2f±%.2f mm χ² %.3f %v", m, beta, j.Acoustics.Beta, j.BetaSE, j.Acoustics.Spacing*1e3, j.SpacingSE*1e3, j.ReducedChiSquare(), j.Status)
			if math.Abs(j.Acoustics.Beta-beta) > 4*j.BetaSE || math.Abs(j.Acoustics.Spacing-0.025) > 4*j.SpacingSE {
				t.Errorf("%v β %.2f: %.4f±%.4f  d %.2f±%.2f mm", m, beta, j.Acoustics.Beta, j.BetaSE, j.Acoustics.Spacing*1e3, j.SpacingSE*1e3)
			}
		}
	}
}
