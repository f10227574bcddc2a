package report

import (
	"fmt"
	"math"

	"standoff/fit"
	"standoff/report/number"
)

// sources are the causes of doubt in the words of who sets up the measurement.
var sources = map[string]string{
	"noise":          "noise of the recordings",
	"unexplained":    "what the model leaves unexplained",
	"room":           "reflections of the room",
	"tape":           "distances by tape",
	"setback":        "setback of the capsule",
	"source radius":  "radius of the loudspeaker",
	"speed of sound": "air, by its speed of sound",
	"clocks":         "clocks of player and recorder",
	"model form":     "form of the model",
	"band":           "band that is fitted",
	"method":         "the method itself",
}

func sourceName(s string) string {
	if name, ok := sources[s]; ok {
		return name
	}
	return s
}

// sourceSize is how large a cause is, in a technician's unit.
func sourceSize(l fit.BudgetLine) string {
	switch l.Unit {
	case "relative":
		return number.Percent(l.Size)
	case "1/m": // relative to the far response at 1 m
		return number.Percent(l.Size) + " at 1 m"
	case "m":
		return number.Significant(1000*l.Size, 2) + " mm"
	case "other models":
		return number.Fixed(l.Size, 0) + " other"
	case "Hz":
		if l.Size == 0 {
			return "not varied"
		}
		return "to " + number.Frequency(l.Size)
	case "1", "":
		return number.Significant(l.Size, 2)
	}
	return number.Significant(l.Size, 2) + " " + l.Unit
}

// The columns of the budget that hold bars.
const (
	mixBar     = 4
	spacingBar = 6
)

// budget is the table of what is in doubt and what that does to mix and spacing.
func (d *document) budget() {
	b := d.data.Result.Budget
	if len(b.Lines) == 0 {
		d.paragraph("This result holds no uncertainty budget; those of early versions do not.", 8.5, d.style.Figure.Soft)
		return
	}
	d.heading("Where the ± comes from: standard uncertainties")
	mix, spacing := mixShares(b), spacingShares(b)
	columns := []column{{"source of doubt", 3, left}, {"type", 0.6, left}, {"its size", 1.35, left},
		{"on the mix", 1, decimal}, {"share", 0.8, left}, {"on the spacing, mm", 1.55, decimal}, {"share", 0.8, left}, {"freedom", 0.8, decimal}}
	d.tableWith(columns, budgetRows(d.data.Result), func(row, col int, x, top, w float64) {
		switch {
		case row == len(b.Lines) && col == 0:
			d.rule(top, d.style.Figure.Ink, 0.6)
		case row < len(b.Lines) && col == mixBar:
			d.bar(x, top+3.6, w-gutter, mix[row])
		case row < len(b.Lines) && col == spacingBar:
			d.bar(x, top+3.6, w-gutter, spacing[row])
		}
	})
	note := ""
	if !d.data.Result.Capsule.PortSpacing.Resolved {
		note = " The spacing is not resolved: its column only tells which doubt weighs most."
	}
	d.paragraph("Bars: share of the variance. Type A: from the spread of this measurement; B: known otherwise. Freedom: degrees of freedom, how well an uncertainty is itself known; "+
		"below about 60 the coverage factor k grows beyond 2."+note, 7.5, d.style.Figure.Soft)
}

// bar is a share from 0 to 1 of a width; what is less than a hair is nothing.
func (d *document) bar(x, y, width, share float64) {
	if !(share > 0.002) {
		return
	}
	r, g, b, _ := rgb(d.style.Figure.Middle)
	d.pdf.SetFillColor(r, g, b)
	d.pdf.Rect(x, y, width*math.Min(share, 1), 6, "F")
}

