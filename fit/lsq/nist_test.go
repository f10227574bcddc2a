package lsq_test

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/mat"

	"standoff/fit/lsq"
)

// nistSet is one set of the NIST Statistical Reference Datasets, nonlinear
// regression: certified to 11 digits by multiple-precision calculation.
type nistSet struct {
	name   string
	model  func(b []float64, x float64) float64
	grad   func(dst, b []float64, x float64)
	starts [2][]float64
	value  []float64
	sd     []float64
	rss    float64
	rsd    float64 // residual standard deviation
}

var nistSets = []nistSet{
	{
		name:  "misra1a",
		model: func(b []float64, x float64) float64 { return b[0] * (1 - math.Exp(-b[1]*x)) },
		grad: func(dst, b []float64, x float64) {
			e := math.Exp(-b[1] * x)
			dst[0], dst[1] = 1-e, b[0]*x*e
		},
		starts: [2][]float64{{500, 1e-4}, {250, 5e-4}},
		value:  []float64{2.3894212918e+02, 5.5015643181e-04},
		sd:     []float64{2.7070075241e+00, 7.2668688436e-06},
		rss:    1.2455138894e-01, rsd: 1.0187876330e-01,
	},
	{
		name: "mgh09",
		model: func(b []float64, x float64) float64 {
			return b[0] * (x*x + b[1]*x) / (x*x + b[2]*x + b[3])
		},
		grad: func(dst, b []float64, x float64) {
			top, bottom := x*x+b[1]*x, x*x+b[2]*x+b[3]
			dst[0], dst[1] = top/bottom, b[0]*x/bottom
			dst[3] = -b[0] * top / (bottom * bottom)
			dst[2] = x * dst[3]
		},
		starts: [2][]float64{{25, 39, 41.5, 39}, {.25, .39, .415, .39}},
		value:  []float64{1.9280693458e-01, 1.9128232873e-01, 1.2305650693e-01, 1.3606233068e-01},
		sd:     []float64{1.1435312227e-02, 1.9633220911e-01, 8.0842031232e-02, 9.0025542308e-02},
		rss:    3.0750560385e-04, rsd: 6.6279236551e-03,
	},
	{
		name: "eckerle4",
		model: func(b []float64, x float64) float64 {
			u := (x - b[2]) / b[1]
			return b[0] / b[1] * math.Exp(-u*u/2)
		},
		grad: func(dst, b []float64, x float64) {
			u := (x - b[2]) / b[1]
			e := math.Exp(-u*u/2) / b[1]
			dst[0], dst[1], dst[2] = e, b[0]/b[1]*e*(u*u-1), b[0]/b[1]*e*u
		},
		starts: [2][]float64{{1, 10, 500}, {1.5, 5, 450}},
		value:  []float64{1.5543827178e+00, 4.0888321754e+00, 4.5154121844e+02},
		sd:     []float64{1.5408051163e-02, 4.6803020753e-02, 4.6800518816e-02},
		rss:    1.4635887487e-03, rsd: 6.7629245447e-03,
	},
}

func (set nistSet) problem(y, x []float64, analytic bool) lsq.Problem {
	p := lsq.Problem{M: len(y), Residuals: func(dst, b []float64) {
		for i := range dst {
			dst[i] = set.model(b, x[i]) - y[i]
		}
	}}
	if analytic {
		p.Jacobian = func(dst *mat.Dense, b []float64) {
			for i := range x {
				set.grad(dst.RawRowView(i), b, x[i])
			}
		}
	}
	return p
}

func TestNIST(t *testing.T) {
	for _, set := range nistSets {
		y, x := readColumns(t, filepath.Join("testdata", set.name+".csv"))
		for i, start := range set.starts {
			for _, analytic := range []bool{true, false} {
				t.Run(fmt.Sprintf("%s/start %d/analytic %v", set.name, i+1, analytic), func(t *testing.T) {
					set.judge(t, set.problem(y, x, analytic), start)
				})
			}
		}
	}
}

func (set nistSet) judge(t *testing.T, p lsq.Problem, start []float64) {
	r, err := lsq.Solve(p, start, lsq.Settings{})
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("%v, %d iterations, %d evaluations, condition %.3g", r.Status, r.Iterations, r.Evaluations, r.Condition)
	if !r.Status.Good() {
		t.Errorf("status %v", r.Status)
	}
	dof := p.M - len(start)
	wantClose(t, "residual sum of squares", 2*r.Cost, set.rss, 1e-8)
	wantClose(t, "residual sd", math.Sqrt(r.ReducedChiSquare(dof)), set.rsd, 1e-8)
	sd := r.StandardErrors(r.ReducedChiSquare(dof))
	for j := range start {
		t.Logf("b%d: %.1f digits, sd %.1f digits", j+1, digits(r.X[j], set.value[j]), digits(sd[j], set.sd[j]))
		wantClose(t, fmt.Sprintf("b%d", j+1), r.X[j], set.value[j], 1e-6)
		wantClose(t, fmt.Sprintf("sd of b%d", j+1), sd[j], set.sd[j], 1e-4)
	}
}

// digits is the log relative error, capped at the eleven that are certified.
func digits(got, want float64) float64 {
	return math.Min(11, -math.Log10(math.Abs(got/want-1)))
}

func wantClose(t *testing.T, what string, got, want, rel float64) {
	t.Helper()
	if !(math.Abs(got-want) <= rel*math.Abs(want)) {
		t.Errorf("%s: got %.12g, want %.12g within %g", what, got, want, rel)
	}
}

// readColumns reads a CSV file of two columns under a header.
func readColumns(t testing.TB, path string) (first, second []float64) {
	t.Helper()
	for _, row := range readRows(t, path) {
		first = append(first, parse(t, row[0]))
		second = append(second, parse(t, row[1]))
	}
	return first, second
}

func readRows(t testing.TB, path string) [][]string {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows[1:]
}

func parse(t testing.TB, text string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}
