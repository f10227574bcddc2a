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
	{
		name:  "boxbod",
		model: func(b []float64, x float64) float64 { return b[0] * (1 - math.Exp(-b[1]*x)) },
		grad: func(dst, b []float64, x float64) {
			e := math.Exp(-b[1] * x)
			dst[0], dst[1] = 1-e, b[0]*x*e
		},
		starts: [2][]float64{{1, 1}, {100, 0.75}},
		value:  []float64{2.1380940889e+02, 5.4723748542e-01},
		sd:     []float64{1.2354515176e+01, 1.0455993237e-01},
		rss:    1.1680088766e+03, rsd: 1.7088072423e+01,
	},
	{
		name:  "rat42",
		model: func(b []float64, x float64) float64 { return b[0] / (1 + math.Exp(b[1]-b[2]*x)) },
		grad: func(dst, b []float64, x float64) {
			e := math.Exp(b[1] - b[2]*x)
			dst[0] = 1 / (1 + e)
			dst[1] = -b[0] * e / ((1 + e) * (1 + e))
			dst[2] = -x * dst[1]
		},
		starts: [2][]float64{{100, 1, 0.1}, {75, 2.5, 0.07}},
		value:  []float64{7.2462237576e+01, 2.6180768402e+00, 6.7359200066e-02},
		sd:     []float64{1.7340283401e+00, 8.8295217536e-02, 3.4465663377e-03},
		rss:    8.0565229338e+00, rsd: 1.1587725499e+00,
	},
	{
		name:  "mgh10",
		model: func(b []float64, x float64) float64 { return b[0] * math.Exp(b[1]/(x+b[2])) },
		grad: func(dst, b []float64, x float64) {
			e := math.Exp(b[1] / (x + b[2]))
			dst[0], dst[1] = e, b[0]*e/(x+b[2])
			dst[2] = -dst[1] * b[1] / (x + b[2])
		},
		starts: [2][]float64{{2, 400000, 25000}, {0.02, 4000, 250}},
		value:  []float64{5.6096364710e-03, 6.1813463463e+03, 3.4522363462e+02},
		sd:     []float64{1.5687892471e-04, 2.3309021107e+01, 7.8486103508e-01},
		rss:    8.7945855171e+01, rsd: 2.6009740065e+00,
	},
	{
		name: "rat43",
		model: func(b []float64, x float64) float64 {
			return b[0] / math.Pow(1+math.Exp(b[1]-b[2]*x), 1/b[3])
		},
		grad: func(dst, b []float64, x float64) {
			e := math.Exp(b[1] - b[2]*x)
			p := math.Pow(1+e, -1/b[3])
			dst[0] = p
			dst[1] = -b[0] * p * e / (b[3] * (1 + e))
			dst[2] = -x * dst[1]
			dst[3] = b[0] * p * math.Log(1+e) / (b[3] * b[3])
		},
		starts: [2][]float64{{100, 10, 1, 1}, {700, 5, 0.75, 1.3}},
		value:  []float64{6.9964151270e+02, 5.2771253025e+00, 7.5962938329e-01, 1.2792483859e+00},
		sd:     []float64{1.6302297817e+01, 2.0828735829e+00, 1.9566123451e-01, 6.8761936385e-01},
		rss:    8.7864049080e+03, rsd: 2.8262414662e+01,
	},
	{
		name:  "bennett5",
		model: func(b []float64, x float64) float64 { return b[0] * math.Pow(b[1]+x, -1/b[2]) },
		grad: func(dst, b []float64, x float64) {
			p := math.Pow(b[1]+x, -1/b[2])
			dst[0], dst[1] = p, -b[0]*p/(b[2]*(b[1]+x))
			dst[2] = b[0] * p * math.Log(b[1]+x) / (b[2] * b[2])
		},
		starts: [2][]float64{{-2000, 50, .8}, {-1500, 45, .85}},
		value:  []float64{-2.5235058043e+03, 4.6736564644e+01, 9.3218483193e-01},
		sd:     []float64{2.9715175411e+02, 1.2448871856e+00, 2.0272299378e-02},
		rss:    5.2404744073e-04, rsd: 1.8629312528e-03,
	},
	{
		name: "thurber",
		model: func(b []float64, x float64) float64 {
			return (b[0] + x*(b[1]+x*(b[2]+x*b[3]))) / (1 + x*(b[4]+x*(b[5]+x*b[6])))
		},
		grad: func(dst, b []float64, x float64) {
			top, bottom := b[0]+x*(b[1]+x*(b[2]+x*b[3])), 1+x*(b[4]+x*(b[5]+x*b[6]))
			for k := range 4 {
				dst[k] = math.Pow(x, float64(k)) / bottom
			}
			for k := range 3 {
				dst[4+k] = -top * math.Pow(x, float64(k+1)) / (bottom * bottom)
			}
		},
		starts: [2][]float64{{1000, 1000, 400, 40, 0.7, 0.3, 0.03}, {1300, 1500, 500, 75, 1, 0.4, 0.05}},
		value: []float64{1.2881396800e+03, 1.4910792535e+03, 5.8323836877e+02, 7.5416644291e+01,
			9.6629502864e-01, 3.9797285797e-01, 4.9727297349e-02},
		sd: []float64{4.6647963344e+00, 3.9571156086e+01, 2.8698696102e+01, 5.5675370270e+00,
			3.1333340687e-02, 1.4984928198e-02, 6.5842344623e-03},
		rss: 5.6427082397e+03, rsd: 1.3714600784e+01,
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
