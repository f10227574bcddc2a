package lsq

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// ErrUsage marks a problem that is wrongly stated: sizes that do not agree,
// bounds that cross, a start that is not finite. Test with errors.Is.
var ErrUsage = errors.New("wrong use of least squares")

// ErrStart marks a start at which the residuals or their derivatives are not
// finite. Test with errors.Is.
var ErrStart = errors.New("not finite at the start")

// Problem is min_x ½‖r(x)‖².
type Problem struct {
	// Residuals fills dst, of length M, with r(x). It must not keep or change
	// x. A value that is not finite makes the solver step back.
	Residuals func(dst, x []float64)

	// Jacobian fills dst, M×N and zero on entry, with ∂rᵢ/∂xⱼ. When nil the
	// solver takes differences of Residuals: forward ones far from the
	// solution, central ones near it.
	Jacobian func(dst *mat.Dense, x []float64)

	M int // number of residuals

	// Lower and Upper bound the parameters; nil for none, ±Inf for none on
	// one side. Equal bounds hold a parameter fixed.
	Lower, Upper []float64
}

// Settings tune the solver. Zero values stand for the defaults.
type Settings struct {
	MaxIterations int // trial steps; default 1000

	// FTol ends the iteration when a full Gauss–Newton step can be expected
	// to reduce ½‖r‖² by no more than this fraction (the square of the
	// relative offset of Bates & Watts, 1981), or by no more than the
	// rounding error of ½‖r‖²; default 1e-15.
	FTol float64
	// XTol ends it when such a step changes no parameter by more than this
	// fraction of its size; default 1e-12.
	XTol float64
	// GTol ends it when r is orthogonal to every free column of J: the
	// cosine of the angle between them is no more than this; default 1e-12.
	GTol float64

	// Scale is the typical size of each parameter, used for difference steps,
	// h = ε^½ or ε^⅓ times max(|x|, Scale), and to judge what counts as no
	// effect. When nil it is guessed for the steps, from the start or as 1;
	// give it when a parameter passes near zero and is not of order 1.
	Scale []float64
}

const (
	defaultIterations = 1000
	defaultFTol       = 1e-15
	defaultXTol       = 1e-12
	defaultGTol       = 1e-12
)

func (s Settings) withDefaults() Settings {
	if s.MaxIterations == 0 {
		s.MaxIterations = defaultIterations
	}
	if s.FTol == 0 {
		s.FTol = defaultFTol
	}
	if s.XTol == 0 {
		s.XTol = defaultXTol
	}
	if s.GTol == 0 {
		s.GTol = defaultGTol
	}
	return s
}

// sizes returns the typical size of each parameter.
func sizes(scale, x0 []float64) []float64 {
	if scale != nil {
		return scale
	}
	size := make([]float64, len(x0))
	for j, x := range x0 {
		size[j] = 1e-3 * math.Abs(x)
		if size[j] == 0 {
			size[j] = 1
		}
	}
	return size
}

func (p Problem) check(x0 []float64, s Settings) error {
	n := len(x0)
	switch {
	case p.Residuals == nil:
		return fmt.Errorf("%w: no residual function", ErrUsage)
	case p.M < 1:
		return fmt.Errorf("%w: %d residuals, need at least 1", ErrUsage, p.M)
	case n == 0:
		return fmt.Errorf("%w: no parameters", ErrUsage)
	case p.Lower != nil && len(p.Lower) != n:
		return fmt.Errorf("%w: %d lower bounds for %d parameters", ErrUsage, len(p.Lower), n)
	case p.Upper != nil && len(p.Upper) != n:
		return fmt.Errorf("%w: %d upper bounds for %d parameters", ErrUsage, len(p.Upper), n)
	case s.MaxIterations < 0 || !(s.FTol >= 0 && s.XTol >= 0 && s.GTol >= 0):
		return fmt.Errorf("%w: negative limit or tolerance", ErrUsage)
	}
	if err := checkScale(s.Scale, n); err != nil {
		return err
	}
	return p.checkStart(x0)
}

func checkScale(scale []float64, n int) error {
	if scale == nil {
		return nil
	}
	if len(scale) != n {
		return fmt.Errorf("%w: %d scales for %d parameters", ErrUsage, len(scale), n)
	}
	for j, v := range scale {
		if !(v > 0) || math.IsInf(v, 1) {
			return fmt.Errorf("%w: scale of parameter %d is %g, need a positive number", ErrUsage, j, v)
		}
	}
	return nil
}

func (p Problem) checkStart(x0 []float64) error {
	for j, x := range x0 {
		if !finite(x) {
			return fmt.Errorf("%w: parameter %d starts at %g", ErrUsage, j, x)
		}
		lo, hi := p.bounds(j)
		if !(lo <= hi) || math.IsInf(lo, 1) || math.IsInf(hi, -1) {
			return fmt.Errorf("%w: parameter %d has bounds %g and %g", ErrUsage, j, lo, hi)
		}
	}
	return nil
}

// bounds returns the limits of parameter j, infinite where there are none.
func (p Problem) bounds(j int) (lo, hi float64) {
	lo, hi = math.Inf(-1), math.Inf(1)
	if p.Lower != nil {
		lo = p.Lower[j]
	}
	if p.Upper != nil {
		hi = p.Upper[j]
	}
	return lo, hi
}

// clamp returns x moved to the nearest point within the bounds.
func (p Problem) clamp(x []float64) []float64 {
	y := make([]float64, len(x))
	for j, v := range x {
		lo, hi := p.bounds(j)
		y[j] = math.Max(lo, math.Min(hi, v))
	}
	return y
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }
