package fit

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
)

// JCGM 100:2008, table G.2, the column of 95 %, as printed to two decimals (from
// memory; the same to two decimals by scipy.stats.t.ppf(0.975, ν)).
func TestCoverageFactors(t *testing.T) {
	for dof, want := range map[float64]float64{1: 12.71, 2: 4.30, 3: 3.18, 4: 2.78, 5: 2.57, 6: 2.45, 7: 2.36, 8: 2.31, 9: 2.26, 10: 2.23,
		15: 2.13, 20: 2.09, 30: 2.04, 40: 2.02, 50: 2.01} {
		if got := coverageFactor(dof); math.Abs(got-want) > 0.0051 {
			t.Errorf("%g degrees of freedom: %.4f, printed %.2f", dof, got, want)
		}
	}
	// From there on the convention of k = 2 covers more than 95 %.
	for _, dof := range []float64{100, 1e5, 1e9, math.Inf(1)} {
		if got := coverageFactor(dof); got != 2 {
			t.Errorf("%g degrees of freedom: %g", dof, got)
		}
	}
}

// JCGM 100:2008, example G.4.1 (from memory): three contributions of 0.25, 0.57 and
// 0.82 % with 9, 4 and 14 degrees of freedom make 1.03 % with 19; and H.1.6, an end gauge
// of 32 nm with 16: 25 nm with 18, 9.7 with 25.6, 2.9 with 50, 16.6 with 2.
func TestEffectiveFreedom(t *testing.T) {
	for _, c := range []struct {
		parts, dof []float64
		u, nu      float64
	}{
		{[]float64{0.25, 0.57, 0.82}, []float64{9, 4, 14}, 1.03, 19},
		{[]float64{25, 9.7, 2.9, 16.6}, []float64{18, 25.6, 50, 2}, 32, 16.7},
	} {
		if u := root(c.parts...); math.Abs(u-c.u) > 0.012*c.u {
			t.Errorf("u is %.4g, printed %.4g", u, c.u)
		}
		if nu := effectiveFreedom(c.parts, c.dof); math.Abs(nu-c.nu) > 0.6 {
			t.Errorf("ν is %.3g, printed %.3g", nu, c.nu)
		}
	}
	if nu := effectiveFreedom([]float64{1, 2}, []float64{math.Inf(1), math.Inf(1)}); !math.IsInf(nu, 1) {
		t.Errorf("of what is known infinitely well: %g", nu)
	}
}

// JCGM 100:2008, example H.2: resistance, reactance and impedance from amplitudes and
// a phase that were measured together (observations of table H.2 from memory; results
// of tables H.3 and H.4: 127.732 ± 0.071, 219.847 ± 0.295, 254.260 ± 0.236 Ω,
// r = −0.588, −0.485, 0.993). The means are correlated; ignoring that would be wrong.
func TestImpedanceExample(t *testing.T) {
	v := []float64{5.007, 4.994, 5.005, 4.990, 4.999}
	i := []float64{19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3}
	phi := []float64{1.0456, 1.0438, 1.0468, 1.0428, 1.0433}
	inputs := [][]float64{v, i, phi}
	covariance := mat.NewSymDense(3, nil)
	for a := range 3 {
		for b := range 3 {
			covariance.SetSym(a, b, stat.Covariance(inputs[a], inputs[b], nil)/5)
		}
	}
	V, I, P := stat.Mean(v, nil), stat.Mean(i, nil), stat.Mean(phi, nil)
	R, X, Z := V/I*math.Cos(P), V/I*math.Sin(P), V/I
	c := mat.NewDense(3, 3, []float64{R / V, -R / I, -X, X / V, -X / I, R, Z / V, -Z / I, 0})
	u := propagate(c, covariance)
	for n, want := range []struct{ value, u float64 }{{127.732, 0.071}, {219.847, 0.295}, {254.260, 0.236}} {
		value, se := []float64{R, X, Z}[n], math.Sqrt(u.At(n, n))
		if math.Abs(value-want.value) > 0.0006 || math.Abs(se-want.u) > 0.0006 {
			t.Errorf("result %d: %.4f ± %.4f, printed %.3f ± %.3f", n, value, se, want.value, want.u)
		}
	}
	r := func(a, b int) float64 { return u.At(a, b) / math.Sqrt(u.At(a, a)*u.At(b, b)) }
	for _, p := range []struct {
		got, want float64
	}{{r(0, 1), -0.588}, {r(0, 2), -0.485}, {r(1, 2), 0.993}} {
		if math.Abs(p.got-p.want) > 0.0006 {
			t.Errorf("r is %.4f, printed %.3f", p.got, p.want)
		}
	}
}
