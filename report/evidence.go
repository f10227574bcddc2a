package report

import (
	"fmt"
	"math"
	"strings"

	"standoff/fit"
	"standoff/report/figure"
	"standoff/report/number"
)

func risePage(d *Data, s Style) page {
	return page{"How much low end does each distance add?", riseAnswer(d), func(doc *document) {
		doc.figure(figure.Rise{Style: s.Figure, Curves: riseCurves(d), Residuals: true}, doc.room())
	}}
}

// riseAnswer names the rise at 100 Hz, as fitted, for the nearest, a middle and the
// farthest distance.
func riseAnswer(d *Data) string {
	curves := riseCurves(d)
	var parts []string
	for i, c := range curves {
		if len(curves) > 3 && i != 0 && i != len(curves)/2 && i != len(curves)-1 {
			continue
		}
		if v, ok := valueAt(c.LineHz, c.LineDB, 100); ok {
			parts = append(parts, decibelsPlusMinus(v, lineExpanded(c, 100))+" at "+c.Label)
		}
	}
	if len(parts) == 0 {
		return "No rise could be drawn."
	}
	return "At 100 Hz the rise over the far response is " + strings.Join(parts, ", ") + ", for this loudspeaker. " + followsSentence(d)
}

// followsSentence says whether residuals lie in their bands.
func followsSentence(d *Data) string {
	in, all := 0, 0
	for _, c := range riseCurves(d) {
		for i, r := range c.Residual {
			if i < len(c.Expanded) && !math.IsNaN(r) {
				all++
				if math.Abs(r) <= c.Expanded[i] {
					in++
				}
			}
		}
	}
	if all == 0 {
		return ""
	}
	return fmt.Sprintf("%s %% of the points lie within their ± of the fitted lines (95 %% should), from %s to %s.",
		number.Fixed(100*float64(in)/float64(all), 0), number.Frequency(d.Result.Fit.From), number.Frequency(d.Result.Fit.To))
}

func valueAt(hz, db []float64, f float64) (float64, bool) {
	for i := 1; i < len(hz) && i < len(db); i++ {
		if hz[i-1] <= f && hz[i] >= f {
			t := (f - hz[i-1]) / (hz[i] - hz[i-1])
			return db[i-1]*(1-t) + db[i]*t, true
		}
	}
	return 0, false
}

// lineExpanded is the ± of the fitted line at f.
func lineExpanded(c fit.RiseCurve, f float64) float64 {
	u, _ := valueAt(c.LineHz, c.LineExpanded, f)
	return u
}

func responsesPage(d *Data, s Style) page {
	absolute, relative := responseSeries(d)
	answer := "Nothing was recorded that could be drawn."
	if n := len(d.Responses); n > 0 {
		answer = fmt.Sprintf("Level from output to input at %s, gated at %s; the loudspeaker is still in it. Below, each distance is held against %s, "+
			"in which the loudspeaker drops out. Bands are ± (k = 2). Below %s the gate smooths.", plural(n, "distance", "distances"), number.Time(d.Result.Fit.Gate), d.Responses[n-1].Label, number.Frequency(1/math.Max(d.Result.Fit.Gate, 1e-4)))
	}
	return page{"What did the microphone hear at each distance?", answer, func(doc *document) {
		doc.figure(figure.Stack{Upper: absoluteFigure(d, s, absolute), Lower: relativeFigure(s, relative)}, doc.room())
	}}
}

func absoluteFigure(d *Data, s Style, lines []figure.Series) figure.Responses {
	out := figure.Responses{Style: s.Figure, Lines: lines, Axis: "level, dB re a wire"}
	if gate := d.Result.Fit.Gate; gate > 1e-4 && gate < 1 {
		out.SmoothBelow = 1 / gate
	}
	return out
}

func relativeFigure(s Style, lines []figure.Series) figure.Responses {
	return figure.Responses{Style: s.Figure, Lines: lines, Axis: "level, dB re the farthest"}
}

