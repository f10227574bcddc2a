package bench

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"
)

// twoPort is an open capsule of 20 mm with a delay of q·d/c, before a point.
func twoPort(q float64) Config {
	c := plain()
	c.Capsule.Form, c.Capsule.Rear, c.Capsule.GradientFraction = PhaseShift, Delay, 1/(1+q)
	return c
}

// Exact two-port vectors for a point source at r from the middle between the ports,
// 343 m/s: level in dB over that in a plane wave of the same pressure there, whose
// closed form is |2 sin(k(L+d)/2)| (G. Elko, in Acoustic Signal Processing for
// Telecommunication, 2000, from memory). Computed with numpy from the geometry.
func TestTwoPortVectors(t *testing.T) {
	distances, frequencies := []float64{0.05, 0.1, 0.2, 0.5}, []int{100, 1000}
	for q, want := range map[float64][]float64{
		0:                {21.1528, 3.7101, 14.9720, 1.1978, 9.2896, .3271, 3.4114, .0538},
		1. / 3:           {18.6813, 2.5136, 12.5808, .7356, 7.1726, .1931, 2.2313, .0314},
		1 / math.Sqrt(3): {17.2462, 1.9762, 11.2170, .5529, 6.0345, .1429, 1.7027, .0231},
		1:                {15.2364, 1.3984, 9.3525, .3727, 4.5867, .0949, 1.1354, .0153},
	} {
		for i, r := range distances {
			h := transfer(t, twoPort(q), r)
			for j, f := range frequencies {
				k := 2 * math.Pi * float64(f) / 343
				path := 0.02 * (1 + q)
				plane := 2 * math.Sin(k*path/2) / (k * path) * referenceDistance / r
				// The vectors are rounded to 1e−4.
				near(t, fmt.Sprintf("q %.3f, %g m, %d Hz", q, r, f), decibels(h[f])-20*math.Log10(plane), want[2*i+j], 1e-4)
			}
		}
	}
}

// The rise of ports close together is |1 + β/(jkr)| (Beranek & Mellow, Acoustics: Sound
// Fields and Transducers, ch. 5, from memory); the table is for 343 m/s.
func TestRiseOfASmallCapsule(t *testing.T) {
	rows := []struct {
		r                    float64
		gradient             [4]float64 // 50, 100, 200, 1000 Hz
		cardioid, super, sub float64    // 100 Hz
	}{
		{0.05, [4]float64{26.793, 20.799, 14.886, 3.408}, 14.886, 16.894, 10.692},
		{0.10, [4]float64{20.799, 14.886, 9.269, 1.133}, 9.269, 11.132, 5.661},
		{0.20, [4]float64{14.886, 9.269, 4.568, 0.312}, 4.568, 6.015, 2.229},
		{0.50, [4]float64{7.610, 3.408, 1.133, 0.051}, 1.133, 1.700, 0.443},
		{1.00, [4]float64{3.408, 1.133, 0.312, 0.013}, 0.312, 0.491, 0.115},
	}
	for _, form := range []string{PhaseShift, Summed} {
		for _, rear := range []string{Delay, LowPass} {
			for _, row := range rows {
				rise := func(beta float64, f int) float64 {
					c := twoPort(0)
					c.Capsule.Form, c.Capsule.Rear = form, rear
					c.Capsule.GradientFraction, c.Capsule.PortSpacing = beta, 1e-4
					return decibels(transfer(t, c, row.r)[f]) - 20*math.Log10(referenceDistance/row.r)
				}
				what := fmt.Sprintf("%s %s at %g m", form, rear, row.r)
				// The table is rounded to 5e−4; a low-pass is a delay to within kL²/2.
				tolerance := 6e-4
				if rear == LowPass {
					tolerance = 8e-4
				}
				for i, f := range []int{50, 100, 200, 1000} {
					near(t, what, rise(1, f), row.gradient[i], tolerance)
				}
				near(t, what+" cardioid", rise(0.5, 100), row.cardioid, tolerance)
				near(t, what+" supercardioid", rise((3-math.Sqrt(3))/2, 100), row.super, tolerance)
				near(t, what+" subcardioid", rise(0.3, 100), row.sub, tolerance)
			}
		}
	}
}

