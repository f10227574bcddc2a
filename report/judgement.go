package report

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"standoff/fit"
	"standoff/measure"
	"standoff/report/figure"
	"standoff/report/number"
)

func patternPage(d *Data, s Style) page {
	beta, expanded, known := mixOf(d)
	answer := "The mix is not resolved, so no pattern can be said."
	if known {
		answer = fmt.Sprintf("The mix of %s is that of %s, at low frequencies and far from sources and walls. "+
			"It is what the mix implies, not what a turntable would find.", covered(d.Result.Capsule.GradientFraction, 1, ""), article(d.Result.Capsule.Pattern))
	}
	return page{"What pattern is it?", answer, func(doc *document) {
		h := min(doc.width(), doc.room()-8*rowHeight-34)
		doc.figure(figure.Polar{Style: s.Figure, Beta: beta, Expanded: expanded, Known: known}, h)
		if known {
			doc.heading("What follows from the mix")
			doc.table([]column{{"", 1.3, left}, {"value", 1, left}, {"for comparison", 2.2, left}}, patternRows(beta, expanded))
		}
	}}
}

// patternRows are figures of the pattern with the ± that the mix leaves them, the
// larger where its two sides differ.
func patternRows(beta, expanded float64) [][]string {
	clip := func(b float64) float64 { return math.Min(math.Max(b, 0), 1) }
	of := func(f func(float64) float64, unit string) string {
		// Not half the difference of both ends: these have their best in the range.
		half := math.Max(math.Abs(f(clip(beta+expanded))-f(beta)), math.Abs(f(clip(beta-expanded))-f(beta)))
		return number.PlusMinus(f(beta), math.Max(half, 1e-3), unit)
	}
	level := func(angle float64) string {
		v := math.Abs(fit.LevelAtAngle(beta, angle))
		u := expanded * math.Abs(1-math.Cos(angle))
		if v < 2*u {
			return "below " + number.Fixed(20*math.Log10(math.Max(v+u, 1e-6)), 0) + " dB"
		}
		return number.PlusMinus(20*math.Log10(v), math.Max(20*math.Log10(v/(v-u)), 0.03), "dB")
	}
	null := "none"
	if a, ok := fit.NullAngle(beta); ok {
		narrow, _ := fit.NullAngle(clip(beta + expanded))
		wide, ok := fit.NullAngle(clip(beta - expanded))
		if !ok {
			wide = math.Pi
		}
		half := math.Max(math.Max(a-narrow, wide-a)*180/math.Pi, 0.1)
		null = number.PlusMinus(a*180/math.Pi, half, "°")
	} else if _, ok := fit.NullAngle(clip(beta + expanded)); ok {
		null = "none, or near 180°"
	}
	return [][]string{
		{"level at 90°", level(math.Pi / 2), "cardioid −6 dB, figure-8 a null"},
		{"level at 180°", level(math.Pi), "cardioid a null, hypercardioid −6 dB"},
		{"null angle", null, "supercardioid 125°, hypercardioid 109°, figure-8 90°"},
		{"directivity index", of(fit.DirectivityIndex, "dB"), "cardioid 4.8 dB, hypercardioid 6.0 dB"},
		{"distance factor", of(fit.DistanceFactor, ""), "cardioid 1.7, hypercardioid 2.0"},
		{"random-energy efficiency", of(fit.RandomEnergyEfficiency, ""), "omni 1, cardioid 0.33"},
	}
}

func trustPage(d *Data, s Style) page {
	return page{"Can these numbers be trusted?", trustAnswer(d), func(doc *document) {
		r := d.Result
		doc.budget()
		doc.heading("The joint fit")
		doc.table([]column{{"", 1.3, left}, {"", 3, left}}, fitRows(r))
		doc.heading("Models that were tried")
		var rows [][]string
		for _, m := range r.Models {
			name := m.Model + ", " + m.Body
			if m.Rear == fit.LowPass {
				name += ", " + m.Rear
			}
			if m.Chosen {
				name += " (chosen)"
			}
			mix, spacing := number.Fixed(m.GradientFraction, 4), number.Fixed(1000*m.PortSpacing, 2)
			if m.AtBound {
				mix, spacing = "–", "–"
			}
			rows = append(rows, []string{name, mix, spacing, misfit(m.ReducedChiSquare), m.Why})
		}
		doc.table([]column{{"model, body, rear", 2.5, left}, {"mix", 0.8, decimal}, {"spacing, mm", 1, decimal}, {"misfit", 0.9, decimal}, {"", 2.9, left}}, rows)
		doc.paragraph("Misfit: reduced chi-square; about 1 when a model leaves no more than noise and what is called unexplained, well below 1 when the ± are cautious. Mix and spacing of a model that ended at the end of its range are not shown; the ± are those of the chosen one.", 7.5, s.Figure.Soft)
	}}
}

// trustAnswer says what the numbers are worth, and what limits them.
func trustAnswer(d *Data) string {
	f, c := d.Result.Fit, d.Result.Capsule
	out := []string{fmt.Sprintf("The mix is %s, the spacing %s.", covered(c.GradientFraction, 1, ""), covered(c.PortSpacing, 1000, "mm"))}
	if text := limiting(d.Result); text != "" {
		out = append(out, text)
	}
	return strings.Join(append(out, fmt.Sprintf("%s at %s: reduced chi-square %s, with %s left unexplained beside the noise.",
		plural(f.Points, "point", "points"), plural(used(d.Result), "distance", "distances"), misfit(f.ReducedChiSquare), leftOver(f))), " ")
}

