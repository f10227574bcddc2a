package fit

import (
	"math"
	"testing"
)

const degree = math.Pi / 180

// The published table of HyperPhysics (Georgia State University), page on
// microphone patterns: level at 90° and 180°, null. Its supercardioid is 3/8 to
// 5/8. ± 1° and ± 0.5 dB, as it is rounded.
func TestPatternsAgainstPublishedTable(t *testing.T) {
	for _, p := range []struct {
		beta, at90, at180, null float64
	}{{0.5, -6, math.Inf(-1), 180}, {0.625, -8.5, -12, 127}, {0.75, -12, -6, 110}, {1, math.Inf(-1), 0, 90}} {
		for angle, want := range map[float64]float64{90: p.at90, 180: p.at180} {
			got := decibels(math.Abs(LevelAtAngle(p.beta, angle*degree)))
			if math.IsInf(want, -1) && got < -200 {
				continue
			}
			if math.Abs(got-want) > 0.5 {
				t.Errorf("β %g at %g°: %.2f dB, table %g", p.beta, angle, got, want)
			}
		}
		null, ok := NullAngle(p.beta)
		if !ok || math.Abs(null/degree-p.null) > 1 {
			t.Errorf("β %g: null at %.1f°, table %g", p.beta, null/degree, p.null)
		}
	}
	for _, beta := range []float64{0, 0.4, math.NaN()} {
		if _, ok := NullAngle(beta); ok {
			t.Errorf("β %g has no null", beta)
		}
	}
}

// Computed apart from the program, from (1−β)² + β²/3; the handbook row REE 1,
// .333, .268, .250, .333 and DF 1, 1.7, 1.9, 2.0, 1.7 (Eargle, Olson; from memory)
// agrees.
func TestEnergies(t *testing.T) {
	for _, p := range []struct{ beta, ree, di, df float64 }{
		{0, 1, 0, 1}, {0.3, 0.52, 2.840, 1.3868}, {0.5, 1.0 / 3, 4.771, 1.7321}, {0.63397, 0.26795, 5.719, 1.9319},
		{0.625, 0.27083, 5.673, 1.9215}, {0.75, 0.25, 6.021, 2}, {1, 1.0 / 3, 4.771, 1.7321},
	} {
		if got := RandomEnergyEfficiency(p.beta); math.Abs(got-p.ree) > 1e-5 {
			t.Errorf("β %g: REE %.5f, want %.5f", p.beta, got, p.ree)
		}
		if got := DirectivityIndex(p.beta); math.Abs(got-p.di) > 1e-3 {
			t.Errorf("β %g: DI %.3f, want %.3f", p.beta, got, p.di)
		}
		if got := DistanceFactor(p.beta); math.Abs(got-p.df) > 1e-4 {
			t.Errorf("β %g: DF %.4f, want %.4f", p.beta, got, p.df)
		}
	}
}

// Acceptance angles of half power and of half amplitude, the same published table:
// 131, 115, 105, 90 and 180, 156, 141, 120.
func TestAcceptanceAngles(t *testing.T) {
	arc := func(beta, level float64) float64 { return 2 * math.Acos((level-(1-beta))/beta) / degree }
	for _, p := range []struct{ beta, power, amplitude float64 }{{0.5, 131, 180}, {0.625, 115, 156}, {0.75, 105, 141}, {1, 90, 120}} {
		for want, level := range map[float64]float64{p.power: math.Sqrt(0.5), p.amplitude: 0.5} {
			a := arc(p.beta, level)
			if math.Abs(a-want) > 1 {
				t.Errorf("β %g: arc %.1f°, table %g", p.beta, a, want)
			}
			if got := LevelAtAngle(p.beta, a/2*degree); math.Abs(got-level) > 1e-12 {
				t.Errorf("β %g: level %g at the edge of the arc, want %g", p.beta, got, level)
			}
		}
	}
}

// The usual mixes carry their own names (common practice).
func TestNearestPattern(t *testing.T) {
	for beta, want := range map[float64]string{0: "omni", 0.3: "subcardioid", 0.5: "cardioid", 0.63: "supercardioid", 0.75: "hypercardioid", 1: "figure-8"} {
		if got := NearestPattern(beta); got != want {
			t.Errorf("%g is called %s", beta, got)
		}
	}
}
