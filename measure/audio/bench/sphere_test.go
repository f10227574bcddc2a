package bench

import (
	"math"
	"math/cmplx"
	"strconv"
	"testing"
)

// atAngle is the pressure on a sphere at an angle from a source at R, relative to
// that of the free field at its centre.
func atAngle(k, a, R, degrees float64) complex128 {
	sin, cos := math.Sincos(degrees * math.Pi / 180)
	p, _ := poles(k, a, R*cos, R*sin)
	return p / monopole(k, R)
}

// Published: R. Sridhar, E. Choueiri, JAES 2021, data DOI 10.5281/zenodo.4574661
// (H_direct), a sphere of 90 mm at 343 m/s and 500, 2000, 5000 Hz. Their values at
// 90° are left out: a series that stops at the first small term is wrong there.
func TestSphereAsPublished(t *testing.T) {
	const a, far = 0.09, 1e7
	for _, c := range []struct {
		degrees, rho float64
		want         [3]complex128
	}{
		{0, 2, [3]complex128{1.55856114 + 2.43360219i, -3.39278821 - 1.08331334i, -1.79005808 + 3.40984742i}},
		{0, 3, [3]complex128{1.00607094 + 1.80572651i, -2.53271687 - .87358571i, -1.36878471 + 2.55914827i}},
		{0, far, [3]complex128{.49018266 + 1.21090324i, -1.69498793 - .64341676i, -.93297077 + 1.70296609i}},
		{45, 2, [3]complex128{1.34393495 + .93152236i, -.64475397 + 1.89909789i, -.53540759 - 2.12079587i}},
		{135, 2, [3]complex128{.21463667 - .50475726i, -.26714350 + .23536986i, -.28067285 + .00950593i}},
		{180, 2, [3]complex128{.02571987 - .54466890i, .56322181 - .02883666i, -.46493807 + .04452589i}},
		{180, far, [3]complex128{.32373702 - .99969774i, .64263563 + .95763678i, .75560709 - .77813113i}},
	} {
		for i, f := range []float64{500, 2000, 5000} {
			k := 2 * math.Pi * f / 343
			tolerance := 1e-7
			if c.rho == far {
				tolerance = 2e-6 // 1/ρ, and rounding of a phase of 10⁷
			}
			nearComplex(t, strconv.FormatFloat(c.degrees, 'g', -1, 64)+"°", atAngle(k, a, c.rho*a, c.degrees), c.want[i], tolerance)
		}
	}
}

func TestSphereAgainstScipy(t *testing.T) {
	const a = 0.009
	for _, row := range table(t, "poles.csv") {
		v := numbers(t, row)
		sin, cos := math.Sincos(v[2] * math.Pi / 180)
		R := v[1] * a
		front, rear := poles(v[0]/a, a, R*cos, R*sin)
		nearComplex(t, "front of "+row[0]+" "+row[1]+" "+row[2], front, complex(v[3], v[4]), 1e-9/R)
		nearComplex(t, "rear of "+row[0]+" "+row[1]+" "+row[2], rear, complex(v[5], v[6]), 1e-9/R)
	}
}

// At low frequency the level has a closed form, and S. Spagnol, E. Tavazzi,
// F. Avanzini, Applied Acoustics 115 (2017) 61, fitted one in dB to their series:
// (p1·ρ + p2)/(ρ² + q1·ρ + q2).
func TestSphereAtLowFrequency(t *testing.T) {
	const a = 0.09
	published := func(rho, p1, p2, q1, q2 float64) float64 { return (p1*rho + p2) / (rho*rho + q1*rho + q2) }
	for _, rho := range []float64{1.25, 1.5, 2, 3, 4, 8} {
		front, rear := decibels(atAngle(1e-4/a, a, rho*a, 0)), decibels(atAngle(1e-4/a, a, rho*a, 180))
		near(t, "front", front, 20*math.Log10(2*rho/(rho-1)+rho*math.Log(1-1/rho)), 1e-5)
		near(t, "rear", rear, 20*math.Log10(2*rho/(rho+1)-rho*math.Log(1+1/rho)), 1e-5)
		near(t, "front as published", front, published(rho, 12.97, -9.69, -1.14, .219), 0.3)
		near(t, "rear as published", rear, published(rho, -13.0, -1.32, .45, -.05), 0.05)
	}
}

// G. F. Kuhn, JASA 62 (1977) 157 (from memory): a plane wave of low frequency makes
// 1 + 3/2·jka·cos θ on a sphere, so that both poles see a difference of 3jka; one of
// high frequency is doubled where it strikes.
func TestSphereInPlaneWave(t *testing.T) {
	const a, R = 0.009, 1e6
	for _, ka := range []float64{1e-3, 1e-2} {
		difference := atAngle(ka/a, a, R, 0) - atAngle(ka/a, a, R, 180)
		nearComplex(t, "difference over jka", difference/complex(0, ka), 3, 5*ka)
	}
	// Between them lies the creeping wave, which is small in front.
	near(t, "doubling", cmplx.Abs(atAngle(1000/a, a, R, 0)), 2, 2e-3)
}

// Close to a sphere the series is long; a source that all but touches it is doubled.
func TestSphereNearlyTouched(t *testing.T) {
	const a, gap = 0.009, 0.1e-3
	front, _ := poles(1, a, a+gap, 0)
	// Twice the free field of the gap, less what the body leads away.
	near(t, "front", cmplx.Abs(front)*gap, 2-gap/a*math.Log(a/gap), 2*gap/a)
}
