package fit

import (
	"math"
	"math/cmplx"
	"testing"
)

// The rings of a piston before a sphere are as many as it needs.
func TestNodesAreEnough(t *testing.T) {
	for _, b := range []float64{0.008, 0.017, 0.025} {
		for _, r := range []float64{1.25, 1.5, 1.7, 2.4, 2.6, 4.9, 5.1, 10, 30} {
			for _, f := range []float64{80, 2000, 10000} {
				s := newSphereSeries(2*math.Pi*f/343, 0.01)
				difference := func(n int) (sum complex128) {
					for _, ring := range ringsOf(b, n) {
						front, rear := s.polePressures(math.Max(r*b, 0.0126), ring.radius)
						sum += scaled(front-rear, ring.weight)
					}
					return sum
				}
				want := difference(24)
				limit := 1e-6
				if r*b < 0.01+0.5*b {
					limit = 1e-5
				}
				if got := difference(nodesFor(math.Max(r*b, 0.0126)-0.01, b)); cmplx.Abs(got-want) > limit*cmplx.Abs(want) {
					t.Errorf("b %g, r %g b, %g Hz: off by %.1e", b, r, f, cmplx.Abs(got-want)/cmplx.Abs(want))
				}
			}
		}
	}
}
