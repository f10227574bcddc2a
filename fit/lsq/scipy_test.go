package lsq_test

import (
	"fmt"
	"math"
	"path/filepath"
	"testing"

	"gonum.org/v1/gonum/mat"

	"standoff/fit/lsq"
)

// The models of testdata/reference/lsq, with their gradients.
func decay(b []float64, t float64) (y float64, grad []float64) {
	e, f := math.Exp(-b[1]*t), math.Exp(-b[3]*t)
	return b[0]*e + b[2]*f + b[4], []float64{e, -b[0] * t * e, f, -b[2] * t * f, 1}
}

func peak(b []float64, f float64) (y float64, grad []float64) {
	u := (f - b[1]) / b[2]
	e := math.Exp(-u * u)
	return b[0]*e + b[3] + b[4]*f, []float64{e, 2 * b[0] * e * u / b[2], 2 * b[0] * e * u * u / b[2], 1, f}
}

func resonance(b []float64, f float64) (y float64, grad []float64) {
	u := f / b[1]
	v, w := 1-u*u, u/b[2]
	d := v*v + w*w
	k := -10 / math.Ln10 / d
	return b[0] - 10*math.Log10(d), []float64{1, k * (4*v*u*u - 2*w*w) / b[1], -k * 2 * w * w / b[2]}
}

func logistic(b []float64, x float64) (y float64, grad []float64) {
	e := math.Exp(-b[1] * (x - b[2]))
	s := 1 / (1 + e)
	return b[0] * s, []float64{s, b[0] * s * s * e * (x - b[2]), -b[0] * s * s * e * b[1]}
}

type curve func(b []float64, x float64) (float64, []float64)

var scipyFits = []struct {
	name  string
	model curve
}{
	{"decay", decay}, {"decay-bounded", decay},
	{"peak", peak}, {"peak-bounded", peak},
	{"resonance", resonance}, {"logistic", logistic},
}

// optimum is what scipy found.
type optimum struct {
	start, lower, upper, value, sd []float64
	atBound                        []int
	cost                           float64
}

func referencePath(file string) string {
	return filepath.Join("..", "..", "testdata", "reference", "lsq", file)
}

func readObservations(t testing.TB, name string) (x, y, sigma []float64) {
	for _, row := range readRows(t, referencePath("data.csv")) {
		if row[0] == name {
			x, y, sigma = append(x, parse(t, row[1])), append(y, parse(t, row[2])), append(sigma, parse(t, row[3]))
		}
	}
	return x, y, sigma
}

func readOptimum(t testing.TB, name string) (o optimum) {
	for _, row := range readRows(t, referencePath("optimum.csv")) {
		if row[0] != name {
			continue
		}
		for i, dst := range []*[]float64{&o.start, &o.lower, &o.upper, &o.value, &o.sd} {
			*dst = append(*dst, parse(t, row[i+1]))
		}
		o.atBound = append(o.atBound, int(parse(t, row[6])))
		o.cost = parse(t, row[7])
	}
	return o
}

func curveProblem(model curve, x, y, sigma []float64, analytic bool) lsq.Problem {
	p := lsq.Problem{M: len(y), Residuals: func(dst, b []float64) {
		for i := range dst {
			v, _ := model(b, x[i])
			dst[i] = (v - y[i]) / sigma[i]
		}
	}}
	if analytic {
		p.Jacobian = func(dst *mat.Dense, b []float64) {
			for i := range x {
				_, grad := model(b, x[i])
				for j, g := range grad {
					dst.Set(i, j, g/sigma[i])
				}
			}
		}
	}
	return p
}

// scipy.optimize.least_squares finds the same optimum, bounds and standard
// errors (testdata/reference/lsq).
func TestScipy(t *testing.T) {
	for _, fit := range scipyFits {
		x, y, sigma := readObservations(t, fit.name)
		want := readOptimum(t, fit.name)
		for _, analytic := range []bool{true, false} {
			t.Run(fmt.Sprintf("%s/analytic %v", fit.name, analytic), func(t *testing.T) {
				p := curveProblem(fit.model, x, y, sigma, analytic)
				p.Lower, p.Upper = want.lower, want.upper
				compareOptimum(t, p, want)
			})
		}
	}
}

func compareOptimum(t *testing.T, p lsq.Problem, want optimum) {
	r, err := lsq.Solve(p, want.start, lsq.Settings{})
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("%v, %d iterations, %d evaluations", r.Status, r.Iterations, r.Evaluations)
	if !r.Status.Good() || r.Covariance == nil {
		t.Fatalf("status %v, covariance %v", r.Status, r.Covariance)
	}
	wantClose(t, "cost", r.Cost, want.cost, 1e-9)
	sd := r.StandardErrors(1)
	for j := range r.X {
		wantClose(t, fmt.Sprintf("x[%d]", j), r.X[j], want.value[j], 1e-6)
		wantClose(t, fmt.Sprintf("sd[%d]", j), sd[j], want.sd[j], 1e-5)
		if r.AtBound[j] != want.atBound[j] {
			t.Errorf("x[%d] at bound %d, want %d", j, r.AtBound[j], want.atBound[j])
		}
	}
}
