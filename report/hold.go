package report

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"standoff/fit"
	"standoff/report/figure"
	"standoff/report/number"
)

// holdPage shows how firmly the data hold mix and spacing: by their profiles, and by
// what parts of the data say alone.
func holdPage(d *Data, s Style) page {
	return page{"What do the data hold?", holdAnswer(d), func(doc *document) {
		h := math.Min(165, doc.room()*0.29)
		doc.profiles(h)
		doc.parts(h)
		doc.heading("Each distance by itself, given the far response that the others settle")
		doc.table([]column{{"", 1, left}, {"mix", 1.5, decimal}, {"spacing, mm", 1.5, decimal}, {"misfit in the joint fit", 1.4, decimal}}, aloneRows(d.Result))
		doc.paragraph("A distance that disagrees with the others shows here. A far distance tells the spacing only through the far response, which the others have settled.", 7.5, s.Figure.Soft)
	}}
}

// profiles are both profiles beside each other, under titles that say what they show.
func (d *document) profiles(height float64) {
	p, c := d.data.Result.Profiles, d.data.Result.Capsule
	if len(p.GradientFraction.Value) == 0 && len(p.PortSpacing.Value) == 0 {
		d.paragraph("This result holds no profiles; those of early versions do not.", 8.5, d.style.Figure.Soft)
		return
	}
	d.pair(height, "Mix: "+brief(c.GradientFraction, 1, ""), mixProfile(d.data, d.style), "Spacing: "+brief(c.PortSpacing, 1000, "mm"), spacingProfile(d.data, d.style))
	d.paragraph("How much worse the fit becomes with the number held elsewhere and all others fitted again, in standard uncertainties squared. "+
		"Shaded: the ± that is reported, wider where the budget knows of more than this fit does. A curve that stays below the dashes excludes nothing.", 7.5, d.style.Figure.Soft)
}

// brief is a value for a title; what kind of limit it is, the figure says.
func brief(v fit.Value, scale float64, unit string) string {
	return strings.NewReplacer(" (below", ", below", " (above", ", above", ", 95 % one-sided)", "").Replace(value(v, scale, unit))
}

// parts are the mixes of octaves and of distances beside each other.
func (d *document) parts(height float64) {
	octaves, left := octavesFigure(d.data, d.style)
	if len(octaves.From) == 0 {
		d.heading("Mix by distance")
		d.figure(aloneFigure(d.data, d.style), height)
	} else {
		d.pair(height, "Mix by octave", octaves, "Mix by distance", aloneFigure(d.data, d.style))
	}
	k := slices.Concat(octavesCoverage(d.data.Result), aloneCoverage(d.data.Result))
	if note := partsNote(d.data, k, left); len(note) > 0 {
		d.paragraph(strings.Join(note, ". ")+".", 7.5, d.style.Figure.Soft)
	}
}

// pair draws two figures side by side under their headings.
func (d *document) pair(height float64, nameA string, a figure.Figure, nameB string, b figure.Figure) {
	const between = 14
	width := (d.width() - between) / 2
	second := marginLeft + width + between
	d.y += 6
	d.font("B", 10, d.style.Figure.Ink)
	d.text(marginLeft, d.y+10, d.fitted(nameA, width))
	d.text(second, d.y+10, d.fitted(nameB, width))
	d.y += 18
	d.figureAt(a, marginLeft, width, height)
	d.figureAt(b, second, width, height)
	d.y += height + 2
}

// holdAnswer says in numbers what the page shows.
func holdAnswer(d *Data) string {
	r := d.Result
	var out []string
	for _, p := range []struct {
		name    string
		profile fit.Profile
		value   fit.Value
		scale   float64
		unit    string
	}{{"mix", r.Profiles.GradientFraction, r.Capsule.GradientFraction, 1, ""}, {"spacing", r.Profiles.PortSpacing, r.Capsule.PortSpacing, 1000, "mm"}} {
		// A limit, one-sided, is said already.
		if text := excluded(p.name, p.profile, p.scale, p.unit); text != "" && limits(p.value, 1, "") == "" {
			out = append(out, text)
		}
	}
	answer := fmt.Sprintf("The mix is %s, the spacing %s.", covered(r.Capsule.GradientFraction, 1, ""), covered(r.Capsule.PortSpacing, 1000, "mm"))
	if len(out) > 0 {
		answer += " By this fit alone the data exclude " + strings.Join(out, " and ") + " (95 %)."
	}
	return strings.TrimSpace(answer + " " + octavesSentence(d))
}

// excluded says in words what a profile excludes.
func excluded(name string, p fit.Profile, scale float64, unit string) string {
	lo, hi := figure.Interval(p.Value, p.Excess, figure.TwoSided)
	if math.IsNaN(lo) || len(p.Value) < 2 {
		return ""
	}
	lo, hi = lo*scale, hi*scale
	digits := number.Digits((hi - lo) / 2)
	if math.IsInf(hi-lo, 0) {
		digits = number.Digits(0.1 * math.Min(math.Abs(lo), math.Abs(hi)))
	}
	with := func(v float64) string { return strings.TrimSpace(number.Fixed(v, digits) + " " + unit) }
	switch {
	case math.IsInf(lo, 0) && math.IsInf(hi, 0):
		return "no " + name
	case math.IsInf(lo, 0):
		return "a " + name + " above " + with(hi)
	case math.IsInf(hi, 0):
		return "a " + name + " below " + with(lo)
	}
	return "a " + name + " below " + number.Fixed(lo, digits) + " or above " + with(hi)
}

