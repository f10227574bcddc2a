package lsq

import (
	"math"

	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/mat"
)

// result gathers what is known where the iteration ended.
func (s *solver) result(status Status) *Result {
	res := &Result{
		X: s.x, Residuals: s.r, Cost: s.cost, Status: status,
		Iterations: s.iterations, AtBound: s.atBound(), Condition: math.NaN(),
	}
	if !s.fresh && !s.differentiate() {
		res.Status = NotFinite
	}
	res.Evaluations = s.evaluations
	if !s.fresh {
		return res
	}
	res.Jacobian = s.jac
	res.Insensitive = s.insensitive()
	if len(res.Insensitive) > 0 && (status.Good() || status == Stalled) {
		res.Status = NoEffect
	}
	s.estimate(res)
	return res
}

func (s *solver) atBound() []int {
	at := make([]int, s.n)
	for j, x := range s.x {
		switch lo, hi := s.p.bounds(j); {
		case x <= lo:
			at[j] = -1
		case x >= hi:
			at[j] = 1
		}
	}
	return at
}

func (s *solver) insensitive() []int {
	var list []int
	for j, dead := range s.dead() {
		if dead {
			list = append(list, j)
		}
	}
	return list
}

// estimate sets covariance, condition and weak direction from the singular
// values of the columns between bounds.
func (s *solver) estimate(res *Result) {
	var free []int
	for j, at := range res.AtBound {
		if at == 0 {
			free = append(free, j)
		}
	}
	if len(free) == 0 {
		res.Covariance = mat.NewSymDense(s.n, nil)
		return
	}
	for _, j := range res.Insensitive {
		if res.AtBound[j] == 0 {
			res.Condition = math.Inf(1)
			res.WeakDirection = make([]float64, s.n)
			res.WeakDirection[j] = 1
			return
		}
	}
	values, v, ok := s.decompose(free)
	if !ok {
		return
	}
	smallest, largest := values[len(values)-1], values[0]
	res.Condition = largest / math.Abs(smallest) // the sign of a zero
	res.WeakDirection = s.spread(mat.Col(nil, len(free)-1, v), free)
	if smallest > s.resolution()*largest {
		res.Covariance = s.covariance(values, v, free)
	}
}

// decompose returns the singular values, largest first, and the right
// singular vectors of the free columns scaled to unit norm.
func (s *solver) decompose(free []int) (values []float64, v *mat.Dense, ok bool) {
	k := len(free)
	a := mat.NewDense(max(s.p.M, k), k, nil) // rows of zeros when there are too few residuals
	for i, j := range free {
		for row := range s.p.M {
			a.Set(row, i, s.jac.At(row, j)/s.norm[j])
		}
	}
	var svd mat.SVD
	if !svd.Factorize(a, mat.SVDThinV) {
		return nil, nil, false
	}
	v = new(mat.Dense)
	svd.VTo(v)
	return svd.Values(nil), v, true
}

// resolution is the ratio of singular values at which the smaller is lost in
// the errors of the Jacobian: rounding, or a central difference's ε^⅔.
func (s *solver) resolution() float64 {
	if s.p.Jacobian == nil {
		return negligible
	}
	return epsilon * float64(max(s.p.M, s.n))
}

// spread puts the components of a vector over the free parameters at their
// places among all, the largest one positive.
func (s *solver) spread(v []float64, free []int) []float64 {
	all := make([]float64, s.n)
	for i, j := range free {
		all[j] = v[i]
	}
	if floats.Max(v) < -floats.Min(v) {
		floats.Scale(-1, all)
	}
	return all
}

// covariance returns C⁻¹ V Σ⁻² Vᵀ C⁻¹, with C the column norms.
func (s *solver) covariance(values []float64, v *mat.Dense, free []int) *mat.SymDense {
	cov := mat.NewSymDense(s.n, nil)
	for a, i := range free {
		for b, j := range free[:a+1] {
			sum := 0.0
			for k, sigma := range values {
				sum += v.At(a, k) / sigma * v.At(b, k) / sigma
			}
			cov.SetSym(i, j, sum/s.norm[i]/s.norm[j])
		}
	}
	return cov
}
