package fit

import (
	"math"
	"math/cmplx"
	"testing"
)

// Levels in dB near a point source on the axis of two open ports 20 mm apart,
// relative to a plane wave of the pressure that the source makes at their
// middle, c = 343 m/s: computed apart from the program from the two-port
// formula, to 1e−4 dB. Rows: β = 1, 3/4, 1/(1+1/√3), 1/2.
func TestTwoPortVectors(t *testing.T) {
	q := []float64{0, 1.0 / 3, 1 / math.Sqrt(3), 1}
	want := [][]float64{
		{21.1528, 3.7101, 14.9720, 1.1978, 9.2896, .3271, 3.4114, .0538},
		{18.6813, 2.5136, 12.5808, .7356, 7.1726, .1931, 2.2313, .0314},
		{17.2462, 1.9762, 11.2170, .5529, 6.0345, .1429, 1.7027, .0231},
		{15.2364, 1.3984, 9.3525, .3727, 4.5867, .0949, 1.1354, .0153},
	}
	m := Model{Form: PhaseShift, Body: Open, Source: PointSource}
	for i, row := range want {
		a := Acoustics{Beta: 1 / (1 + q[i]), Spacing: 0.02, Speed: 343}
		for n, w := range row {
			r, f := []float64{0.05, 0.1, 0.2, 0.5}[n/2], []float64{100, 1000}[n%2]
			if got := decibels(cmplx.Abs(m.Rise(a, r, f))); math.Abs(got-w) > 1e-4 {
				t.Errorf("q %.3f, %g m, %g Hz: %.5f dB, want %.4f", q[i], r, f, got, w)
			}
		}
	}
}

// |1 + β/(jkr)| (Beranek & Mellow, Acoustics, ch. 5; Kinsler et al., sec. 5.11 for
// the spherical wave; formulas from memory), c = 343 m/s.
func TestRiseOfASmallCapsule(t *testing.T) {
	for _, p := range []struct{ beta, r, f, dB float64 }{
		{1, 0.05, 50, 26.793}, {1, 0.05, 100, 20.799}, {1, 0.1, 100, 14.886}, {1, 0.2, 100, 9.269}, {1, 0.3, 100, 6.346},
		{1, 0.5, 1000, 0.051}, {0.5, 0.05, 100, 14.886}, {0.5, 0.2, 100, 4.568}, {0.75, 0.1, 100, 12.495}, {0.3, 0.2, 100, 2.229},
	} {
		for _, m := range []Model{{Form: Summed, Body: Open, Source: PointSource}, {Form: PhaseShift, Body: Open, Source: PointSource}} {
			got := decibels(cmplx.Abs(m.Rise(Acoustics{Beta: p.beta, Spacing: 1e-4, Speed: 343}, p.r, p.f)))
			if math.Abs(got-p.dB) > 1e-3 {
				t.Errorf("%v, β %g, %g m, %g Hz: %.4f dB, want %.3f", m, p.beta, p.r, p.f, got, p.dB)
			}
		}
	}
}

// A pressure microphone shows no rise at any distance (common practice).
func TestNoRiseWithoutGradient(t *testing.T) {
	for _, r := range []float64{0.02, 0.1, 1} {
		m := Model{Form: Summed, Body: Open, Source: PistonSource}
		if got := cmplx.Abs(m.Rise(Acoustics{Spacing: 0.02, Radius: 0.017, Speed: 343}, r, 50)); math.Abs(got-1) > 1e-12 {
			t.Errorf("at %g m the rise is %g", r, got)
		}
	}
}

// Before it is equalised a gradient element rises by 6 dB an octave far away,
// and is level near the source at low frequency (common practice).
func TestSlopesOfTheRawGradient(t *testing.T) {
	m := Model{Form: Summed, Body: Open, Source: PointSource}
	a := Acoustics{Beta: 1, Spacing: 0.005, Speed: 343}
	raw := func(r, f float64) float64 { return decibels(cmplx.Abs(m.Output(a, r, f)) * 2 * math.Pi * f) }
	if slope := raw(10, 1000) - raw(10, 500); math.Abs(slope-6.02) > 0.02 {
		t.Errorf("far away %.3f dB per octave", slope)
	}
	if slope := raw(0.02, 60) - raw(0.02, 30); math.Abs(slope) > 0.02 {
		t.Errorf("near the source %.3f dB per octave", slope)
	}
}

