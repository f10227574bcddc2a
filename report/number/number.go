// Package number turns numbers into text. It is the only place that does: what is
// shown is rounded to its uncertainty (GUM, JCGM 100:2008, 7.2.6), minus signs are
// minus signs, and every quantity has one way of being written.
package number

import (
	"math"
	"strconv"
	"strings"
)

// Minus is the sign that the pages use.
const Minus = "−"

// Fixed writes x with the given number of digits after the point; nothing is
// called −0. What is no number is a dash.
func Fixed(x float64, digits int) string {
	if math.IsNaN(x) {
		return "–"
	}
	if math.IsInf(x, 0) {
		return map[bool]string{true: "∞", false: Minus + "∞"}[x > 0]
	}
	s := strconv.FormatFloat(x, 'f', max(digits, 0), 64)
	if digits < 0 {
		p := math.Pow(10, float64(-digits))
		s = strconv.FormatFloat(math.Round(x/p)*p, 'f', 0, 64)
	}
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-")
	}
	return strings.Replace(s, "-", Minus, 1)
}

// Signed is Fixed with a plus sign before what is positive.
func Signed(x float64, digits int) string {
	s := Fixed(x, digits)
	if x > 0 && strings.Trim(s, "0.") != "" {
		return "+" + s
	}
	return s
}

// Digits is how many digits after the point an uncertainty leaves to a value: two
// significant ones of the uncertainty, one where they would be 30 or more; negative
// for tens. An uncertainty that is 0 or no number leaves six.
func Digits(uncertainty float64) int {
	u := math.Abs(uncertainty)
	if !(u > 0) || math.IsInf(u, 0) {
		return 6
	}
	digits := 1 - int(math.Floor(math.Log10(u)))
	if lead := math.Round(u * math.Pow(10, float64(digits))); lead >= 30 {
		digits-- // 100, by rounding, is ten of the next place
	}
	return digits
}

// PlusMinus writes a value and its expanded uncertainty in one unit, both rounded
// to the same place: PlusMinus(27.031, 0.224, "mm") is "27.03 ± 0.22 mm".
func PlusMinus(value, expanded float64, unit string) string {
	d := Digits(expanded)
	return Fixed(value, d) + " ± " + Fixed(expanded, d) + spaced(unit)
}

// Parts are the two sides of PlusMinus, without a unit, for columns.
func Parts(value, expanded float64) (v, u string) {
	d := Digits(expanded)
	return Fixed(value, d), Fixed(expanded, d)
}

func spaced(unit string) string {
	switch unit {
	case "", "1":
		return ""
	case "°":
		return unit
	}
	return " " + unit
}

// Frequency writes Hz below 1000 and kHz above, to three significant digits at
// most: "80 Hz", "1 kHz", "4.53 kHz".
func Frequency(hz float64) string {
	if hz < 999.5 {
		return significant(hz, 3) + " Hz"
	}
	return significant(hz/1000, 3) + " kHz"
}

// Length writes mm below a metre and m above: "30 mm", "63.5 mm", "1.2 m".
func Length(m float64) string {
	if math.Abs(m) < 0.9995 {
		return significant(m*1000, 3) + " mm"
	}
	return significant(m, 3) + " m"
}

// Time writes ms below a second.
func Time(s float64) string {
	if math.Abs(s) < 1 {
		return significant(s*1000, 3) + " ms"
	}
	return significant(s, 3) + " s"
}

// Percent writes a ratio as a percentage of two significant digits.
func Percent(ratio float64) string { return significant(100*ratio, 2) + " %" }

// Coverage writes a coverage factor, "k = 2" or "k = 2.13"; where none is known, the
// coverage itself.
func Coverage(k float64) string {
	if !(k > 0) || math.IsInf(k, 0) {
		return "about 95 %"
	}
	return "k = " + significant(k, 3)
}

// Significant writes n significant digits without trailing zeros.
func Significant(x float64, n int) string { return significant(x, n) }

// significant writes n significant digits without trailing zeros.
func significant(x float64, n int) string {
	if x == 0 || math.IsNaN(x) || math.IsInf(x, 0) {
		return Fixed(x, 0)
	}
	digits := n - 1 - int(math.Floor(math.Log10(math.Abs(x))))
	s := Fixed(x, digits)
	if strings.Contains(s, ".") {
		s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	}
	return s
}
