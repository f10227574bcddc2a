package bench

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"
)

// fading is an open, summed capsule whose gradient part fades below f0.
func fading(beta, f0 float64) Config {
	c := plain()
	c.Capsule.GradientFraction, c.Capsule.GradientFrom = beta, f0
	return c
}

// Far above the corner a capsule is what it was: a first-order high-pass misses f₀/f
// at most of what makes it differ from an omni.
func TestFadingFarAboveItsCorner(t *testing.T) {
	for _, body := range []string{Open, Sphere} {
		for _, r := range []float64{0.03, 0.1, 1} {
			with := func(beta, f0 float64) []complex128 {
				c := fading(beta, f0)
				c.Capsule.Body = body
				return transfer(t, c, r)
			}
			omni, whole, faded := with(0, 0), with(0.5, 0), with(0.5, 2)
			for _, f := range []int{2000, 10000} {
				most := 2 / float64(f) * cmplx.Abs(whole[f]-omni[f])
				nearComplex(t, fmt.Sprintf("%s, %g m, %d Hz", body, r, f), faded[f], whole[f], most)
			}
		}
	}
}

// Far below the corner the rise ends: an octave lower it is the same, and it is
// 1 + βc/(2πf₀r) for ports close together, which is nothing far away or with a high
// corner. (1/(jkr) times jf/f₀.)
func TestFadingFarBelowItsCorner(t *testing.T) {
	for _, beta := range []float64{0.5, 1} {
		for _, f0 := range []float64{300, 3000, 20000} {
			for _, r := range []float64{0.03, 0.1, 1, 10} {
				c := fading(beta, f0)
				c.Capsule.PortSpacing = 1e-4
				h := transfer(t, c, r)
				what := fmt.Sprintf("mix %g, %g Hz, %g m", beta, f0, r)
				low := int(f0 / 100)
				rise := decibels(h[low]) - 20*math.Log10(referenceDistance/r)
				// What is left of the fade at 1/100 of the corner: of first order, 1 %.
				near(t, what, rise, 20*math.Log10(1+beta*343/(2*math.Pi*f0*r)), 0.09)
				near(t, what+", an octave", decibels(h[2*low])-decibels(h[low]), 0, 0.09)
			}
		}
	}
	c := fading(0.5, 20000)
	near(t, "nothing left", decibels(transfer(t, c, 1)[100])-20*math.Log10(referenceDistance), 0, 0.02)
}

// Far away and at the corner half of a cardioid's gradient is left, 45° ahead:
// β = (1+j)/4, so that the side is √0.625 and the back √0.5. Well above and below it
// the pattern is that of a cardioid and of an omni.
func TestPatternOfAFadingCardioid(t *testing.T) {
	for _, body := range []string{Open, Sphere} {
		for _, p := range []struct{ f0, side, back float64 }{{1000, -2.041, -3.010}, {1e6, 0, 0}} {
			c := fading(0.5, p.f0)
			c.Capsule.Body, c.Capsule.PortSpacing = body, 0.0006
			front := fromAngle(t, c, 0)
			what := fmt.Sprintf("%s, corner %g Hz", body, p.f0)
			near(t, what+", side", decibels(fromAngle(t, c, 90)/front), p.side, 0.02)
			near(t, what+", back", decibels(fromAngle(t, c, 180)/front), p.back, 0.02)
		}
		c := fading(0.5, 1)
		c.Capsule.Body, c.Capsule.PortSpacing = body, 0.0006
		if got := decibels(fromAngle(t, c, 180) / fromAngle(t, c, 0)); got > -50 {
			t.Errorf("%s: %.1f dB behind a cardioid far above its corner", body, got)
		}
	}
}
