package lsq

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/mat"
)

// step is a proposed move.
type step struct {
	x         []float64 // where it leads, within the bounds
	length    float64   // ‖D p‖
	predicted float64   // reduction of ½‖r‖² by the linear model
	slope     float64   // derivative of ½‖r‖² along the step at its start
	potential float64   // reduction predicted for the full step without bounds
	full      bool      // neither the radius nor a bound cut it short
}

// free lists the parameters that may move from x: not fixed, not without
// effect, and not at a bound that the gradient pushes them against.
func (s *solver) free() []int {
	dead := s.dead()
	var free []int
	for j := range s.x {
		if s.fixed[j] || dead[j] || s.blocked(j) {
			continue
		}
		free = append(free, j)
	}
	return free
}

func (s *solver) blocked(j int) bool {
	lo, hi := s.p.bounds(j)
	g := s.gradient(j)
	return s.x[j] <= lo && g >= 0 || s.x[j] >= hi && g <= 0
}

// gradient returns the derivative of ½‖r‖² with respect to parameter j.
func (s *solver) gradient(j int) float64 {
	return mat.Dot(s.jac.ColView(j), mat.NewVecDense(s.p.M, s.r))
}

// stationary reports whether r is orthogonal to every free column, the cosine
// being at most tol. It is when there are none.
func (s *solver) stationary(free []int, tol float64) bool {
	size := norm(s.r)
	for _, j := range free {
		if math.Abs(s.gradient(j)) > tol*s.norm[j]*size {
			return false
		}
	}
	return true
}

// scaled returns the free columns of J D⁻¹.
func (s *solver) scaled(free []int) *mat.Dense {
	a := mat.NewDense(s.p.M, len(free), nil)
	for k, j := range free {
		column := mat.Col(nil, j, s.jac)
		floats.Scale(1/s.scale[j], column)
		a.SetCol(k, column)
	}
	return a
}

// propose finds the step of the free parameters within the trust radius and
// the bounds; t is the linear model in z = D p.
func (s *solver) propose(t triangle, free []int) step {
	m := t.trust(s.radius, s.root)
	s.root = m.root
	stops := s.clip(t, m.z, free)
	st := step{x: slices.Clone(s.x), potential: m.potential, full: m.full && len(stops) == 0}
	for k, j := range free {
		st.x[j] += m.z[k] / s.scale[j]
	}
	for j, bound := range stops {
		st.x[j] = bound // exactly, so that it counts as being there
	}
	st.length = norm(m.z)
	st.predicted, st.slope = t.reduction(m.z)
	return st
}

// clip stops the components of z that would cross a bound there and solves
// again for the others with the same µ, until all are within. It returns the
// bounds at which parameters were stopped. Each round stops at least one, so
// it ends.
func (s *solver) clip(t triangle, z []float64, free []int) (stops map[int]float64) {
	rest := make([]int, len(free))
	for k := range rest {
		rest[k] = k
	}
	stops = map[int]float64{}
	for {
		within := slices.DeleteFunc(slices.Clone(rest), func(k int) bool {
			j := free[k]
			bound, crossed := s.crossed(j, s.x[j]+z[k]/s.scale[j])
			if crossed {
				stops[j] = bound
				z[k] = (bound - s.x[j]) * s.scale[j]
			}
			return crossed
		})
		if len(within) == len(rest) || len(within) == 0 {
			return stops
		}
		rest = within
		held := t.held(z, rest).damp(s.root)
		for i, v := range held.minimum() {
			z[rest[i]] = v
		}
	}
}

// crossed returns the bound that parameter j would cross at x.
func (s *solver) crossed(j int, x float64) (bound float64, ok bool) {
	lo, hi := s.p.bounds(j)
	switch {
	case x < lo:
		return lo, true
	case x > hi:
		return hi, true
	}
	return 0, false
}
