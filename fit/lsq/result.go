package lsq

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Status says why the iteration ended.
type Status int

// The zero Status is of a result that no solver made.
const (
	NotRun        Status = iota
	ConvergedF           // no step can reduce the cost further
	ConvergedX           // a full step changes no parameter
	ConvergedG           // the residuals are orthogonal to every free column of the Jacobian
	MaxIterations        // the limit came first
	Stalled              // no step however short reduces the cost, yet the gradient is not zero
	NotFinite            // held up by a region where residuals or derivatives are not finite
	NoEffect             // ended, but a free parameter had no effect on any residual
)

var statusText = [...]string{
	NotRun:        "not run",
	ConvergedF:    "converged: the misfit cannot be reduced further",
	ConvergedX:    "converged: the parameters no longer change",
	ConvergedG:    "converged: the gradient is zero",
	MaxIterations: "stopped at the limit of iterations",
	Stalled:       "stalled: no step reduces the misfit",
	NotFinite:     "stopped beside a region where the residuals are not finite",
	NoEffect:      "a parameter has no effect on the residuals",
}

// String describes the status in a phrase.
func (s Status) String() string {
	if s < 0 || int(s) >= len(statusText) {
		return fmt.Sprintf("status %d", int(s))
	}
	return statusText[s]
}

// Good reports whether X is a solution in all of its free parameters.
func (s Status) Good() bool {
	return s == ConvergedF || s == ConvergedX || s == ConvergedG
}

// Result is the point at which the iteration ended and how far to trust it.
type Result struct {
	X          []float64 // parameters
	Residuals  []float64 // r at X
	Cost       float64   // ½‖r‖²
	Status     Status
	Iterations int // trial steps
	// Evaluations counts calls of Problem.Residuals, those for differences included.
	Evaluations int

	// Jacobian is ∂r/∂x at X, M×N; nil when it is not finite there. The
	// column of a parameter that is held fixed is zero when differences made it.
	Jacobian *mat.Dense

	AtBound []int // −1 at the lower bound (or fixed), +1 at the upper, 0 between

	// Covariance is (JᵀJ)⁻¹ of the parameters that are not at a bound, with
	// zero rows for those that are: the covariance of X when each residual has
	// standard deviation 1. Multiply it by ReducedChiSquare when the
	// residuals are known only up to a common factor. Nil when the data do
	// not determine every free parameter.
	Covariance *mat.SymDense

	// Condition is the ratio of the largest to the smallest singular value
	// of the Jacobian's free columns, each scaled to unit norm: 1 when all
	// are orthogonal, +Inf when they are dependent or one is zero, NaN when
	// there is no Jacobian.
	Condition float64

	// WeakDirection is the combination of parameters that the data hold
	// worst: the singular vector of the smallest singular value in Condition,
	// of unit length, largest component positive. Components are in units of
	// each parameter's own effect (change times column norm), zero at a
	// bound; the large ones name the culprits when Condition is large. Nil
	// when no parameter is free.
	WeakDirection []float64

	// Insensitive lists the parameters, not fixed, that had no effect at X:
	// the column is zero, or a difference no larger than rounding error. With
	// Settings.Scale given, also those that change the residuals, when moved
	// by their own size, by less than 1e-10 of what the most effective does.
	Insensitive []int
}

// ReducedChiSquare returns ‖r‖²/dof, the variance of unit weight; NaN when
// dof < 1.
func (r *Result) ReducedChiSquare(dof int) float64 {
	if dof < 1 {
		return math.NaN()
	}
	return 2 * r.Cost / float64(dof)
}

// StandardErrors returns √(variance · Covarianceⱼⱼ) for each parameter, at
// coverage factor k = 1: variance 1 when the residuals were divided by their
// standard uncertainties, ReducedChiSquare when their common scale is unknown.
// Zero for parameters at a bound; nil when there is no covariance.
func (r *Result) StandardErrors(variance float64) []float64 {
	if r.Covariance == nil {
		return nil
	}
	sd := make([]float64, len(r.X))
	for j := range sd {
		sd[j] = math.Sqrt(variance * r.Covariance.At(j, j))
	}
	return sd
}

// Correlation returns Cᵢⱼ/√(CᵢᵢCⱼⱼ) of the covariance C, between −1 and 1.
// A parameter at a bound is correlated with none but itself. Nil when there
// is no covariance.
func (r *Result) Correlation() *mat.SymDense {
	if r.Covariance == nil {
		return nil
	}
	sd := r.StandardErrors(1)
	corr := mat.NewSymDense(len(sd), nil)
	for i := range sd {
		corr.SetSym(i, i, 1)
		for j := range i {
			if product := sd[i] * sd[j]; product > 0 {
				corr.SetSym(i, j, r.Covariance.At(i, j)/product)
			}
		}
	}
	return corr
}
