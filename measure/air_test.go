package measure

import (
	"math"
	"testing"
)

func air(celsius, humidity, pressure float64) Air {
	return Air{Temperature: celsius + 273.15, TemperatureUncertainty: 1, Humidity: humidity, Pressure: pressure}
}

// Points read off figure 1 of Cramer (1993) by an independent implementation's
// tests, for 314 ppm of carbon dioxide (0.008 m/s above ours); 0.15 m/s is what
// the figure can be read to.
func TestSpeedOfSoundOnCramersFigure(t *testing.T) {
	for _, p := range []struct{ t, h, p, c float64 }{
		{20, 0.008, 101325, 343.33}, {20, 0.302, 101325, 343.73}, {20, 0.602, 101325, 344.17},
		{20, 0.987, 101325, 344.68}, {0, 0.302, 101325, 331.63}, {30, 0.602, 101325, 350.56},
		{20, 0, 75000, 343.30},
	} {
		if got := air(p.t, p.h, p.p).SpeedOfSound(); math.Abs(got-p.c) > 0.15 {
			t.Errorf("%g °C, %g: %.3f m/s, figure %.2f", p.t, p.h, got, p.c)
		}
	}
}

// ISO 9613-1:1993 (A.5): c = 343.2·√(T/293.15), dry. It rounds its reference to
// 0.05 % and leaves humidity out.
func TestSpeedOfSoundNearISO9613(t *testing.T) {
	for _, celsius := range []float64{0, 10, 15, 20, 23, 25, 30} {
		iso := 343.2 * math.Sqrt((celsius+273.15)/293.15)
		if got := air(celsius, 0, 101325).SpeedOfSound(); math.Abs(got-iso) > 0.6e-3*iso {
			t.Errorf("%g °C: %.3f m/s, ISO %.3f", celsius, got, iso)
		}
	}
}

// Cramer's formula with Davis's saturation pressure, computed apart from the
// program with scipy 1.10.1 at 400 ppm; IEC 61094-2 annex F has 345.87 m/s at
// 23 °C and 50 % (from memory).
func TestSpeedOfSoundTable(t *testing.T) {
	for _, p := range []struct{ t, h, c float64 }{
		{0, 0, 331.4477}, {10, 0.5, 337.7811}, {20, 0, 343.3595}, {20, 0.5, 343.9869},
		{20, 1, 344.6135}, {23, 0.5, 345.8665}, {25, 0.5, 347.1268}, {30, 0.5, 350.3102},
	} {
		if got := air(p.t, p.h, 101325).SpeedOfSound(); math.Abs(got-p.c) > 2e-4 {
			t.Errorf("%g °C, %g: %.4f m/s, want %.4f", p.t, p.h, got, p.c)
		}
	}
}

// One kelvin is 0.6 m/s (common practice).
func TestSpeedUncertainty(t *testing.T) {
	if got := air(20, 0.5, 101325).SpeedUncertainty(); math.Abs(got-0.6) > 0.02 {
		t.Errorf("± %.3f m/s for ± 1 K", got)
	}
}
