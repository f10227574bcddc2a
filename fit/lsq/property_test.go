package lsq_test

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
	"pgregory.net/rapid"

	"standoff/fit/lsq"
)

// linear is a random problem min ‖A x − b‖ whose columns differ in size by up to
// ten decades.
type linear struct {
	a     *mat.Dense
	b     *mat.VecDense
	start []float64
}

func drawLinear(t *rapid.T) linear {
	n := rapid.IntRange(1, 6).Draw(t, "parameters")
	m := n + rapid.IntRange(1, 10).Draw(t, "more rows")
	// in steps of a thousandth: numbers next to zero would only test rounding
	entry := rapid.Map(rapid.IntRange(-1000, 1000), func(i int) float64 { return float64(i) / 1000 })
	l := linear{a: mat.NewDense(m, n, nil), b: mat.NewVecDense(m, nil)}
	for i := range m {
		l.b.SetVec(i, entry.Draw(t, "b"))
	}
	for j := range n {
		unit := math.Pow(10, float64(rapid.IntRange(-5, 5).Draw(t, "unit")))
		for i := range m {
			l.a.Set(i, j, entry.Draw(t, "a")*unit)
		}
		l.start = append(l.start, entry.Draw(t, "start")/unit)
	}
	return l
}

func (l linear) problem() lsq.Problem {
	m, _ := l.a.Dims()
	return lsq.Problem{
		M: m,
		Residuals: func(dst, x []float64) {
			r := mat.NewVecDense(m, dst)
			r.MulVec(l.a, mat.NewVecDense(len(x), x))
			r.SubVec(r, l.b)
		},
		Jacobian: func(dst *mat.Dense, _ []float64) { dst.Copy(l.a) },
	}
}

// A linear problem has the solution of the QR factorisation of A.
func TestLinearEqualsQR(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l := drawLinear(t)
		r, err := lsq.Solve(l.problem(), l.start, lsq.Settings{})
		if err != nil {
			t.Fatal(err)
		}
		if !(r.Condition < 1e4) {
			t.Skip("nearly dependent columns")
		}
		var qr mat.QR
		qr.Factorize(l.a)
		var want mat.VecDense
		_ = qr.SolveVecTo(&want, false, l.b) // an error here tells only of the units' condition
		for j, x := range r.X {
			size := mat.Norm(l.b, 2) / mat.Norm(l.a.ColView(j), 2)
			if math.Abs(x-want.AtVec(j)) > 1e-8*size*r.Condition+1e-12*math.Abs(l.start[j]) {
				t.Errorf("x[%d] = %.12g, want %.12g (%v)", j, x, want.AtVec(j), r.Status)
			}
		}
		if !r.Status.Good() {
			t.Errorf("status %v", r.Status)
		}
	})
}

// Within bounds a convex problem is solved where the Kuhn–Tucker conditions
// hold: no gradient in the free parameters, and at a bound one that pushes
// outwards.
func TestBoundedLinearIsOptimal(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l := drawLinear(t)
		p := l.problem()
		for j, x := range l.start {
			lo := rapid.Float64Range(-1, 0).Draw(t, "lower")
			hi := rapid.Float64Range(0, 1).Draw(t, "upper")
			unit := mat.Norm(l.a.ColView(j), 2) + 1e-9
			p.Lower = append(p.Lower, x+(lo-1e-3)/unit)
			p.Upper = append(p.Upper, x+(hi+1e-3)/unit)
		}
		r, err := lsq.Solve(p, l.start, lsq.Settings{})
		if err != nil {
			t.Fatal(err)
		}
		for j, x := range r.X {
			checkOptimal(t, r, j, x, p.Lower[j], p.Upper[j])
		}
	})
}

func checkOptimal(t *rapid.T, r *lsq.Result, j int, x, lo, hi float64) {
	if x < lo || x > hi {
		t.Fatalf("x[%d] = %g outside [%g, %g]", j, x, lo, hi)
	}
	column := r.Jacobian.ColView(j)
	g := mat.Dot(column, mat.NewVecDense(len(r.Residuals), r.Residuals))
	small := 1e-7 * (1 + math.Sqrt(2*r.Cost)) * mat.Norm(column, 2)
	switch {
	case r.AtBound[j] == 0 && math.Abs(g) > small,
		r.AtBound[j] < 0 && g < -small, r.AtBound[j] > 0 && g > small:
		t.Errorf("x[%d] at bound %d has gradient %g, more than %g (%v after %d)", j, r.AtBound[j], g, small, r.Status, r.Iterations)
	}
}

// A change of units changes the numbers and nothing else.
func TestUnitsDoNotMatter(t *testing.T) {
	x, y, sigma := readObservations(t, "resonance")
	start := readOptimum(t, "resonance").start
	p := curveProblem(resonance, x, y, sigma, true)
	want := solve(t, p, start, lsq.Settings{})
	for _, unit := range []float64{1e-9, 1e9} {
		scaled := lsq.Problem{M: p.M, Residuals: func(dst, b []float64) {
			p.Residuals(dst, []float64{b[0], b[1] * unit, b[2]})
		}}
		got := solve(t, scaled, []float64{start[0], start[1] / unit, start[2]}, lsq.Settings{})
		wantClose(t, "frequency", got.X[1]*unit, want.X[1], 1e-8)
		wantClose(t, "its sd", got.StandardErrors(1)[1]*unit, want.StandardErrors(1)[1], 1e-7)
		wantClose(t, "condition", got.Condition, want.Condition, 1e-7)
	}
}

func TestDeterministic(t *testing.T) {
	x, y, sigma := readObservations(t, "decay")
	start := readOptimum(t, "decay").start
	p := curveProblem(decay, x, y, sigma, false)
	a, b := solve(t, p, start, lsq.Settings{}), solve(t, p, start, lsq.Settings{})
	for j := range a.X {
		if a.X[j] != b.X[j] || a.Covariance.At(j, j) != b.Covariance.At(j, j) {
			t.Errorf("x[%d]: %.17g and %.17g", j, a.X[j], b.X[j])
		}
	}
}

// Sixty points, five parameters; and as many points as a joint fit has.
func BenchmarkSolve(b *testing.B) {
	x, y, sigma := readObservations(b, "decay")
	start := readOptimum(b, "decay").start
	for _, c := range []struct {
		name     string
		copies   int
		analytic bool
	}{{"60 rows/analytic", 1, true}, {"60 rows/differences", 1, false}, {"3000 rows/differences", 50, false}} {
		b.Run(c.name, func(b *testing.B) {
			var xs, ys, sigmas []float64
			for range c.copies {
				xs, ys, sigmas = append(xs, x...), append(ys, y...), append(sigmas, sigma...)
			}
			p := curveProblem(decay, xs, ys, sigmas, c.analytic)
			b.ReportAllocs()
			for b.Loop() {
				if r, err := lsq.Solve(p, start, lsq.Settings{}); err != nil || !r.Status.Good() {
					b.Fatal(err, r)
				}
			}
		})
	}
}