// Maxima and nulls on the axis of a piston of radius 4 wavelengths: Kinsler et
// al., Fundamentals of Acoustics 4th ed., sec. 7.4 (from memory):
// r/b = b/(mλ) − mλ/(4b), m odd maxima, even nulls.
func TestPistonMaximaAndNulls(t *testing.T) {
	const b, lambda = 0.04, 0.01
	k := 2 * math.Pi / lambda
	level := func(x float64) float64 { return cmplx.Abs(pistonPressure(k, x*b, b)) }
	for _, x := range []float64{1.875, 0.75, 7.0 / 24} {
		if got := level(x) / level(3.9375); got > 1e-9 {
			t.Errorf("no null at r/b = %g: %g", x, got)
		}
	}
	for _, x := range []float64{3.9375, 1.14583, 0.4875, 0.13393} {
		if got := level(x) * k * b * b / 4; math.Abs(got-1) > 1e-6 {
			t.Errorf("no maximum at r/b = %g: %g", x, got)
		}
	}
	// Near and at low frequency a piston is 2r/b below its far field (Keele,
	// J. Audio Eng. Soc. 22, 154 (1974), from memory).
	if got := cmplx.Abs(pistonPressure(1e-3, 1e-6, b)) * b / 2; math.Abs(got-1) > 1e-3 {
		t.Errorf("p·b/2 = %g next to the piston", got)
	}
}

// Rings of monopoles add up to the piston's closed form.
func TestRingsAddUpToThePiston(t *testing.T) {
	for _, r := range []float64{0.02, 0.03, 0.1} {
		for _, f := range []float64{100, 2000, 8000} {
			k := 2 * math.Pi * f / 343
			var sum complex128
			for _, ring := range ringsOf(0.02, nodesFor(0.01, 0.02)) {
				sum += scaled(pointPressure(k, math.Hypot(r, ring.radius)), ring.weight)
			}
			if want := pistonPressure(k, r, 0.02); cmplx.Abs(sum-want) > 3e-5*cmplx.Abs(want) {
				t.Errorf("%g m, %g Hz: %v, closed form %v", r, f, sum, want)
			}
		}
	}
}

// Every form tends to 1·e^{−jkr}/r far away at low frequency, and Far is the
// limit of Output·r·e^{jkr}.
func TestFarForms(t *testing.T) {
	for _, m := range []Model{{Form: Summed, Body: Open, Source: PointSource}, {Form: PhaseShift, Body: Open, Source: PointSource}, {Form: Summed, Body: Sphere, Source: PointSource}, {Form: PhaseShift, Body: Sphere, Source: PointSource}} {
		a := Acoustics{Beta: 0.4, Spacing: 0.027, Speed: 343}
		if got := m.Far(a, 5); cmplx.Abs(got-1) > 5e-3 {
			t.Errorf("%v at 5 Hz: %v", m, got)
		}
		const r, f = 400.0, 2000.0
		limit := m.Output(a, r, f) / pointPressure(2*math.Pi*f/343, r)
		if far := m.Far(a, f); cmplx.Abs(limit-far) > 1e-3*cmplx.Abs(far) {
			t.Errorf("%v: far form %v, limit %v", m, far, limit)
		}
	}
}

// The next term of a sphere close to the source is 3.5·a³/r⁴ where the open pair
// with d = 3a has 6.75·a³/r⁴ (expansion of both for k → 0, by hand).
func TestSphereSeesLessCurvature(t *testing.T) {
	const a, r, f = 0.009, 0.25, 1.0
	k := 2 * math.Pi * f / 343
	difference := func(m Model) float64 {
		out := m.Output(Acoustics{Beta: 1, Spacing: 3 * a, Speed: 343}, r, f)
		return cmplx.Abs(out) * k * 3 * a
	}
	excess := func(m Model) float64 { return (difference(m) - 3*a/(r*r)) * r * r * r * r / (a * a * a) }
	if got := excess(Model{Form: Summed, Body: Sphere, Source: PointSource}); math.Abs(got-3.5) > 0.1 {
		t.Errorf("sphere: %.3f, want 3.5", got)
	}
	if got := excess(Model{Form: Summed, Body: Open, Source: PointSource}); math.Abs(got-6.75) > 0.1 {
		t.Errorf("open: %.3f, want 6.75", got)
	}
}