// Common practice: an uncompensated gradient rises by 6 dB per octave far away and is
// level close by; between them its asymptotes cross at kr = 1, where it is 3 dB up.
func TestRawGradient(t *testing.T) {
	c := twoPort(0)
	c.Capsule.PortSpacing = 0.001
	raw := func(r float64, f int) float64 {
		return decibels(transfer(t, c, r)[f] * complex(float64(f)*r, 0)) // equalisation and spreading undone
	}
	octave := 20 * math.Log10(2)
	near(t, "far octave", raw(50, 2000)-raw(50, 1000), octave, 0.01)
	near(t, "near octave", raw(0.005, 80)-raw(0.005, 40), 0, 0.01)
	corner := 343 / (2 * math.Pi * 0.1) // 545.9 Hz
	near(t, "corner", raw(0.1, 546)-raw(0.1, 10), 20*math.Log10(math.Sqrt2), 0.01)
	near(t, "corner from above", raw(0.1, 546)-(raw(50, 5460)-20), 20*math.Log10(math.Sqrt2), 0.02)
	if math.Abs(corner-546) > 1 {
		t.Fatalf("the corner is at %g Hz", corner)
	}
}

// Common practice: a capsule whose back is sealed shows no rise at any distance, and
// pressure falls with 1/r.
func TestSealedBack(t *testing.T) {
	for _, r := range []float64{0.02, 0.03, 0.1, 0.6, 3} {
		h := transfer(t, plain(), r)
		for _, f := range []int{1, 20, 100, 1000, 10000, 23999} {
			want := cmplx.Rect(referenceDistance/r, -2*math.Pi*float64(f)*r/343)
			nearComplex(t, fmt.Sprintf("%g m, %d Hz", r, f), h[f], want, 1e-9/r)
		}
	}
}

// Far away the pattern is (1−β) + β cos θ. Published: the table of HyperPhysics (Georgia
// State University) gives −6 dB at 90° for a cardioid, −12 and −6 dB for a hypercardioid
// at 90° and 180°, and nulls at 180° and 90° for a cardioid and a figure-8.
func TestPatternFarAway(t *testing.T) {
	null := math.Inf(-1)
	for _, body := range []string{Open, Sphere} {
		for _, form := range []string{PhaseShift, Summed} {
			for _, rear := range []string{Delay, LowPass} {
				for _, c := range []struct{ beta, side, back float64 }{{0.5, -6.02, null}, {0.75, -12.04, -6.02}, {1, null, 0}} {
					config := plain()
					config.Capsule = Capsule{Form: form, Body: body, Rear: rear, GradientFraction: c.beta, PortSpacing: 0.0006, Sensitivity: 1}
					what := fmt.Sprintf("%s %s %s %g", form, body, rear, c.beta)
					front := fromAngle(t, config, 0)
					for degrees, want := range map[float64]float64{90: c.side, 180: c.back} {
						got := decibels(fromAngle(t, config, degrees) / front)
						if want == null {
							if got > -50 {
								t.Errorf("%s: %.1f dB at %g°, where a null should be", what, got, degrees)
							}
							continue
						}
						near(t, what, got, want, 0.05)
					}
				}
			}
		}
	}
}

// fromAngle is the output at 1 kHz for an image 100 m away.
func fromAngle(t *testing.T, config Config, degrees float64) complex128 {
	b := open(t, config)
	sin, cos := math.Sincos(degrees * math.Pi / 180)
	at := config.Capsule.newField(49)
	b.addImage(at, image{along: 100 * cos, aside: math.Abs(100 * sin), strength: 1}, 500)
	return config.Capsule.output(1000, 2*math.Pi*1000/config.SpeedOfSound, at.at(2))
}
