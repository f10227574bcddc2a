package lsq

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

const epsilon = 0x1p-52 // spacing of float64 at 1

// Relative difference steps that balance truncation against rounding: √ε for
// a forward difference, ∛ε for a central one (Dennis & Schnabel, "Numerical
// Methods for Unconstrained Optimization and Nonlinear Equations", 1983).
var (
	forwardStep = math.Sqrt(epsilon)
	centralStep = math.Cbrt(epsilon)
)

// evaluate fills dst with r(x) and returns ½‖r‖², or false when that is not
// finite.
func (s *solver) evaluate(dst, x []float64) (float64, bool) {
	s.evaluations++
	s.p.Residuals(dst, x)
	sum := 0.0
	for _, v := range dst {
		sum += v * v
	}
	return sum / 2, finite(sum)
}

// differentiate sets the Jacobian at x and its column norms, or returns false
// when a derivative is not finite.
func (s *solver) differentiate() bool {
	s.fresh = false
	s.jac.Zero()
	if s.p.Jacobian != nil {
		s.p.Jacobian(s.jac, s.x)
	} else if !s.difference() {
		return false
	}
	for j := range s.norm {
		s.norm[j] = s.columnNorm(j)
		if !finite(s.norm[j]) {
			return false
		}
	}
	s.fresh = true
	return true
}

// difference fills the Jacobian with difference quotients, all of them taken
// within the bounds.
func (s *solver) difference() bool {
	steps := make([]float64, s.n)
	for j := range s.x {
		if s.fixed[j] {
			continue
		}
		column, step, ok := s.differenceColumn(j, math.Max(math.Abs(s.x[j]), s.size[j]))
		if !ok {
			return false
		}
		s.jac.SetCol(j, column)
		steps[j] = step
	}
	s.denoise(steps)
	return true
}

// denoise clears columns that are rounding noise: the step changed r by less
// than the rounding error of its terms. Where nobody told the size of a
// parameter a step suited to 1 gets a second chance first, for one that
// happens to be near zero.
func (s *solver) denoise(steps []float64) {
	terms := norm(s.r)
	for j, x := range s.x {
		terms = math.Max(terms, math.Abs(x)*s.columnNorm(j))
	}
	isNoise := func(j int, step float64) bool { return s.columnNorm(j)*step <= epsilon*terms }
	for j := range s.x {
		if s.fixed[j] || !isNoise(j, steps[j]) {
			continue
		}
		if s.set.Scale == nil {
			if column, step, ok := s.differenceColumn(j, math.Max(1, math.Abs(s.x[j]))); ok {
				s.jac.SetCol(j, column)
				steps[j] = step
			}
		}
		if isNoise(j, steps[j]) {
			s.jac.SetCol(j, make([]float64, s.p.M))
		}
	}
}

func (s *solver) columnNorm(j int) float64 { return mat.Norm(s.jac.ColView(j), 2) }

// differenceColumn returns ∂r/∂xⱼ and how far x was moved for it.
func (s *solver) differenceColumn(j int, size float64) (column []float64, step float64, ok bool) {
	lo, hi := s.p.bounds(j)
	below, above := s.x[j]-lo, hi-s.x[j]
	if h := centralStep * size; s.central && h <= below && h <= above {
		if column, ok = s.quotient(j, -h, h); ok {
			return column, 2 * h, true
		}
	}
	h := forwardStep * size
	back, ahead := -math.Min(h, below), math.Min(h, above)
	order := []float64{ahead, back}
	if ahead < -back {
		order = []float64{back, ahead}
	}
	for _, h := range order {
		if column, ok = s.quotient(j, 0, h); ok {
			return column, math.Abs(h), true
		}
	}
	return nil, 0, false
}

// quotient returns (r(x+b·eⱼ) − r(x+a·eⱼ))/(b−a), or false when that is not
// finite.
func (s *solver) quotient(j int, a, b float64) (column []float64, ok bool) {
	ra, xa, okA := s.probe(j, a)
	rb, xb, okB := s.probe(j, b)
	if !okA || !okB || xa == xb {
		return nil, false
	}
	column = make([]float64, s.p.M)
	for i := range column {
		column[i] = (rb[i] - ra[i]) / (xb - xa)
	}
	return column, true
}

// probe returns r with parameter j moved by h, and the value that it then
// had: rounded, and within its bounds.
func (s *solver) probe(j int, h float64) (r []float64, x float64, ok bool) {
	if h == 0 {
		return s.r, s.x[j], true
	}
	lo, hi := s.p.bounds(j)
	at := s.x[j]
	s.x[j] = math.Max(lo, math.Min(hi, at+h))
	x, r = s.x[j], make([]float64, s.p.M)
	_, ok = s.evaluate(r, s.x)
	s.x[j] = at
	return r, x, ok
}

// lost is the ratio of effects at which the smaller is below all rounding.
const lost = 1e-30

// dead lists the parameters whose columns are zero, or negligible when the
// sizes of the parameters are known. Fixed ones are not asked.
func (s *solver) dead() []bool {
	dead := make([]bool, s.n)
	most := 0.0
	effect := make([]float64, s.n)
	for j := range effect {
		effect[j] = s.norm[j] * math.Max(math.Abs(s.x[j]), s.size[j])
		most = math.Max(most, effect[j])
	}
	for j := range dead {
		none := s.norm[j] == 0 || effect[j] <= lost*most || s.set.Scale != nil && effect[j] <= negligible*most
		dead[j] = none && !s.fixed[j]
	}
	return dead
}

// negligible is just above the relative rounding error ε^⅔ of a central
// difference.
const negligible = 1e-10
