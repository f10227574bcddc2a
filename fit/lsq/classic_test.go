package lsq_test

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"standoff/fit/lsq"
)

// Problems of J. J. Moré, B. S. Garbow and K. E. Hillstrom, "Testing
// unconstrained optimization software", ACM TOMS 7 (1981), with their standard
// starts and published minima (from memory).
type classic struct {
	name      string
	m         int
	residuals func(r, x []float64)
	jacobian  func(dst *mat.Dense, x []float64)
	start     []float64
	solution  []float64
	minimum   float64 // of ‖r‖²
	atol      float64 // on x
}

var classics = []classic{
	{
		name: "Rosenbrock", m: 2,
		residuals: func(r, x []float64) { r[0], r[1] = 10*(x[1]-x[0]*x[0]), 1-x[0] },
		jacobian: func(dst *mat.Dense, x []float64) {
			dst.SetRow(0, []float64{-20 * x[0], 10})
			dst.SetRow(1, []float64{-1, 0})
		},
		start: []float64{-1.2, 1}, solution: []float64{1, 1}, atol: 1e-9,
	},
	{
		name: "Powell singular", m: 4, // JᵀJ has rank 2 at the solution
		residuals: func(r, x []float64) {
			r[0], r[1] = x[0]+10*x[1], math.Sqrt(5)*(x[2]-x[3])
			r[2], r[3] = math.Pow(x[1]-2*x[2], 2), math.Sqrt(10)*math.Pow(x[0]-x[3], 2)
		},
		jacobian: func(dst *mat.Dense, x []float64) {
			a, b := 2*(x[1]-2*x[2]), 2*math.Sqrt(10)*(x[0]-x[3])
			dst.SetRow(0, []float64{1, 10, 0, 0})
			dst.SetRow(1, []float64{0, 0, math.Sqrt(5), -math.Sqrt(5)})
			dst.SetRow(2, []float64{0, a, -2 * a, 0})
			dst.SetRow(3, []float64{b, 0, 0, -b})
		},
		start: []float64{3, -1, 0, 1}, solution: []float64{0, 0, 0, 0}, atol: 1e-6,
	},
	{
		name: "Freudenstein and Roth", m: 2, // the local minimum that this start leads to
		residuals: func(r, x []float64) {
			r[0] = -13 + x[0] + ((5-x[1])*x[1]-2)*x[1]
			r[1] = -29 + x[0] + ((x[1]+1)*x[1]-14)*x[1]
		},
		jacobian: func(dst *mat.Dense, x []float64) {
			dst.SetRow(0, []float64{1, (10-3*x[1])*x[1] - 2})
			dst.SetRow(1, []float64{1, (3*x[1]+2)*x[1] - 14})
		},
		start: []float64{0.5, -2}, solution: []float64{11.4128, -0.896805}, minimum: 48.98425, atol: 1e-4,
	},
	{
		name: "Bard", m: 15,
		residuals: func(r, x []float64) {
			for i := range bardY {
				u, v, w := bardUVW(i)
				r[i] = bardY[i] - (x[0] + u/(v*x[1]+w*x[2]))
			}
		},
		jacobian: func(dst *mat.Dense, x []float64) {
			for i := range bardY {
				u, v, w := bardUVW(i)
				d := math.Pow(v*x[1]+w*x[2], 2)
				dst.SetRow(i, []float64{-1, u * v / d, u * w / d})
			}
		},
		start: []float64{1, 1, 1}, solution: []float64{0.08241056, 1.133036, 2.343695}, minimum: 8.21487e-3, atol: 1e-5,
	},
}

var bardY = []float64{0.14, 0.18, 0.22, 0.25, 0.29, 0.32, 0.35, 0.39, 0.37, 0.58, 0.73, 0.96, 1.34, 2.10, 4.39}

func bardUVW(i int) (u, v, w float64) {
	u, v = float64(i+1), float64(15-i)
	return u, v, math.Min(u, v)
}

func TestClassic(t *testing.T) {
	for _, c := range classics {
		for _, analytic := range []bool{true, false} {
			t.Run(fmt.Sprintf("%s/analytic %v", c.name, analytic), func(t *testing.T) {
				p := lsq.Problem{M: c.m, Residuals: c.residuals}
				if analytic {
					p.Jacobian = c.jacobian
				}
				c.judge(t, p)
			})
		}
	}
}

func (c classic) judge(t *testing.T, p lsq.Problem) {
	r, err := lsq.Solve(p, c.start, lsq.Settings{})
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("%v, %d iterations, %d evaluations, x %.9g, condition %.3g", r.Status, r.Iterations, r.Evaluations, r.X, r.Condition)
	if !r.Status.Good() {
		t.Errorf("status %v", r.Status)
	}
	if got := 2 * r.Cost; math.Abs(got-c.minimum) > 1e-6*c.minimum+1e-18 {
		t.Errorf("minimum %.9g, want %.9g", got, c.minimum)
	}
	for j, want := range c.solution {
		if math.Abs(r.X[j]-want) > c.atol {
			t.Errorf("x[%d] = %.9g, want %.9g", j, r.X[j], want)
		}
	}
}

// At the solution of Powell's problem JᵀJ is singular: no error bars may come
// out of it.
func TestSingularHasNoCovariance(t *testing.T) {
	c := classics[1]
	r, err := lsq.Solve(lsq.Problem{M: c.m, Residuals: c.residuals, Jacobian: c.jacobian},
		[]float64{0, 0, 0, 0}, lsq.Settings{})
	if err != nil {
		t.Fatal(err)
	}
	if r.Covariance != nil || r.Condition < 1e15 {
		t.Errorf("covariance %v, condition %g; want none", r.Covariance, r.Condition)
	}
}
