package lsq_test

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"

	"standoff/fit/lsq"
)

// line is y = a + b·x at x = 0 … 4, whose JᵀJ is [5 10; 10 30].
func line(y []float64) lsq.Problem {
	return lsq.Problem{M: len(y), Residuals: func(dst, x []float64) {
		for i := range dst {
			dst[i] = x[0] + x[1]*float64(i) - y[i]
		}
	}}
}

func solve(t *testing.T, p lsq.Problem, x0 []float64, s lsq.Settings) *lsq.Result {
	t.Helper()
	r, err := lsq.Solve(p, x0, s)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// The inverse of [5 10; 10 30] is [0.6 −0.2; −0.2 0.1].
func TestStraightLineCovariance(t *testing.T) {
	r := solve(t, line([]float64{1, 3, 2, 5, 4}), []float64{0, 0}, lsq.Settings{})
	// by hand: Σy = 15, Σxy = 38 → b = 0.8, a = 1.4; Σ residual² = 3.6
	wantClose(t, "a", r.X[0], 1.4, 1e-9)
	wantClose(t, "b", r.X[1], 0.8, 1e-9)
	wantClose(t, "reduced chi-square", r.ReducedChiSquare(3), 1.2, 1e-12)
	wantClose(t, "var a", r.Covariance.At(0, 0), 0.6, 1e-8)
	wantClose(t, "cov", r.Covariance.At(0, 1), -0.2, 1e-8)
	wantClose(t, "var b", r.Covariance.At(1, 1), 0.1, 1e-8)
	wantClose(t, "correlation", r.Correlation().At(1, 0), -math.Sqrt(2./3), 1e-8)
	wantClose(t, "self-correlation", r.Correlation().At(1, 1), 1, 0)
	wantClose(t, "sd b", r.StandardErrors(r.ReducedChiSquare(3))[1], math.Sqrt(0.12), 1e-8)
	// unit columns with cosine c = 10/√150 have singular values √(1±c)
	c := 10 / math.Sqrt(150)
	wantClose(t, "condition", r.Condition, math.Sqrt((1+c)/(1-c)), 1e-8)
	if !math.IsNaN(r.ReducedChiSquare(0)) {
		t.Error("no degrees of freedom: want NaN")
	}
}

// Minimise (x−3)² + (x+y−5)² with x ≤ 2: x = 2, y = 3.
func TestBoundActive(t *testing.T) {
	p := lsq.Problem{M: 2, Upper: []float64{2, math.Inf(1)}, Residuals: func(dst, x []float64) {
		dst[0], dst[1] = x[0]-3, x[0]+x[1]-5
	}}
	for _, start := range [][]float64{{0, 0}, {2, 0}, {9, -4}} { // the last is moved within
		r := solve(t, p, start, lsq.Settings{})
		if !r.Status.Good() || !slices.Equal(r.AtBound, []int{1, 0}) {
			t.Errorf("from %g: %v, at bound %v", start, r.Status, r.AtBound)
		}
		if r.X[0] != 2 {
			t.Errorf("x = %.17g, want the bound itself", r.X[0])
		}
		wantClose(t, "y", r.X[1], 3, 1e-9)
		wantClose(t, "var y", r.Covariance.At(1, 1), 1, 1e-8)
		if r.Covariance.At(0, 0) != 0 || r.Covariance.At(0, 1) != 0 {
			t.Error("a parameter at its bound has a variance")
		}
	}
}

// The step that meets a bound already serves the other parameter in full.
func TestStepAlongBound(t *testing.T) {
	p := lsq.Problem{M: 2, Upper: []float64{2, math.Inf(1)}, Residuals: func(dst, x []float64) {
		dst[0], dst[1] = x[0]-3, x[0]+x[1]-5
	}}
	r := solve(t, p, []float64{0, 0}, lsq.Settings{MaxIterations: 1})
	if r.X[0] != 2 || math.Abs(r.X[1]-3) > 1e-6 {
		t.Errorf("one step leads to %g, want (2, 3)", r.X)
	}
}

// A start at a bound does not hold the parameter there.
func TestLeavesBound(t *testing.T) {
	p := line([]float64{1, 3, 2, 5, 4})
	p.Lower, p.Upper = []float64{0, -1}, []float64{10, 3}
	r := solve(t, p, []float64{0, 3}, lsq.Settings{})
	wantClose(t, "a", r.X[0], 1.4, 1e-9)
	if !r.Status.Good() || !slices.Equal(r.AtBound, []int{0, 0}) {
		t.Errorf("%v, at bound %v", r.Status, r.AtBound)
	}
}

func TestFixedParameter(t *testing.T) {
	p := line([]float64{1, 3, 2, 5, 4})
	p.Lower, p.Upper = []float64{1, math.Inf(-1)}, []float64{1, math.Inf(1)}
	r := solve(t, p, []float64{1, 0}, lsq.Settings{})
	// b = Σx(y−1)/Σx² = (38−10)/30
	wantClose(t, "b", r.X[1], 28./30, 1e-9)
	wantClose(t, "var b", r.Covariance.At(1, 1), 1./30, 1e-8)
	if r.X[0] != 1 || !r.Status.Good() || len(r.Insensitive) != 0 {
		t.Errorf("x %g, %v, insensitive %v", r.X, r.Status, r.Insensitive)
	}
}

// Bounds are never crossed, not even by a difference.
func TestStaysWithinBounds(t *testing.T) {
	p := lsq.Problem{M: 3, Lower: []float64{0, 0}, Upper: []float64{1, 1e-9}}
	p.Residuals = func(dst, x []float64) {
		for j, v := range x {
			if v < p.Lower[j] || v > p.Upper[j] {
				t.Errorf("evaluated at %g", x)
			}
		}
		dst[0], dst[1], dst[2] = x[0]+1, x[1]*1e9-0.3, x[0]*x[1]
	}
	r := solve(t, p, []float64{0.5, 0}, lsq.Settings{})
	wantClose(t, "y", r.X[1], 0.3e-9, 1e-6)
	if !r.Status.Good() || !slices.Equal(r.AtBound, []int{-1, 0}) {
		t.Errorf("%v at %g, at bound %v", r.Status, r.X, r.AtBound)
	}
}

func TestInsensitiveIsNamed(t *testing.T) {
	p := line([]float64{1, 3, 2, 5, 4})
	with := lsq.Problem{M: 5, Residuals: func(dst, x []float64) { p.Residuals(dst, x[:2]) }}
	r := solve(t, with, []float64{0, 0, 7}, lsq.Settings{})
	if r.Status != lsq.NoEffect || r.Status.Good() {
		t.Errorf("status %v", r.Status)
	}
	if !slices.Equal(r.Insensitive, []int{2}) || r.WeakDirection[2] != 1 {
		t.Errorf("insensitive %v, weak direction %g", r.Insensitive, r.WeakDirection)
	}
	if r.Covariance != nil || r.Correlation() != nil || r.StandardErrors(1) != nil || !math.IsInf(r.Condition, 1) {
		t.Error("error bars in spite of a parameter without effect")
	}
	wantClose(t, "a", r.X[0], 1.4, 1e-9)
	if r.X[2] != 7 {
		t.Errorf("a parameter without effect went to %g", r.X[2])
	}
}

func TestNothingHasEffect(t *testing.T) {
	p := lsq.Problem{M: 2, Residuals: func(dst, _ []float64) { dst[0], dst[1] = 1, 2 }}
	r := solve(t, p, []float64{1, 0}, lsq.Settings{})
	if r.Status != lsq.NoEffect || !slices.Equal(r.Insensitive, []int{0, 1}) {
		t.Errorf("%v, insensitive %v", r.Status, r.Insensitive)
	}
}

// Only a + b is determined: each has an effect, but not of its own.
func TestDependentParameters(t *testing.T) {
	p := lsq.Problem{M: 4, Residuals: func(dst, x []float64) {
		for i := range dst {
			dst[i] = (x[0]+x[1])*float64(i+1) + x[2] - []float64{1, 3, 2, 5}[i]
		}
	}}
	r := solve(t, p, []float64{1, 2, 3}, lsq.Settings{})
	// y = 1.1 x + 0 by hand: Σx = 10, Σx² = 30, Σy = 11, Σxy = 33
	wantClose(t, "a+b", r.X[0]+r.X[1], 1.1, 1e-9)
	if !r.Status.Good() || r.Covariance != nil || r.Condition < 1e9 || len(r.Insensitive) != 0 {
		t.Errorf("%v, covariance %v, condition %g", r.Status, r.Covariance, r.Condition)
	}
	d := r.WeakDirection
	if math.Abs(d[0]+d[1]) > 1e-6 || math.Abs(math.Abs(d[0])-math.Sqrt(.5)) > 1e-6 || math.Abs(d[2]) > 1e-6 {
		t.Errorf("weak direction %g, want (1, −1, 0)/√2", d)
	}
}

func TestFewerResidualsThanParameters(t *testing.T) {
	p := lsq.Problem{M: 1, Residuals: func(dst, x []float64) { dst[0] = x[0] + 2*x[1] - 4 }}
	r := solve(t, p, []float64{1, 1}, lsq.Settings{})
	if r.Cost > 1e-20 || !r.Status.Good() || r.Covariance != nil || !(r.Condition > 1e9) {
		t.Errorf("%v, cost %g, covariance %v, condition %g", r.Status, r.Cost, r.Covariance, r.Condition)
	}
}

// From 10 the first full step for ln x = −2 goes to −33, where the residual is NaN.
func TestStepsBackFromNaN(t *testing.T) {
	nan := 0
	p := lsq.Problem{M: 1, Residuals: func(dst, x []float64) {
		dst[0] = math.Log(x[0]) + 2
		if math.IsNaN(dst[0]) {
			nan++
		}
	}}
	r := solve(t, p, []float64{10}, lsq.Settings{})
	wantClose(t, "x", r.X[0], math.Exp(-2), 1e-9)
	if nan == 0 || !r.Status.Good() {
		t.Errorf("%v after %d steps into NaN", r.Status, nan)
	}
}

// The minimum of (x+1)² lies where the residual does not exist.
func TestHeldUpByNaN(t *testing.T) {
	p := lsq.Problem{M: 1, Residuals: func(dst, x []float64) {
		if dst[0] = x[0] + 1; x[0] < 0 {
			dst[0] = math.NaN()
		}
	}}
	r := solve(t, p, []float64{1}, lsq.Settings{})
	if r.Status != lsq.NotFinite || r.Status.Good() {
		t.Errorf("status %v at %g", r.Status, r.X)
	}
	if !(r.X[0] >= 0 && r.X[0] < 1e-6) {
		t.Errorf("x = %g, want the edge of the region", r.X[0])
	}
}

// A Jacobian with the wrong sign points uphill: nothing reduces the cost.
func TestWrongJacobianStalls(t *testing.T) {
	p := line([]float64{1, 3, 2, 5, 4})
	p.Jacobian = func(dst *mat.Dense, _ []float64) {
		for i := range 5 {
			dst.SetRow(i, []float64{-1, -float64(i)})
		}
	}
	if r := solve(t, p, []float64{1, 1}, lsq.Settings{}); r.Status != lsq.Stalled || r.Status.Good() {
		t.Errorf("status %v", r.Status)
	}
}

func TestIterationLimit(t *testing.T) {
	c := classics[0]
	r := solve(t, lsq.Problem{M: c.m, Residuals: c.residuals, Jacobian: c.jacobian}, c.start, lsq.Settings{MaxIterations: 3})
	if r.Status != lsq.MaxIterations || r.Iterations != 3 || r.Status.Good() {
		t.Errorf("%v after %d", r.Status, r.Iterations)
	}
	if r.Jacobian == nil || r.Jacobian.At(0, 0) != -20*r.X[0] {
		t.Error("the Jacobian is not that at X")
	}
}

func TestWrongUse(t *testing.T) {
	ok := line([]float64{1, 2, 3})
	with := func(change func(*lsq.Problem)) lsq.Problem { p := ok; change(&p); return p }
	nan := math.NaN()
	for name, c := range map[string]struct {
		p    lsq.Problem
		x0   []float64
		s    lsq.Settings
		want error
		text string
	}{
		"no residuals":     {p: lsq.Problem{M: 1}, x0: []float64{1}, want: lsq.ErrUsage, text: "no residual function"},
		"no rows":          {p: with(func(p *lsq.Problem) { p.M = 0 }), x0: []float64{1, 1}, want: lsq.ErrUsage, text: "at least 1"},
		"no parameters":    {p: ok, want: lsq.ErrUsage, text: "no parameters"},
		"start NaN":        {p: ok, x0: []float64{1, nan}, want: lsq.ErrUsage, text: "parameter 1 starts at NaN"},
		"lower length":     {p: with(func(p *lsq.Problem) { p.Lower = []float64{0} }), x0: []float64{1, 1}, want: lsq.ErrUsage, text: "1 lower bounds for 2"},
		"upper length":     {p: with(func(p *lsq.Problem) { p.Upper = []float64{0} }), x0: []float64{1, 1}, want: lsq.ErrUsage, text: "1 upper bounds for 2"},
		"bounds cross":     {p: with(func(p *lsq.Problem) { p.Lower, p.Upper = []float64{0, 2}, []float64{1, 1} }), x0: []float64{1, 1}, want: lsq.ErrUsage, text: "parameter 1 has bounds 2 and 1"},
		"bound NaN":        {p: with(func(p *lsq.Problem) { p.Lower = []float64{0, nan} }), x0: []float64{1, 1}, want: lsq.ErrUsage, text: "bounds NaN"},
		"scale length":     {p: ok, x0: []float64{1, 1}, s: lsq.Settings{Scale: []float64{1}}, want: lsq.ErrUsage, text: "1 scales for 2"},
		"scale zero":       {p: ok, x0: []float64{1, 1}, s: lsq.Settings{Scale: []float64{1, 0}}, want: lsq.ErrUsage, text: "scale of parameter 1"},
		"tolerance":        {p: ok, x0: []float64{1, 1}, s: lsq.Settings{XTol: nan}, want: lsq.ErrUsage, text: "tolerance"},
		"residual NaN":     {p: line([]float64{1, nan}), x0: []float64{1, 1}, want: lsq.ErrStart, text: "residuals at [1 1]"},
		"residual too big": {p: line([]float64{1, 1e200}), x0: []float64{1, 1}, want: lsq.ErrStart, text: "residuals at [1 1]"},
		"derivative": {p: with(func(p *lsq.Problem) { p.Jacobian = func(dst *mat.Dense, _ []float64) { dst.Set(0, 0, nan) } }),
			x0: []float64{1, 1}, want: lsq.ErrStart, text: "derivatives at [1 1]"},
	} {
		_, err := lsq.Solve(c.p, c.x0, c.s)
		if !errors.Is(err, c.want) || !strings.Contains(err.Error(), c.text) {
			t.Errorf("%s: got error %v, want %q", name, err, c.text)
		}
	}
}

func TestStatusText(t *testing.T) {
	seen := map[string]bool{}
	for s := lsq.NotRun; s <= lsq.NoEffect; s++ {
		if text := s.String(); text == "" || seen[text] {
			t.Errorf("status %d reads %q", int(s), text)
		}
		seen[s.String()] = true
	}
	if got := lsq.Status(99).String(); got != "status 99" {
		t.Errorf("unknown status reads %q", got)
	}
}
