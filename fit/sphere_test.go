package fit

import (
	"math"
	"math/cmplx"
	"testing"
)

// Published numbers for a rigid sphere of 0.09 m and c = 343 m/s: R. Sridhar,
// E. Choueiri, "Optimal Series Truncation of the Rigid-Sphere HRTF", J. Audio
// Eng. Soc. (2021), data DOI 10.5281/zenodo.4574661 (CC BY 4.0), directly facing
// the source; normalised to the free-field pressure at the centre, e^{+jωt}.
func TestSphereAgainstPublishedValues(t *testing.T) {
	const a, c = 0.09, 343.0
	for _, p := range []struct {
		rho, f float64
		want   complex128
	}{
		{2, 500, 1.55856114 + 2.43360219i}, {2, 2000, -3.39278821 - 1.08331334i}, {2, 5000, -1.79005808 + 3.40984742i},
		{3, 500, 1.00607094 + 1.80572651i}, {3, 2000, -2.53271687 - 0.87358571i}, {3, 5000, -1.36878471 + 2.55914827i},
	} {
		k := 2 * math.Pi * p.f / c
		front, _ := newSphereSeries(k, a).polePressures(p.rho*a, 0)
		got := front / pointPressure(k, p.rho*a)
		if cmplx.Abs(got-p.want) > 1e-7*cmplx.Abs(p.want) {
			t.Errorf("ρ %g, %g Hz: %.8f, published %.8f", p.rho, p.f, got, p.want)
		}
	}
	for _, p := range []struct {
		f    float64
		want complex128
	}{{500, .49018266 + 1.21090324i}, {2000, -1.69498793 - .64341676i}, {5000, -.93297077 + 1.70296609i}} {
		got, _ := planeOnPoles(2*math.Pi*p.f/c, a)
		if cmplx.Abs(got-p.want) > 1e-7*cmplx.Abs(p.want) {
			t.Errorf("plane wave, %g Hz: %.8f, published %.8f", p.f, got, p.want)
		}
	}
}

// Two poles of a rigid sphere see 3jka of a far source at low frequency: the
// effective spacing is 3a (the m = 1 term of the series; also Kuhn, J. Acoust.
// Soc. Am. 62, 157 (1977), from memory, for the head's low-frequency ITD).
func TestSphereSpacingIsThreeRadii(t *testing.T) {
	const a, k = 0.009, 0.5
	front, rear := planeOnPoles(k, a)
	if got := imag(front-rear) / (k * a); math.Abs(got-3) > 1e-4 {
		t.Errorf("the poles differ by %g jka, want 3", got)
	}
}

// At 90° every odd term of the series vanishes; a sum that stops at the first
// small term would stop at once. A ring of radius much larger than its distance
// comes close to that.
func TestSphereSeriesDoesNotStopAtAVanishingTerm(t *testing.T) {
	const k, a = 20, 0.05
	s := newSphereSeries(k, a)
	at90, rear90 := s.polePressures(1e-12, 0.2)
	near, _ := s.polePressures(1e-5, 0.2)
	if cmplx.Abs(at90-near) > 1e-3*cmplx.Abs(near) || cmplx.Abs(at90-rear90) > 1e-9*cmplx.Abs(at90) {
		t.Errorf("at 90° %v and %v, next to it %v", at90, rear90, near)
	}
}
