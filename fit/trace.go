package fit

import (
	"math"
	"math/cmplx"
)

// Where fitted curves are drawn.
const (
	lineFrom   = 20.0 // Hz
	lineTo     = 20000.0
	linePoints = 181
	// At 3 dB the rise has its corner.
	cornerDB = 3.0102999566398120
)

// levelFrequencies are the octaves of the distance law.
var levelFrequencies = []float64{63, 125, 250, 500, 1000, 2000, 4000}

// Curves are the measured points and fitted lines for the figures.
func (a *Analysis) Curves() *Curves {
	c := &Curves{}
	for i := range a.Data.Points {
		c.Rise = append(c.Rise, a.riseCurve(i))
	}
	limit := a.Best().Model.HighestUse(a.Best().Acoustics)
	last := -1
	for _, f := range levelFrequencies {
		j := nearestIndex(a.Data.Hz, f)
		if j == last || f < 0.7*a.Data.Hz[0] || a.Data.Hz[j] > limit || math.Abs(math.Log2(a.Data.Hz[j]/f)) > 0.5 {
			continue
		}
		last = j
		c.Levels = append(c.Levels, a.levelCurve(j))
	}
	return c
}

func (a *Analysis) riseCurve(i int) RiseCurve {
	best := a.Best()
	m, ac, r := best.Model, best.Acoustics, best.Distances[i]
	out := RiseCurve{Label: a.Data.Points[i].Label, Distance: r, Used: true}
	limit := m.HighestUse(ac)
	for n := range linePoints {
		f := lineFrom * math.Pow(lineTo/lineFrom, float64(n)/(linePoints-1))
		if f > limit {
			break
		}
		out.LineHz = append(out.LineHz, f)
		out.LineDB = append(out.LineDB, decibels(cmplx.Abs(m.Rise(ac, r, f))))
		out.LineExpanded = append(out.LineExpanded, Coverage*a.lineUncertainty(r, f, best.DistanceSE[i]))
	}
	out.Corner = crossing(out.LineHz, out.LineDB, cornerDB)
	for j, f := range a.Data.Hz {
		if f > limit {
			break
		}
		level, expanded := a.measured(i, j)
		db := level - decibels(cmplx.Abs(m.freeField(ac, r, f)))
		out.Hz = append(out.Hz, f)
		out.DB = append(out.DB, db)
		out.Expanded = append(out.Expanded, expanded)
		out.Residual = append(out.Residual, db-decibels(cmplx.Abs(m.Rise(ac, r, f))))
	}
	return out
}

// lineUncertainty is the standard uncertainty in dB of the fitted rise at a fitted
// distance, from mix and spacing, which together hold what is in doubt about the
// model, and from the distance.
func (a *Analysis) lineUncertainty(r, f, place float64) float64 {
	best := a.Best()
	rise := func(dBeta, dSpacing, dr float64) float64 {
		ac := best.Acoustics
		ac.Beta, ac.Spacing = ac.Beta+dBeta, math.Max(ac.Spacing+dSpacing, smallestSpacing)
		return decibels(cmplx.Abs(best.Model.Rise(ac, r+dr, f)))
	}
	const step = 1e-5
	here := rise(0, 0, 0)
	byBeta, bySpacing, byPlace := (rise(step, 0, 0)-here)/step, (rise(0, step, 0)-here)/step, (rise(0, 0, step)-here)/step
	u := byBeta * a.budget().GradientFraction.Standard
	if best.SpacingSE > 0 {
		u = math.Hypot(u, bySpacing*best.SpacingSE)
	}
	return math.Hypot(u, byPlace*place)
}

// measured is the level of point i at frequency j relative to the far response
// S·Far, in dB, with its expanded uncertainty: of the response itself, widened
// by the misfit, and of S.
func (a *Analysis) measured(i, j int) (dB, expanded float64) {
	best := a.Best()
	y, s := cmplx.Abs(a.Data.Points[i].Value[j]), cmplx.Abs(best.far[j])
	far := cmplx.Abs(best.Model.Far(best.Acoustics, a.Data.Hz[j]))
	variance := unit(best)*a.Data.variance(i, j)/(2*y*y) + best.farVariance[j]/(2*s*s)
	return decibels(y / (s * far)), Coverage * 20 / math.Ln10 * math.Sqrt(variance)
}

func (a *Analysis) levelCurve(j int) LevelCurve {
	best := a.Best()
	m, ac, f := best.Model, best.Acoustics, a.Data.Hz[j]
	out := LevelCurve{Hz: f}
	lo, hi := math.Inf(1), 0.0
	for i, r := range best.Distances {
		level, expanded := a.measured(i, j)
		out.M = append(out.M, r)
		out.MExpanded = append(out.MExpanded, Coverage*best.DistanceSE[i])
		out.DB = append(out.DB, level)
		out.Expanded = append(out.Expanded, expanded)
		lo, hi = math.Min(lo, r), math.Max(hi, r)
	}
	lo = math.Max(0.8*lo, m.nearestReach(ac.Spacing)*1.001)
	const steps = 80
	for n := range steps {
		r := lo * math.Pow(1.25*hi/lo, float64(n)/(steps-1))
		out.LineM = append(out.LineM, r)
		out.LineDB = append(out.LineDB, decibels(cmplx.Abs(m.Output(ac, r, f)/m.Far(ac, f))))
		out.FreeFieldDB = append(out.FreeFieldDB, -decibels(r))
	}
	return out
}

// crossing is where a falling line passes a level, interpolated in log f; 0 when
// it does not.
func crossing(hz, db []float64, level float64) float64 {
	for i := 1; i < len(hz); i++ {
		if db[i-1] >= level && db[i] < level {
			t := (db[i-1] - level) / (db[i-1] - db[i])
			return hz[i-1] * math.Pow(hz[i]/hz[i-1], t)
		}
	}
	return 0
}

func nearestIndex(hz []float64, f float64) int {
	best := 0
	for j, v := range hz {
		if math.Abs(math.Log(v/f)) < math.Abs(math.Log(hz[best]/f)) {
			best = j
		}
	}
	return best
}
