package fit

import (
	"math"
	"math/cmplx"
)

// Working distances, from the grille, and frequencies of the table of rises.
var (
	tableDistances   = []float64{0.025, 0.05, 0.10, 0.15, 0.20, 0.30, 0.60}
	tableFrequencies = []float64{50, 100, 200}
)

func decibels(x float64) float64 { return 20 * math.Log10(x) }

// riseTable predicts the rise for a small source (a mouth, a string: a point).
func (a *Analysis) riseTable() RiseTable {
	t := RiseTable{Distances: tableDistances, Frequencies: tableFrequencies}
	for _, f := range tableFrequencies {
		var row, plus []float64
		for _, r := range tableDistances {
			v, u := a.predictedRise(r, f)
			row, plus = append(row, v), append(plus, Coverage*u)
		}
		t.DB, t.Expanded = append(t.DB, row), append(t.Expanded, plus)
	}
	return t
}

// predictedRise is the rise in dB at r metres from the grille for a point
// source, with its standard uncertainty from mix, spacing, setback and the
// model's form.
func (a *Analysis) predictedRise(r, f float64) (dB, u float64) {
	best := a.Best()
	value := func(j *Joint) float64 { return pointRise(j.Model, j.Acoustics, r+j.Setback, f) }
	dB = value(best)
	moved := func(dBeta, dSpacing, dSetback float64) float64 {
		ac := best.Acoustics
		ac.Beta += dBeta
		ac.Spacing = math.Max(ac.Spacing+dSpacing, smallestSpacing)
		return pointRise(best.Model, ac, r+best.Setback+dSetback, f)
	}
	const step = 1e-5
	// At a mix of 0 the rise has no slope, but no less doubt: the mix is moved by as
	// much as it is in doubt by.
	by := math.Max(math.Hypot(best.BetaSE, a.Data.MethodMix), step)
	byBeta := (moved(by, 0, 0) - dB) / by
	if down := (dB - moved(-by, 0, 0)) / by; math.Abs(down) > math.Abs(byBeta) {
		byBeta = down
	}
	bySpacing := (moved(0, step, 0) - dB) / step
	bySetback := (moved(0, 0, step) - dB) / step
	c := best.covariance
	variance := byBeta*byBeta*c[0][0] + bySpacing*bySpacing*c[1][1] + 2*byBeta*bySpacing*c[0][1] +
		bySetback*bySetback*best.SetbackSE*best.SetbackSE +
		byBeta*byBeta*a.Data.MethodMix*a.Data.MethodMix
	band := a.bandUncertainty(value, func(j *Joint) float64 { return math.Abs(byBeta) * j.BetaSE })
	return dB, root(math.Sqrt(math.Max(variance, 0)), a.formUncertainty(value), band)
}

func pointRise(m Model, ac Acoustics, r, f float64) float64 {
	m.Source, ac.Radius = PointSource, 0
	r = math.Max(r, m.nearestReach(ac.Spacing)*1.001)
	return decibels(cmplx.Abs(m.Rise(ac, r, f)))
}
