package report

import (
	"fmt"
	"math"
	"strings"

	"standoff/fit"
	"standoff/report/number"
)

// notResolved is how a value that the data do not hold is written, everywhere.
const notResolved = "not resolved"

// value writes a Value in a unit that is scale times its own.
func value(v fit.Value, scale float64, unit string) string {
	if !v.Resolved || v.Value == nil || v.Expanded == nil {
		return notResolved + limits(v, scale, unit)
	}
	return number.PlusMinus(*v.Value*scale, *v.Expanded*scale, unit)
}

// covered is a value with the coverage factor of its ±.
func covered(v fit.Value, scale float64, unit string) string {
	if !v.Resolved || v.Value == nil || v.Expanded == nil {
		return value(v, scale, unit)
	}
	return value(v, scale, unit) + " (" + number.Coverage(v.CoverageFactor) + ")"
}

// coverage says which k stands behind the ± of the pages: 2, but for mix and spacing
// as their budgets have it.
func coverage(r *fit.Result) string {
	out := "every ± is expanded to about 95 %, k = 2"
	for _, v := range []struct {
		name string
		fit.Value
	}{{"mix", r.Capsule.GradientFraction}, {"spacing", r.Capsule.PortSpacing}} {
		if k := number.Coverage(v.CoverageFactor); v.Resolved && v.CoverageFactor > 0 && k != "k = 2" {
			out += "; " + v.name + " " + k
		}
	}
	return out
}

// limits is what can be said of a value that is not resolved.
func limits(v fit.Value, scale float64, unit string) string {
	switch {
	case v.UpperLimit != nil:
		return " (below " + strings.TrimSpace(number.Fixed(*v.UpperLimit*scale, number.Digits(*v.UpperLimit*scale*0.1))+" "+unit) + ", 95 % one-sided)"
	case v.LowerLimit != nil:
		return " (above " + strings.TrimSpace(number.Fixed(*v.LowerLimit*scale, number.Digits(*v.LowerLimit*scale*0.1))+" "+unit) + ", 95 % one-sided)"
	}
	return ""
}

func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}

// article puts a or an before a word.
func article(word string) string {
	if word != "" && strings.ContainsRune("aeiou", rune(word[0])) {
		return "an " + word
	}
	return "a " + word
}

// build says what kind of capsule a model is.
func build(c fit.CapsuleResult) string {
	rear := ""
	if c.Rear == fit.LowPass {
		rear = " with a low-pass"
	}
	return c.Model + rear + " on " + article(c.Body) + " body"
}

// riseAt looks the table up for a distance and a frequency, exactly.
func riseAt(t fit.RiseTable, metres, hz float64) (dB, expanded float64, ok bool) {
	for i, f := range t.Frequencies {
		for j, r := range t.Distances {
			if f == hz && math.Abs(r-metres) < 1e-9 && i < len(t.DB) && j < len(t.DB[i]) && i < len(t.Expanded) && j < len(t.Expanded[i]) {
				return t.DB[i][j], t.Expanded[i][j], true
			}
		}
	}
	return 0, 0, false
}

// decibelsPlusMinus is a level with its ±, signed, never finer than 0.01 dB.
func decibelsPlusMinus(v, expanded float64) string {
	u := math.Max(expanded, 0.03)
	d := min(number.Digits(u), 2)
	return number.Signed(v, d) + " ± " + number.Fixed(math.Max(expanded, math.Pow(10, -float64(d))), d) + " dB"
}

// used counts distances.
func used(r *fit.Result) (n int) {
	for _, d := range r.Distances {
		if d.Used {
			n++
		}
	}
	return n
}

func acceptedTakes(r *fit.Result) (n int) {
	for _, t := range r.Takes {
		if t.Accepted {
			n++
		}
	}
	return n
}

func flagsText[F ~string](flags []F) string {
	var out []string
	for _, f := range flags {
		out = append(out, string(f))
	}
	return strings.Join(out, ", ")
}

// sentence ends with a full stop, or as it ends already.
func sentence(s string) string {
	if strings.HasSuffix(s, "?") || strings.HasSuffix(s, ".") {
		return s
	}
	return s + "."
}
