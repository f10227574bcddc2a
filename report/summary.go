package report

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"

	"standoff/fit"
	"standoff/report/figure"
	"standoff/report/number"
)

func summaryPage(d *Data, s Style) page {
	return page{"What is this microphone near a source?", summaryAnswer(d), func(doc *document) {
		doc.warnings()
		doc.headline()
		doc.y += 10
		words := conditions(d)
		below := doc.riseTableHeight() + doc.textHeight(words, 8.5) + doc.textHeight(caution(d.Powering), 8.5) + 2*24 + 12
		h := min(330.0, doc.room()-below)
		doc.figureAt(figure.Rise{Style: s.Figure, Curves: riseCurves(d), Small: true}, marginLeft, doc.width()*0.62, h)
		beta, expanded, known := mixOf(d)
		doc.figureAt(figure.Polar{Style: s.Figure, Beta: beta, Expanded: expanded, Known: known, Small: true},
			marginLeft+doc.width()*0.66, doc.width()*0.34, h)
		doc.y += h + 4
		doc.riseTable()
		doc.heading("Conditions")
		doc.paragraph(words, 8.5, s.Figure.Ink)
		doc.heading("Before this is repeated")
		doc.paragraph(caution(d.Powering), 8.5, s.Figure.Ink)
	}}
}

// summaryAnswer is the page's first sentence.
func summaryAnswer(d *Data) string {
	c := d.Result.Capsule
	var out []string
	if c.GradientFraction.Resolved {
		out = append(out, fmt.Sprintf("%s: its mix is %s.", capitalised(article(c.Pattern)), covered(c.GradientFraction, 1, "")))
	} else {
		out = append(out, "The mix of gradient and pressure is "+value(c.GradientFraction, 1, "")+".")
	}
	if v, u, ok := riseAt(d.Result.RiseTable, 0.1, 100); ok {
		out = append(out, fmt.Sprintf("With the grille 10 cm from a small source it gives %s at 100 Hz over its far response.", decibelsPlusMinus(v, u)))
	}
	out = append(out, reach(d.Result.RiseTable, 100)...)
	if n := len(d.Result.Distances) - used(d.Result); n > 0 {
		out = append(out, plural(n, "distance was", "distances were")+" left out.")
	}
	return strings.Join(out, " ")
}

// capitalised begins with a capital; a key of the rig stays as it is written.
func capitalised(s string) string {
	first, size := utf8.DecodeRuneInString(s)
	if word, _, _ := strings.Cut(s, " "); size == 0 || strings.Contains(strings.TrimRight(word, "."), ".") {
		return s
	}
	return string(unicode.ToUpper(first)) + s[size:]
}

// reach says from which distance on a frequency is within 1 dB of its far response,
// as the table has it, between its columns on a logarithmic scale of distance.
func reach(t fit.RiseTable, hz float64) []string {
	row := slices.Index(t.Frequencies, hz)
	if row < 0 || row >= len(t.DB) || len(t.DB[row]) != len(t.Distances) || len(t.Distances) == 0 {
		return nil
	}
	rise, last := t.DB[row], len(t.Distances)-1
	at := number.Frequency(hz)
	if !(math.Abs(rise[last]) <= 1) {
		return []string{"At " + number.Length(t.Distances[last]) + " the rise at " + at + " is still above 1 dB."}
	}
	for j := last; j > 0; j-- {
		here, nearer := math.Abs(rise[j]), math.Abs(rise[j-1])
		if nearer > 1 {
			part := (1 - here) / (nearer - here)
			r := t.Distances[j] * math.Pow(t.Distances[j-1]/t.Distances[j], part)
			return []string{"From about " + number.Fixed(100*r, 0) + " cm on, the rise at " + at + " is below 1 dB."}
		}
	}
	return []string{"At every distance of the table the rise at " + at + " is below 1 dB."}
}

func mixOf(d *Data) (beta, expanded float64, known bool) {
	v := d.Result.Capsule.GradientFraction
	if !v.Resolved || v.Value == nil || v.Expanded == nil {
		return 0, 0, false
	}
	return *v.Value, *v.Expanded, true
}

func riseCurves(d *Data) []fit.RiseCurve {
	if d.Curves == nil {
		return nil
	}
	return d.Curves.Rise
}

// mostWarnings are printed on the summary; the others are in result.json.
const mostWarnings = 4

func (d *document) warnings() {
	list := d.data.Result.Warnings
	for i, w := range list {
		if i == mostWarnings {
			d.paragraph(fmt.Sprintf("… and %s in result.json", plural(len(list)-i, "more warning", "more warnings")), 8.5, d.style.Figure.Accent)
			break
		}
		text := sentence(capitalised(strings.TrimSpace(w.Text)))
		if w.Hint != "" {
			text += " " + sentence(capitalised(strings.TrimSpace(w.Hint)))
		}
		d.paragraph("▪ "+text, 8.5, d.style.Figure.Accent)
	}
	if len(list) > 0 {
		d.y += 6
	}
}