// octavesSentence says how many octaves agree with all together, and which is worst.
func octavesSentence(d *Data) string {
	beta, half, known := mixOf(d)
	told, agree, worst, worstBy := 0, 0, -1, 1.0
	for i, o := range d.Result.Octaves {
		v, u, ok := octaveMix(o)
		if !ok {
			continue
		}
		told++
		by := math.Abs(v-beta) / math.Max(math.Hypot(u, half), 1e-12)
		if by <= 1 {
			agree++
		}
		if by > worstBy {
			worst, worstBy = i, by
		}
	}
	if told == 0 || !known {
		return ""
	}
	if worst < 0 {
		if told == 1 {
			return "One octave tells a mix by itself, and agrees with the joint one within ±."
		}
		return fmt.Sprintf("%d octaves tell a mix each, and agree with the joint one within ±.", told)
	}
	o := d.Result.Octaves[worst]
	return fmt.Sprintf("%d of %s agree with the joint mix within ±; %s to %s says %s: look at a mix that changes with frequency, or at the room.",
		agree, plural(told, "octave", "octaves"), number.Frequency(o.From), number.Frequency(o.To), covered(o.GradientFraction, 1, ""))
}

// number64 is a value and its ±, where the data hold it and it is a number.
func number64(v fit.Value) (value, expanded float64, ok bool) {
	if !v.Resolved || v.Value == nil || v.Expanded == nil || !(math.Abs(*v.Value) < 1e9) || !(*v.Expanded < 1e9) {
		return 0, 0, false
	}
	return *v.Value, *v.Expanded, true
}

// octaveMix is what an octave tells, where it is an octave.
func octaveMix(o fit.OctaveMix) (mix, expanded float64, ok bool) {
	if !(o.From > 0 && o.From < o.To && o.To < 1e6) {
		return 0, 0, false
	}
	return number64(o.GradientFraction)
}

func mixProfile(d *Data, s Style) figure.Profile {
	return profileFigure(s, d.Result.Profiles.GradientFraction, d.Result.Capsule.GradientFraction, 1, "mix")
}

func spacingProfile(d *Data, s Style) figure.Profile {
	return profileFigure(s, d.Result.Profiles.PortSpacing, d.Result.Capsule.PortSpacing, 1000, "spacing, mm")
}

func profileFigure(s Style, p fit.Profile, v fit.Value, scale float64, axis string) figure.Profile {
	out := figure.Profile{Style: s.Figure, Excess: p.Excess, Axis: axis, Limit: math.NaN()}
	for _, x := range p.Value {
		out.Value = append(out.Value, scale*x)
	}
	if len(p.Value) < 2 {
		out.Note = []string{"no curve in this result"}
	}
	at, half, known := number64(v)
	out.At, out.Half, out.Known = scale*at, scale*half, known
	for _, limit := range []*float64{v.LowerLimit, v.UpperLimit} {
		if limit != nil {
			out.Limit = scale * *limit
		}
	}
	return out
}

// octavesFigure leaves out the octaves that tell no mix, and says how many.
func octavesFigure(d *Data, s Style) (out figure.Octaves, left int) {
	out.Style = s.Figure
	out.Beta, out.Half, out.Known = mixOf(d)
	for _, o := range d.Result.Octaves {
		v, u, ok := octaveMix(o)
		if !ok {
			left++
			continue
		}
		out.From, out.To = append(out.From, o.From), append(out.To, o.To)
		out.Value, out.Expanded = append(out.Value, v), append(out.Expanded, u)
	}
	return out, left
}

// partsNote says what points, whose ± have these coverage factors, and band are.
func partsNote(d *Data, k []float64, left int) (note []string) {
	if len(k) > 0 {
		note = []string{"Points: a part of the data by itself, with its ±" + coverages(k)}
	}
	if v := d.Result.Capsule.GradientFraction; v.Resolved {
		note = append(note, "Band: all together, ± ("+number.Coverage(v.CoverageFactor)+")")
	}
	if left > 0 {
		note = append(note, fmt.Sprintf("Left out: %s whose mix is not resolved", plural(left, "octave", "octaves")))
	}
	return note
}

// octavesCoverage are the coverage factors of the octaves that tell a mix.
func octavesCoverage(r *fit.Result) (k []float64) {
	for _, o := range r.Octaves {
		if _, _, ok := octaveMix(o); ok {
			k = append(k, o.GradientFraction.CoverageFactor)
		}
	}
	return k
}

// aloneCoverage are those of the distances.
func aloneCoverage(r *fit.Result) (k []float64) {
	for _, d := range r.Distances {
		if _, _, ok := number64(d.Alone.GradientFraction); ok && d.Used {
			k = append(k, d.Alone.GradientFraction.CoverageFactor)
		}
	}
	return k
}

// coverages are the factors of several ±, as a range where they differ.
func coverages(k []float64) string {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range k {
		lo, hi = math.Min(lo, v), math.Max(hi, v)
	}
	switch a, b := number.Coverage(lo), number.Coverage(hi); {
	case len(k) == 0:
		return ""
	case a == b:
		return " (" + a + ")"
	default:
		return " (" + a + " to " + strings.TrimPrefix(b, "k = ") + ")"
	}
}