// responseSeries are the levels, and the levels relative to the farthest distance.
func responseSeries(d *Data) (absolute, relative []figure.Series) {
	for _, r := range d.Responses {
		absolute = append(absolute, figure.Series{Label: r.Label, X: r.Hz, Y: r.DB, Half: r.Expanded})
	}
	if len(d.Responses) == 0 {
		return absolute, nil
	}
	last := d.Responses[len(d.Responses)-1]
	for _, r := range d.Responses {
		line := figure.Series{Label: r.Label}
		for i := range min(len(r.Hz), len(last.DB), len(r.DB)) {
			// Towards the null of the far response a ratio means nothing.
			if r.Hz[i] < d.Result.Fit.From || r.Hz[i] > d.Result.Fit.To {
				continue
			}
			line.X = append(line.X, r.Hz[i])
			line.Y = append(line.Y, r.DB[i]-last.DB[i])
			if i < len(r.Expanded) && i < len(last.Expanded) {
				line.Half = append(line.Half, math.Hypot(r.Expanded[i], last.Expanded[i]))
			}
		}
		relative = append(relative, line)
	}
	return absolute, relative
}

func distancePage(d *Data, s Style) page {
	var curves []fit.LevelCurve
	if d.Curves != nil {
		curves = d.Curves.Levels
	}
	return page{"How does the level fall with distance?", distanceAnswer(d), func(doc *document) {
		rows := distanceRows(d)
		doc.figure(figure.Levels{Style: s.Figure, Curves: curves}, max(doc.room()-float64(len(rows)+4)*rowHeight, 0.4*doc.room()))
		doc.heading("Distances: by tape, and as fitted within the tape's ±")
		doc.table([]column{{"label", 1, left}, {"by tape, mm", 1, decimal}, {"fitted, mm", 1.4, decimal}, {"difference, mm", 1.1, decimal}, {"flags", 1.6, left}}, rows)
	}}
}

func distanceAnswer(d *Data) string {
	worst, label := 0.0, ""
	for _, r := range d.Result.Distances {
		if r.Used && math.Abs(r.Fitted-r.Nominal) > math.Abs(worst) {
			worst, label = r.Fitted-r.Nominal, r.Label
		}
	}
	out := "Pressure falls with 1/r (dashes); the gradient part rises above that near the source, the more the lower the frequency."
	if label != "" {
		out += fmt.Sprintf(" The fit moved %s most, by %s mm.", label, number.Signed(1000*worst, 1))
	}
	return out
}

func distanceRows(d *Data) (rows [][]string) {
	for _, r := range d.Result.Distances {
		if !r.Used {
			rows = append(rows, []string{r.Label, number.Fixed(1000*r.Nominal, 1), "not used", "", flagsText(r.Flags)})
			continue
		}
		rows = append(rows, []string{r.Label, number.Fixed(1000*r.Nominal, 1), number.PlusMinus(1000*r.Fitted, 1000*r.FittedExpanded, ""),
			number.Signed(1000*(r.Fitted-r.Nominal), 2), flagsText(r.Flags)})
	}
	return rows
}

func impulsePage(d *Data, s Style) page {
	fig := figure.Impulses{Style: s.Figure}
	for _, m := range d.Impulses {
		fig.Lines = append(fig.Lines, figure.Series{Label: m.Label, X: m.Seconds, Y: m.Value})
		fig.GateFrom, fig.GateTo = m.GateFrom, m.GateTo
	}
	return page{"Was the room kept out?", fmt.Sprintf("Only what lies in the shaded gate was used: it closes %s after the direct sound. Why there: %s. "+
		"Each response is drawn to its own largest value.", number.Time(d.Result.Fit.Gate), orDash(d.Result.Fit.GateReason)), func(doc *document) {
		doc.figure(fig, doc.room())
	}}
}

func orDash(s string) string {
	if s == "" {
		return "not said"
	}
	return s
}
