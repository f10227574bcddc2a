package main

import (
	"fmt"
	"strings"

	"standoff/fit"
	"standoff/measure"
	"standoff/report/number"
)

// summary prints what was found, for a person.
func (e *env) summary(a *analysed) {
	r := a.result
	c := r.Capsule
	e.print("%s  %s", e.strong(a.folder.Manifest().Tag), headline(c))
	e.print("  mix           %s", found(c.GradientFraction, 1, ""))
	e.print("  port spacing  %s", found(c.PortSpacing, 1e3, "mm"))
	if line := riseLine(r.RiseTable); line != "" && c.GradientFraction.Resolved {
		e.print("  rise, 100 Hz  %s", line)
	}
	e.print("  fitted        %s, %s to %s, gate %s, clock %s, polarity %s", a.fit.Best().Model,
		number.Frequency(r.Fit.From), number.Frequency(r.Fit.To), number.Time(r.Fit.Gate), r.Fit.Clock, r.Polarity)
	e.print("  takes         %s", takesLine(r))
	for _, w := range r.Warnings {
		e.warn(w)
	}
	e.print("  report        %s", a.folder.Path("report.pdf"))
}

func headline(c fit.CapsuleResult) string {
	out := c.Pattern
	if out == "" {
		out = "pattern not resolved"
	}
	if c.Claimed != "" {
		out += ", claimed " + c.Claimed
	}
	return out
}

// found is a value with its ±, or that there is none.
func found(v fit.Value, scale float64, unit string) string {
	if v.Resolved && v.Value != nil && v.Expanded != nil {
		return number.PlusMinus(*v.Value*scale, *v.Expanded*scale, unit) + "  (" + number.Coverage(v.CoverageFactor) + ")"
	}
	out := "not resolved"
	if v.UpperLimit != nil {
		out += ", below " + strings.TrimSpace(number.Fixed(*v.UpperLimit*scale, number.Digits(*v.UpperLimit*scale*0.1))+" "+unit) + " (95 %, one-sided)"
	}
	return out
}

// riseLine is the rise at the distances that people ask for.
func riseLine(t fit.RiseTable) string {
	var out []string
	for i, f := range t.Frequencies {
		for j, r := range t.Distances {
			if f == 100 && (r == 0.05 || r == 0.1 || r == 0.2) {
				d := min(number.Digits(max(t.Expanded[i][j], 0.05)), 1)
				out = append(out, fmt.Sprintf("%s ± %s dB at %s cm", number.Signed(t.DB[i][j], d), number.Fixed(max(t.Expanded[i][j], 0.1), d), number.Fixed(100*r, 0)))
			}
		}
	}
	return strings.Join(out, ", ")
}

func takesLine(r *fit.Result) string {
	accepted := 0
	for _, t := range r.Takes {
		if t.Accepted {
			accepted++
		}
	}
	places := 0
	for _, d := range r.Distances {
		if d.Used {
			places++
		}
	}
	return fmt.Sprintf("%d of %d accepted, %d of %d distances used", accepted, len(r.Takes), places, len(r.Distances))
}

// warn prints one thing that needs a look.
func (e *env) warn(w measure.Warning) {
	e.print("  ! %s", w.Text)
	if w.Hint != "" {
		e.print("    %s", w.Hint)
	}
}
