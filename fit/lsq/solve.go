package lsq

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// solver is the state of one call of Solve.
type solver struct {
	p   Problem
	set Settings
	n   int

	x, r  []float64
	cost  float64   // ½‖r‖²
	fixed []bool    // equal bounds
	size  []float64 // of each parameter: Settings.Scale or a guess

	jac     *mat.Dense
	norm    []float64 // of the Jacobian's columns
	scale   []float64 // D: the largest norm that each column has had
	fresh   bool      // jac belongs to x
	central bool      // differences are central

	radius float64 // Δ, in units of the residuals
	extent float64 // Δ at the start
	root   float64 // √µ of the last step
	first  bool    // no step has been accepted yet
	beyond bool    // a trial from x was not finite

	iterations, evaluations int
}

// Solve finds a local minimum of ½‖r(x)‖² from x0, which is first moved
// within the bounds. An error (ErrUsage, ErrStart) means that the problem is
// wrongly stated or not finite at its start; however the iteration ends
// otherwise, Result.Status says so.
func Solve(p Problem, x0 []float64, set Settings) (*Result, error) {
	if err := p.check(x0, set); err != nil {
		return nil, fmt.Errorf("least squares: %w", err)
	}
	s := newSolver(p, x0, set)
	if err := s.start(); err != nil {
		return nil, fmt.Errorf("least squares: %w", err)
	}
	return s.result(s.iterate()), nil
}

func newSolver(p Problem, x0 []float64, set Settings) *solver {
	n := len(x0)
	s := &solver{
		p: p, set: set.withDefaults(), n: n, size: sizes(set.Scale, x0),
		x: p.clamp(x0), r: make([]float64, p.M), fixed: make([]bool, n),
		jac:  mat.NewDense(p.M, n, nil),
		norm: make([]float64, n), scale: make([]float64, n),
		central: p.Jacobian != nil, first: true,
	}
	for j := range s.fixed {
		lo, hi := p.bounds(j)
		s.fixed[j] = lo == hi
	}
	return s
}

func (s *solver) start() error {
	var ok bool
	if s.cost, ok = s.evaluate(s.r, s.x); !ok {
		return fmt.Errorf("%w: residuals at %g", ErrStart, s.x)
	}
	if !s.differentiate() {
		return fmt.Errorf("%w: derivatives at %g", ErrStart, s.x)
	}
	s.rescale()
	s.resetRadius()
	s.extent = s.radius
	return nil
}

// rescale lets D grow to the column norms at x.
func (s *solver) rescale() {
	for j, v := range s.norm {
		s.scale[j] = math.Max(s.scale[j], v)
	}
}

// resetRadius lets a step be as long as x is, in the metric D, or where x is next to
// zero as long as r. Moré suggests 0.1 to 100 times ‖D x‖: more than once throws MGH09
// far up its valley and BoxBOD onto a plain, half leaves MGH10 on its way (the NIST
// sets).
func (s *solver) resetRadius() {
	s.radius = s.length(s.x)
	if r := norm(s.r); s.radius < 1e-6*r {
		s.radius = r
	}
}

// length returns ‖D p‖.
func (s *solver) length(p []float64) float64 {
	sum := 0.0
	for j, v := range p {
		sum = math.Hypot(sum, s.scale[j]*v)
	}
	return sum
}

// iterate takes steps until there is a reason to end. A reason found with
// forward differences is only a reason to go on with central ones.
func (s *solver) iterate() Status {
	for {
		status := s.descend()
		if s.central || status == MaxIterations {
			return status
		}
		s.central = true
		if !s.differentiate() {
			return NotFinite
		}
		s.rescale()
		s.resetRadius()
	}
}

func (s *solver) descend() Status {
	for {
		if !s.fresh && !s.differentiate() {
			return NotFinite
		}
		s.rescale()
		free := s.free()
		if s.stationary(free, s.set.GTol) {
			return ConvergedG
		}
		if status := s.search(free); status != NotRun {
			return status
		}
	}
}