// misfit writes a reduced chi-square.
func misfit(x float64) string {
	switch {
	case x >= 100:
		return number.Fixed(x, 0)
	case x >= 10:
		return number.Fixed(x, 1)
	}
	return number.Fixed(x, 2)
}

func fitRows(r *fit.Result) [][]string {
	c, f := r.Capsule, r.Fit
	return [][]string{
		{"setback of the capsule", value(c.Setback, 1000, "mm") + ", by the rig and the fit together"},
		{"radius of the source", value(c.SourceRadius, 1000, "mm") + ", by the rig and the fit together"},
		{"speed of sound", number.PlusMinus(f.SpeedOfSound, f.SpeedExpanded, "m/s")},
		{"model", build(c)},
		{"band and gate", fmt.Sprintf("%s to %s; gate %s: %s", number.Frequency(f.From), number.Frequency(f.To), number.Time(f.Gate), orDash(f.GateReason))},
		{"clock of player and recorder", f.Clock},
		{"unexplained, besides noise", leftOver(f) + " of each response" + alikeText(f.Alike)},
		{"the solver", f.Status},
	}
}

// leftOver is what is left unexplained; below what can be told of it there is only a
// limit.
func leftOver(f fit.FitSummary) string {
	if f.Unexplained <= fit.LeastUnexplained*1.01 {
		return "at most " + number.Percent(fit.LeastUnexplained)
	}
	return number.Percent(f.Unexplained)
}

func alikeText(alike float64) string {
	if alike < 1.05 {
		return ""
	}
	return "; every " + number.Fixed(alike, 1) + " neighbouring frequencies count as one"
}

func aloneFigure(d *Data, s Style) figure.Alone {
	out := figure.Alone{Style: s.Figure}
	out.Beta, out.Half, out.Known = mixOf(d)
	for _, r := range d.Result.Distances {
		if v := r.Alone.GradientFraction; r.Used && v.Resolved && v.Value != nil && v.Expanded != nil {
			out.M, out.Value, out.Expanded = append(out.M, r.Nominal), append(out.Value, *v.Value), append(out.Expanded, *v.Expanded)
		}
	}
	return out
}

func aloneRows(r *fit.Result) (rows [][]string) {
	for _, d := range r.Distances {
		if !d.Used {
			rows = append(rows, []string{d.Label, "not used", "", ""})
			continue
		}
		rows = append(rows, []string{d.Label, value(d.Alone.GradientFraction, 1, ""), strings.TrimSpace(value(d.Alone.PortSpacing, 1000, "")), misfit(d.Misfit)})
	}
	return rows
}

func takesPage(d *Data, s Style) page {
	r := d.Result
	answer := fmt.Sprintf("%s, %s accepted.", plural(len(r.Takes), "take", "takes"), number.Fixed(float64(acceptedTakes(r)), 0))
	if acceptedTakes(r) == len(r.Takes) && len(r.Takes) > 0 {
		answer = fmt.Sprintf("%s, all accepted.", plural(len(r.Takes), "take", "takes"))
	}
	answer += " What was recorded is kept as it was, rejected takes too."
	return page{"What was recorded?", answer, func(doc *document) {
		rows := make([][]string, 0, len(r.Takes))
		for _, t := range r.Takes {
			verdict := "accepted"
			if !t.Accepted {
				verdict = "rejected"
			}
			over, arrival := number.Fixed(t.SNRDB, 0), number.Fixed(1000*t.Arrival, 3)
			if slices.Contains(t.Flags, measure.Silent) {
				over, arrival = "–", "–"
			}
			rows = append(rows, []string{t.Distance, number.Fixed(float64(t.Number), 0), number.Fixed(t.PeakDB, 1), over, arrival, verdict, flagsText(t.Flags)})
		}
		keep := (5 + float64(min(3*(len(r.Takes)-acceptedTakes(r)), 14))) * rowHeight
		bottom := doc.style.Paper.Height
		doc.style.Paper.Height -= keep
		doc.table([]column{{"distance", 1, left}, {"take", 0.6, right}, {"peak, dBFS", 1, decimal}, {"over noise, dB", 1.25, right}, {"arrival, ms", 1.05, decimal}, {"", 0.9, left}, {"flags", 2.6, left}}, rows)
		doc.style.Paper.Height = bottom
		doc.rejected()
		doc.heading("To repeat the analysis")
		doc.paragraph("standoff fit DIR on the folder that holds this page: recordings, rig.yaml and session.json are in it. Session "+d.Session+
			" is a hash of the rig and of every recording.", 8.5, s.Figure.Ink)
	}}
}

// rejected says why takes were rejected, as far as there is room.
func (d *document) rejected() {
	r := d.data.Result
	if acceptedTakes(r) == len(r.Takes) {
		return
	}
	d.heading("Rejected, and why")
	for _, t := range r.Takes {
		if t.Accepted {
			continue
		}
		if d.room() < 6*rowHeight {
			d.paragraph("… and more in result.json", 8, d.style.Figure.Soft)
			return
		}
		d.paragraph(sentence(fmt.Sprintf("%s, take %d: %s", t.Distance, t.Number, t.Reason)), 8, d.style.Figure.Ink)
	}
}