// budgetRows are the lines and their sums; what is not resolved has no ±.
func budgetRows(r *fit.Result) (rows [][]string) {
	b := r.Budget
	mix, spacing := b.GradientFraction, b.PortSpacing
	mixDigits, spacingDigits := budgetDigits(mix.Standard), budgetDigits(1000*spacing.Standard)
	for _, l := range b.Lines {
		rows = append(rows, []string{sourceName(l.Source), l.Type, sourceSize(l),
			contribution(l.GradientFraction, mixDigits), "", contribution(1000*l.PortSpacing, spacingDigits), "", freedom(l.Freedom)})
	}
	return append(rows,
		[]string{"all together", "", "", number.Fixed(mix.Standard, mixDigits), "", number.Fixed(1000*spacing.Standard, spacingDigits)},
		[]string{"effective degrees of freedom", "", "", freedom(mix.Freedom), "", freedom(spacing.Freedom)},
		[]string{"coverage factor k for 95 %", "", "", ifResolved(r.Capsule.GradientFraction, number.Significant(mix.CoverageFactor, 3)), "",
			ifResolved(r.Capsule.PortSpacing, number.Significant(spacing.CoverageFactor, 3))},
		[]string{"±, k times all together", "", "", ifResolved(r.Capsule.GradientFraction, number.Fixed(mix.Expanded, mixDigits)), "",
			ifResolved(r.Capsule.PortSpacing, number.Fixed(1000*spacing.Expanded, spacingDigits))})
}

func ifResolved(v fit.Value, s string) string {
	if !v.Resolved {
		return "–"
	}
	return s
}

// budgetDigits is one more than the sum shows, so that small lines are seen and a
// reader can add up.
func budgetDigits(sum float64) int { return min(max(number.Digits(sum)+1, 0), 6) }

// contribution says of one that would be rounded to nothing what it is below.
func contribution(v float64, digits int) string {
	least := math.Pow(10, -float64(digits))
	if v > 0 && v < least/2 {
		return "<" + number.Fixed(least, digits)
	}
	return number.Fixed(v, digits)
}

// freedom is rounded down, as the tables of Student's t want it.
func freedom(f fit.Freedom) string {
	if f > 1e5 {
		return "∞"
	}
	return number.Fixed(math.Floor(float64(f)), 0)
}

func mixShares(b fit.Budget) []float64 {
	return shares(b.Lines, func(l fit.BudgetLine) float64 { return l.GradientFraction })
}

func spacingShares(b fit.Budget) []float64 {
	return shares(b.Lines, func(l fit.BudgetLine) float64 { return l.PortSpacing })
}

// shares are the parts of the variance; of one that is no number, none.
func shares(lines []fit.BudgetLine, of func(fit.BudgetLine) float64) []float64 {
	out := make([]float64, len(lines))
	most, sum := 0.0, 0.0
	for _, l := range lines {
		most = math.Max(most, math.Abs(of(l)))
	}
	for i, l := range lines {
		out[i] = math.Pow(of(l)/most, 2) // of the largest first: a square may overflow
		sum += out[i]
	}
	for i := range out {
		if out[i] /= sum; math.IsNaN(out[i]) {
			out[i] = 0
		}
	}
	return out
}

// limiting names the sources with the largest share of each variance.
func limiting(r *fit.Result) string {
	lines := r.Budget.Lines
	mix, spacing := mixShares(r.Budget), spacingShares(r.Budget)
	i, j := largest(mix), largest(spacing)
	percent := func(share float64) string { return number.Fixed(100*share, 0) }
	switch {
	case i < 0 || !r.Capsule.GradientFraction.Resolved:
		return ""
	case j < 0 || !r.Capsule.PortSpacing.Resolved:
		return fmt.Sprintf("Most of that ± comes from %s (%s %% of the variance).", theSource(lines[i].Source), percent(mix[i]))
	case i == j:
		return fmt.Sprintf("Most of both ± comes from %s (%s and %s %% of the variances).", theSource(lines[i].Source), percent(mix[i]), percent(spacing[j]))
	}
	return fmt.Sprintf("Most of the first ± comes from %s (%s %% of the variance), most of the second from %s (%s %%).",
		theSource(lines[i].Source), percent(mix[i]), theSource(lines[j].Source), percent(spacing[j]))
}

// largest is the place of the largest share, −1 where all are nothing.
func largest(shares []float64) int {
	best := -1
	for i, s := range shares {
		if s > 0 && (best < 0 || s > shares[best]) {
			best = i
		}
	}
	return best
}

// theSource is a source's name within a sentence.
func theSource(s string) string {
	switch s {
	case "unexplained", "method", "speed of sound":
		return sourceName(s)
	}
	return "the " + sourceName(s)
}
