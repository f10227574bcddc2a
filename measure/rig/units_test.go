package rig

import (
	"math"
	"math/big"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// Sources: inch and foot, international yard and pound agreement of 1959 (NIST
// SP 811, app. B.8); 0 °C = 273.15 K and the fixed points of the Fahrenheit scale,
// NIST SP 811, app. B.8; standard atmosphere 101.325 kPa, ISO 2533; decibels of
// amplitude, 20 lg, IEC 60027-3. The comparison is exact but for those marked.
func TestUnits(t *testing.T) {
	tests := []struct {
		d        dimension
		text     string
		want     float64
		relative float64 // 0 is exact
	}{
		{length, "1in", 0.0254, 0},
		{length, "2.5in", 0.0635, 0},
		{length, "10 in", 0.254, 0},
		{length, "1ft", 0.3048, 0},
		{length, "30mm", 0.03, 0},
		{length, "35mm", 0.035, 0}, // 35·0.001 is not 0.035
		{length, "5cm", 0.05, 0},
		{length, "50mm", 0.05, 0},
		{length, "1.2 m", 1.2, 0},
		{length, "-0.8mm", -0.0008, 0},
		{temperature, "0C", 273.15, 0},
		{temperature, "21C", 294.15, 0},
		{temperature, "294.15K", 294.15, 0},
		{temperature, "32F", 273.15, 1e-15},
		{temperature, "212F", 373.15, 1e-15},
		{temperature, "-40F", 233.15, 1e-15}, // where both scales meet
		{temperature, "-40C", 233.15, 1e-15},
		{temperatureDifference, "1C", 1, 0},
		{temperatureDifference, "1K", 1, 0},
		{temperatureDifference, "9F", 5, 0},
		{level, "0dBFS", 1, 0},
		{level, "-20dBFS", 0.1, 0},
		{level, "-20 dB", 0.1, 0},
		{level, "-6.02dB", 0.5, 1e-4}, // 20 lg 2 = 6.0206
		{frequency, "20Hz", 20, 0},
		{frequency, "20kHz", 20000, 0},
		{frequency, "2.5kHz", 2500, 0},
		{duration, "250ms", 0.25, 0},
		{duration, "5s", 5, 0},
		{percentage, "45%", 0.45, 0},
		{percentage, "0.2 %", 0.002, 0},
		{pressure, "101.325kPa", 101325, 0},
		{pressure, "1013.25hPa", 101325, 0},
		{pressure, "101325Pa", 101325, 0},
		{clockOffset, "-12ppm", -12e-6, 0},
		{plain, "0.5", 0.5, 0},
	}
	for _, tt := range tests {
		got, wrong := tt.d.parse(tt.text)
		if wrong != nil {
			t.Errorf("%q: %s", tt.text, wrong.reason)
		} else if math.Abs(got-tt.want) > tt.relative*math.Abs(tt.want) {
			t.Errorf("%q is %.17g, want %.17g", tt.text, got, tt.want)
		}
	}
}

func TestNotUnits(t *testing.T) {
	tests := []struct {
		d            dimension
		text         string
		reason, hint string
	}{
		{length, "50", "50 has no unit", "units are mm, m, cm, in, ft"},
		{length, "0,5m", "0,5m has a decimal comma", "write 0.5m"},
		{frequency, "1,000Hz", "1,000Hz has a comma", "write 1000Hz, or 1.000Hz"},
		{length, "1,0,0mm", "1,0,0mm is not a length", ""},
		{length, ".5m", ".5m lacks a digit beside the point", "write 0.5m"},
		{length, "5.m", "5.m lacks a digit beside the point", "write 5m"},
		{length, ".", ". is not a length", ""},
		{level, "−20dBFS", "−20dBFS has a typographic minus sign", "write -20dBFS"},
		{frequency, "20khz", "khz is not a unit of frequency", "write 20kHz"},
		{length, "50yd", "yd is not a unit of length", "units are mm, m, cm, in, ft"},
		{frequency, "1e3Hz", "e3Hz is not a unit of frequency", "units are Hz, kHz"},
		{length, "0x10mm", "x10mm is not a unit of length", "units are mm, m, cm, in, ft"},
		{length, "NaN", "NaN is not a finite number", ""},
		{length, ".nan", ".nan is not a finite number", ""},
		{length, "-.inf", "-.inf is not a finite number", ""},
		{level, "-inf dBFS", "-inf dBFS is not a finite number", ""},
		{length, "infinite", "infinite is not a length", ""},
		{length, "", `"" is not a length`, ""},
		{length, "far", "far is not a length", ""},
		{plain, "0.5mm", "0.5mm is not a number without unit", "write 0.5"},
		{length, "0." + strings.Repeat("0", 30) + "1mm", "0.0000000000000000000000000000001mm has too many digits", "at most 20 characters"},
		{length, strings.Repeat("9", 400) + "mm", strings.Repeat("9", 40) + "… has too many digits", "at most 20 characters"},
	}
	for _, tt := range tests {
		v, wrong := tt.d.parse(tt.text)
		if wrong == nil {
			t.Errorf("%q is %g, want an error", tt.text, v)
		} else if wrong.reason != tt.reason || wrong.hint != tt.hint {
			t.Errorf("%q: %q, hint %q; want %q, %q", tt.text, wrong.reason, wrong.hint, tt.reason, tt.hint)
		}
	}
}

// Lengths against rational arithmetic: as near as the last bit but one, since
// there are two roundings.
func TestLengthsAreExact(t *testing.T) {
	factors := map[string]*big.Rat{
		"mm": big.NewRat(1, 1000), "cm": big.NewRat(1, 100), "m": big.NewRat(1, 1),
		"in": big.NewRat(254, 10000), "ft": big.NewRat(3048, 10000),
	}
	rapid.Check(t, func(t *rapid.T) {
		number := rapid.StringMatching(`-?[0-9]{1,5}(\.[0-9]{1,6})?`).Draw(t, "number")
		name := rapid.SampledFrom([]string{"mm", "cm", "m", "in", "ft"}).Draw(t, "unit")
		exact, _ := new(big.Rat).SetString(number)
		want, _ := exact.Mul(exact, factors[name]).Float64()
		got, wrong := length.parse(number + name)
		if wrong != nil || math.Abs(got-want) > 4e-16*math.Abs(want) {
			t.Fatalf("%s%s is %.17g, want %.17g (%v)", number, name, got, want, wrong)
		}
	})
}

// A hint "write X" must be something that can be written.
func TestHintsAreValid(t *testing.T) {
	dimensions := []dimension{length, temperature, level, frequency, duration, percentage, pressure, plain}
	rapid.Check(t, func(t *rapid.T) {
		d := rapid.SampledFrom(dimensions).Draw(t, "dimension")
		text := rapid.OneOf(
			rapid.StringMatching(`[-+−]?[0-9]{0,3}[.,]?[0-9]{0,3} ?(mm|MM|Hz|khz|dbfs|S|%|k|in|)`),
			rapid.String(),
		).Draw(t, "text")
		_, wrong := d.parse(text)
		if wrong == nil {
			return
		}
		cure, ok := strings.CutPrefix(wrong.hint, "write ")
		cure, _, _ = strings.Cut(cure, ", or ")
		if _, still := d.parse(cure); ok && still != nil {
			t.Fatalf("%q: hint %q is no cure: %s", text, wrong.hint, still.reason)
		}
	})
}
