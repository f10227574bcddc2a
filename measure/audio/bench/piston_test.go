package bench

import (
	"math"
	"math/cmplx"
	"testing"
)

// On the axis of a baffled piston, with R = √(x²+b²) and R − x = b²/(R + x) (Kinsler,
// Frey, Coppens & Sanders, Fundamentals of Acoustics, 4th ed., sec. 7.4, from memory):
//
//	p(x) = 2/(jk b²) · [e^{−jkx} − e^{−jkR}] = 4/(k b²) · sin(k(R−x)/2) · e^{−jk(R+x)/2}
func TestPistonOnAxis(t *testing.T) {
	for _, b := range []float64{0.001, 0.017, 0.0635, 0.2} {
		for _, x := range []float64{0.0001, 0.005, 0.03, 0.6, 5} {
			source, sum := rings(b, x, 500), math.Hypot(x, b)+x
			for _, k := range []float64{0.1, 1, 20, 100, 500} {
				want := cmplx.Rect(4/(k*b*b)*math.Sin(k*b*b/sum/2), -k*sum/2)
				nearComplex(t, "pressure", onAxis(source, k, x), want, 1e-12*(cmplx.Abs(want)+1/sum))
			}
		}
	}
}

// Extrema at r/b = b/(mλ) − mλ/(4b): nulls for even m, maxima of 4/(k b²) for odd m
// (same source).
func TestPistonExtrema(t *testing.T) {
	const b = 0.0635
	for _, c := range []struct {
		overLambda   float64
		nulls, peaks []float64
	}{
		{4, []float64{1.875, 0.75, 0.291667}, []float64{3.9375, 1.145833, 0.4875, 0.133929}},
		{2, []float64{0.75}, []float64{1.875, 0.291667}},
		{1, nil, []float64{0.75}},
	} {
		k := 2 * math.Pi * c.overLambda / b
		level := func(x float64) float64 { return cmplx.Abs(onAxis(rings(b, x, k), k, x)) * k * b * b / 4 }
		for _, x := range c.nulls {
			near(t, "null", level(x*b), 0, 1e-5)
		}
		for _, x := range c.peaks {
			near(t, "maximum", level(x*b), 1, 1e-9)
		}
	}
}

// All rings together are one source, however many they are.
func TestRingsAddUpToOne(t *testing.T) {
	for b := 1e-4; b < 0.5; b *= 1.02 {
		for _, x := range []float64{1e-4, 0.03, 20} {
			var weights float64
			for _, s := range rings(b, x, 440) {
				weights += s.weight
			}
			near(t, "weights", weights, 1, 1e-12)
		}
	}
}

// Far away a piston is a point.
func TestPistonIsAPointFarAway(t *testing.T) {
	nearComplex(t, "pressure", onAxis(rings(0.017, 20, 100), 100, 20)/monopole(100, 20), 1, 1e-3)
	if got := rings(0, 1, 100); len(got) != 1 || got[0] != (ring{0, 1}) {
		t.Errorf("a point is %v", got)
	}
}