// headline is the three findings in large type.
func (d *document) headline() {
	st := d.style.Figure
	c := d.data.Result.Capsule
	pattern, claimed := c.Pattern, "no pattern claimed"
	if pattern == "" {
		pattern = "–"
	}
	if c.Claimed != "" {
		claimed = "claimed " + c.Claimed
		if c.Agrees != nil {
			claimed += map[bool]string{true: ": agrees", false: ": does not agree"}[*c.Agrees]
		}
	}
	third := d.width() / 3
	for i, f := range []struct {
		head, foot string
		value      fit.Value
		scale      float64
		unit, word string
	}{
		{head: "Mix (gradient fraction)", foot: "0 pressure · 0.5 cardioid · 1 figure-8", value: c.GradientFraction, scale: 1},
		{head: "Effective port spacing", foot: spacingFoot(c), value: c.PortSpacing, scale: 1000, unit: " mm"},
		{head: "Pattern, from the mix", foot: claimed, word: pattern},
	} {
		x := marginLeft + float64(i)*third
		d.font("", 8, st.Soft)
		d.text(x, d.y+8, f.head)
		d.big(x, third-10, f.value, f.scale, f.unit, f.word)
		d.font("", 8, st.Ink)
		d.text(x, d.y+48, d.fitted(f.foot, third-10))
	}
	d.y += 54
}

func spacingFoot(c fit.CapsuleResult) string {
	if c.PortSpacing.Resolved {
		return build(c)
	}
	if l := limits(c.PortSpacing, 1000, "mm"); l != "" {
		return strings.Trim(l, " ()")
	}
	return "the data do not hold it"
}

// big writes a value large and its ± smaller, or a word.
func (d *document) big(x, width float64, v fit.Value, scale float64, unit, word string) {
	st := d.style.Figure
	if word == "" && (!v.Resolved || v.Value == nil || v.Expanded == nil) {
		word = notResolved
	}
	if word != "" {
		size := 22.0
		for d.font("B", size, st.Ink); d.pdf.GetStringWidth(word) > width && size > 9; size-- {
			d.font("B", size-1, st.Ink)
		}
		d.text(x, d.y+34, word)
		return
	}
	main, plus := number.Parts(*v.Value*scale, *v.Expanded*scale)
	d.font("B", 24, st.Ink)
	d.text(x, d.y+34, main)
	x += d.pdf.GetStringWidth(main) + 6
	d.font("", 10, st.Ink)
	d.text(x, d.y+34, "± "+plus+unit)
}

// riseTable is the rise at working distances, with the widest ± of each column.
func (d *document) riseTable() {
	t := d.data.Result.RiseTable
	heading, from := "Rise in dB with the grille this far from a small source (a mouth, a string)", d.data.Result.Fit.From
	if len(t.Frequencies) > 0 && t.Frequencies[0] < from {
		heading += "; * extrapolated"
	}
	d.heading(heading)
	columns := []column{{"", 1.1, left}}
	for _, r := range t.Distances {
		columns = append(columns, column{number.Fixed(100*r, map[bool]int{true: 0, false: 1}[r*100 == float64(int(r*100+0.5))]) + " cm", 1.5, right})
	}
	var rows [][]string
	for i, f := range t.Frequencies {
		row := []string{number.Frequency(f)}
		if f < from {
			row[0] += " *"
		}
		for j := range t.Distances {
			if i < len(t.DB) && j < len(t.DB[i]) && i < len(t.Expanded) && j < len(t.Expanded[i]) {
				row = append(row, strings.TrimSuffix(decibelsPlusMinus(t.DB[i][j], t.Expanded[i][j]), " dB"))
			}
		}
		rows = append(rows, row)
	}
	d.table(columns, rows)
}

// riseTableHeight is what the table takes with its heading.
func (d *document) riseTableHeight() float64 {
	return 24 + 13 + float64(len(d.data.Result.RiseTable.Frequencies))*rowHeight + 4
}

func conditions(d *Data) string {
	c, r := d.Conditions, d.Result
	source := "a point source"
	if c.SourceKind == fit.PistonSource {
		source = "a piston of radius " + number.PlusMinus(1000*c.SourceRadius, 1000*c.SourceRadiusExpanded, "mm")
	}
	span := ""
	if n := len(r.Distances); n > 0 {
		span = fmt.Sprintf(" from %s to %s", r.Distances[0].Label, r.Distances[n-1].Label)
	}
	polarity := "Polarity " + r.Polarity + "."
	if r.Polarity == fit.PolarityUnknown {
		polarity = "Polarity unknown: set source.polarity in the rig to have it told."
	}
	return fmt.Sprintf("%s%s, %s of %s accepted, tape ± %s mm. Source: %s. Air: %s °C, %s %% humidity, %s kPa. "+
		"Sweep: %s to %s in %s, %s dBFS, at %d Hz, by %s. Gate %s; fitted from %s to %s. %s",
		plural(len(r.Distances), "distance", "distances"), span, number.Fixed(float64(acceptedTakes(r)), 0), plural(len(r.Takes), "take", "takes"),
		number.Fixed(2000*c.DistanceUncertainty, 1), source, number.Fixed(c.TemperatureC, 1), number.Fixed(c.HumidityPercent, 0),
		number.Fixed(c.PressureKPa, 1), number.Frequency(c.SweepFrom), number.Frequency(c.SweepTo), number.Time(c.SweepDuration),
		number.Fixed(c.SweepLevelDBFS, 0), c.SampleRate, c.Recorder, number.Time(r.Fit.Gate), number.Frequency(r.Fit.From),
		number.Frequency(r.Fit.To), polarity)
}

// caution fits the unit's powering.
func caution(powering string) string {
	out := "Sweeps are louder than they look: protect hearing, start with the level down, and stay within what the loudspeaker's maker allows, at its low end above all."
	switch powering {
	case "phantom":
		out += " Phantom power may harm a passive ribbon: connect and disconnect with the supply off and the channel down."
	case "external":
		out += " External supplies, those of tube microphones above all, hold dangerous voltage even when switched off: opening them is for qualified people."
	default:
		out += " No phantom power on a passive ribbon."
	}
	return out + " Local rules and licensed practice come first."
}
