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
		return unresolved("1")
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
