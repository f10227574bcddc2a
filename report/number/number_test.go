package number

import (
	"math"
	"testing"
)

// JCGM 100:2008, 7.2.6: 10.05762 Ω with u = 27 mΩ is rounded to 10.058 Ω, and an
// uncertainty of 10.47 mΩ may be 11 (we round to nearest); example H.2 gives
// R 127.732(71), X 219.847(295), Z 254.260(236).
func TestPlusMinus(t *testing.T) {
	for _, p := range []struct {
		v, u float64
		unit string
		want string
	}{
		{10.05762, 0.027, "Ω", "10.058 ± 0.027 Ω"},
		{127.7322, 0.07107, "", "127.73 ± 0.07"},
		{219.8465, 0.29558, "Ω", "219.8 ± 0.3 Ω"},
		{254.2597, 0.23634, "Ω", "254.26 ± 0.24 Ω"},
		{0.50312, 0.0118, "1", "0.503 ± 0.012"},
		{27.0312, 0.224, "mm", "27.03 ± 0.22 mm"},
		{-0.04, 0.1, "dB", "−0.04 ± 0.10 dB"},
		{-0.001, 0.1, "dB", "0.00 ± 0.10 dB"},
		{1234, 150, "Hz", "1230 ± 150 Hz"},
		{1.5, 0.0996, "", "1.50 ± 0.10"},
		{90.2, 12.2, "°", "90 ± 12°"},
		{math.NaN(), 0.1, "", "– ± 0.10"},
	} {
		if got := PlusMinus(p.v, p.u, p.unit); got != p.want {
			t.Errorf("%g ± %g: %q, want %q", p.v, p.u, got, p.want)
		}
	}
}

func TestQuantities(t *testing.T) {
	for _, p := range []struct{ got, want string }{
		{Frequency(80), "80 Hz"}, {Frequency(1000), "1 kHz"}, {Frequency(4535.2), "4.54 kHz"}, {Frequency(999.7), "1 kHz"}, {Frequency(62.5), "62.5 Hz"},
		{Length(0.03), "30 mm"}, {Length(0.0635), "63.5 mm"}, {Length(1.2), "1.2 m"}, {Length(0.6), "600 mm"},
		{Time(0.0058), "5.8 ms"}, {Time(2), "2 s"}, {Percent(0.00061), "0.061 %"}, {Percent(0.5), "50 %"},
		{Coverage(2), "k = 2"}, {Coverage(2.1314), "k = 2.13"}, {Coverage(12.706), "k = 12.7"}, {Coverage(0), "about 95 %"}, {Coverage(math.NaN()), "about 95 %"},
		{Fixed(math.Inf(-1), 1), "−∞"}, {Fixed(-1.25, 1), "−1.2"}, {Signed(2.5, 1), "+2.5"}, {Signed(0.01, 1), "0.0"}, {Fixed(1234, -2), "1200"},
	} {
		if p.got != p.want {
			t.Errorf("%q, want %q", p.got, p.want)
		}
	}
}
