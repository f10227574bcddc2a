package fit

import "math"

// Coverage is the coverage factor k of every expanded uncertainty: about 95 %
// for a normal distribution.
const Coverage = 2

func ptr(v float64) *float64 { return &v }

// resolved is a value with its standard uncertainty.
func resolved(v, u float64, unit string) Value {
	return Value{Value: ptr(v), Expanded: ptr(Coverage * u), CoverageFactor: Coverage, Resolved: true, Unit: unit}
}

func unresolved(unit string) Value { return Value{CoverageFactor: Coverage, Unit: unit} }

// What counts as resolved.
const (
	widestMix     = 0.25 // expanded uncertainty of the mix
	widestSpacing = 0.5  // expanded uncertainty of the spacing, relative
	leastGradient = 0.05 // of which a spacing can be told at all
)

// of is a value with the uncertainty that a budget gives it.
func (s BudgetSum) of(v float64, unit string) Value {
	return Value{Value: ptr(v), Expanded: ptr(s.Expanded), CoverageFactor: s.CoverageFactor, Resolved: true, Unit: unit}
}

// standard is a sum of one part that is well known.
func standard(u float64) BudgetSum {
	return BudgetSum{Standard: u, Freedom: Freedom(math.Inf(1)), CoverageFactor: Coverage, Expanded: Coverage * u}
}

// mixValue is the mix where it is held; the model may be fitted a little outside
// 0 to 1, the value reported lies within.
func mixValue(beta float64, u BudgetSum) Value {
	if !(u.Expanded < widestMix) || u.Standard == 0 {
		v := unresolved("1")
		if upper := beta + 1.645*u.Standard; u.Standard > 0 && upper < 1 {
			v.UpperLimit = ptr(math.Max(upper, 0))
		}
		return v
	}
	return u.of(math.Min(math.Max(beta, 0), 1), "1")
}

// spacingValue is the spacing where it is held: not on a bound, narrow enough,
// and the capsule has a gradient part, at least leastMix of it, whose spacing it
// could be.
func spacingValue(d float64, u BudgetSum, leastMix float64, atBound bool) Value {
	if atBound || u.Standard == 0 || !(u.Expanded < widestSpacing*d) || leastMix < leastGradient {
		return unresolved("m")
	}
	return u.of(d, "m")
}

// upperSpacing is the one-sided 95 % limit of the spacing by its profile
// likelihood: the largest d at which the misfit, everything else fitted again,
// has risen by less than 2.71 in units of the reduced chi-square. nil when the
// data exclude no spacing that the distances allow.
func (a *Analysis) upperSpacing() *float64 {
	best := a.Best()
	p := newSeparable(a.Data, best.Model)
	_, upper := p.bounds()
	limit := 2.71 * unit(best)
	lowest := math.Inf(1)
	last := math.NaN()
	previous := 0.0
	x := append([]float64(nil), best.x...)
	for d := smallestSpacing; d < upper[p.at.spacing]; d *= 1.3 {
		problem := p.problem()
		problem.Lower[p.at.spacing], problem.Upper[p.at.spacing] = d, d
		x[p.at.spacing] = d
		r, err := solve(p, problem, x)
		if err != nil {
			return nil
		}
		excess := 2 * r.Cost
		lowest = math.Min(lowest, excess)
		if excess > lowest+limit && d > best.Acoustics.Spacing {
			// Between the two last: by the square root, which is linear near the minimum.
			t := (math.Sqrt(limit) - previous) / (math.Sqrt(excess-lowest) - previous)
			return ptr(last * math.Pow(d/last, math.Min(math.Max(t, 0), 1)))
		}
		last, previous = d, math.Sqrt(math.Max(excess-lowest, 0))
	}
	return nil
}
