package fit

import (
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// coverageFactor is the factor by which a standard uncertainty of dof degrees of
// freedom becomes the half-width of an interval that holds at least 95 %: 2, or the
// 97.5 % quantile of Student's t where that is more, which is below 60 degrees.
// Source: JCGM 100:2008, G.3 and table G.2.
func coverageFactor(dof float64) float64 {
	if math.IsInf(dof, 1) || dof > 1e6 {
		return Coverage
	}
	return math.Max(Coverage, distuv.StudentsT{Mu: 0, Sigma: 1, Nu: dof}.Quantile(0.975))
}

// effectiveFreedom is that of a sum of independent contributions, standard
// uncertainties of one quantity, by Welch and Satterthwaite (JCGM 100:2008, G.2b):
//
//	ν = (Σu²)² / Σ(u⁴/ν_i)
//
// Infinite for none, and where all are known infinitely well.
func effectiveFreedom(parts, dof []float64) float64 {
	var total, sum float64
	for i, u := range parts {
		total += u * u
		sum += u * u * u * u / dof[i]
	}
	if sum == 0 {
		return math.Inf(1)
	}
	return total * total / sum
}

// propagate is the law of propagation of uncertainty for several results of several
// correlated inputs (JCGM 100:2008, eq. 13, and H.2.3), C·V·Cᵀ with the sensitivities
// C, results by inputs, and the inputs' covariance V.
func propagate(c *mat.Dense, v mat.Symmetric) *mat.SymDense {
	var cv, all mat.Dense
	cv.Mul(c, v)
	all.Mul(&cv, c.T())
	n, _ := all.Dims()
	out := mat.NewSymDense(n, nil)
	for i := range n {
		for j := range i + 1 {
			out.SetSym(i, j, 0.5*(all.At(i, j)+all.At(j, i)))
		}
	}
	return out
}
