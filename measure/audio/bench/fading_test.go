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

// Far above the corner a capsule is what it was: the fade takes (f₀/f)² of what makes
// it differ from an omni.
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
				most := 4.01 / float64(f*f) * cmplx.Abs(whole[f]-omni[f])
				nearComplex(t, fmt.Sprintf("%s, %g m, %d Hz", body, r, f), faded[f], whole[f], most)
			}
		}
	}
}

// Far below the corner there is no rise, near or far: what is left of the fade,
// (f/f₀)², times the rise of the whole gradient, c/(2πfr) for ports close together.
func TestFadingFarBelowItsCorner(t *testing.T) {
	for _, beta := range []float64{0.5, 1} {
		for _, f0 := range []float64{300, 3000, 20000} {
			for _, r := range []float64{0.03, 0.1, 1, 10} {
				c := fading(beta, f0)
				c.Capsule.PortSpacing = 1e-4
				h := transfer(t, c, r)
				what := fmt.Sprintf("mix %g, %g Hz, %g m", beta, f0, r)
				low := f0 / 100
				left := beta * low / (f0 * f0) * 343 / (2 * math.Pi * r)
				nearComplex(t, what, h[int(low)]*complex(r/referenceDistance, 0)*cmplx.Rect(1, 2*math.Pi*low*r/343), complex(1, -left), 2e-3*(1+left))
			}
		}
	}
}

// Far away and at the corner half of a cardioid's gradient is left, β = 0.25, so that
// the side is 0.75 and the back 0.5. Well above and below it
// the pattern is that of a cardioid and of an omni.
func TestPatternOfAFadingCardioid(t *testing.T) {
	for _, body := range []string{Open, Sphere} {
		for _, p := range []struct{ f0, side, back float64 }{{1000, -2.499, -6.021}, {1e6, 0, 0}} {
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
