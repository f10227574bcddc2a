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

// mixValue is the mix where it is held; the model may be fitted a little outside
// 0 to 1, the value reported lies within.
func mixValue(beta, u float64) Value {
	if !(Coverage*u < widestMix) || u == 0 {
		v := unresolved("1")
		if upper := beta + 1.645*u; u > 0 && upper < 1 {
			v.UpperLimit = ptr(math.Max(upper, 0))
		}
		return v
	}
	return resolved(math.Min(math.Max(beta, 0), 1), u, "1")
}

// spacingValue is the spacing where it is held: not on a bound, narrow enough,
// and the capsule has a gradient part whose spacing it could be.
func spacingValue(d, u, beta, betaU float64, atBound bool) Value {
	if atBound || u == 0 || !(Coverage*u < widestSpacing*d) || beta-Coverage*betaU < leastGradient {
		return unresolved("m")
	}
	return resolved(d, u, "m")
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
