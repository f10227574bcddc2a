package main

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"path/filepath"
	"slices"
	"strings"

	"standoff/fit"
	"standoff/report"
	"standoff/report/number"
)

// print says it for a person, within 80 columns.
func (p *plan) print(e *env) {
	r := p.rig
	e.print("%s  plan for %d distances; nothing has been measured", e.strong(r.Unit.Tag), len(p.data.Points))
	e.print("")
	e.print("  %-15s%-22s%-22s", "expected", "± of the mix", "± of the port spacing, if "+number.Length(p.spacing))
	for i, f := range p.found {
		e.print("  %-15s%-22s%s", p.patterns[i], p.half(f.Budget.GradientFraction, 1, ""), p.spacingHalf(f))
	}
	p.printWorth(e)
	p.printBudget(e)
	p.printBetter(e)
	p.printAssumed(e)
}

// half is a ± with its factor.
func (p *plan) half(s fit.BudgetSum, scale float64, unit string) string {
	_, u := number.Parts(0, scale*s.Expanded)
	return strings.TrimSpace("± " + u + " " + unit)
}

func (p *plan) spacingHalf(f *fit.Forecast) string {
	switch {
	case f.Acoustics.Beta == 0:
		return "has none"
	case !f.Resolved:
		return "not resolved (" + p.half(f.Budget.PortSpacing, 1e3, "mm") + ")"
	}
	return p.half(f.Budget.PortSpacing, 1e3, "mm")
}

// shown is the pattern that is looked at in detail: the cardioid of several.
func (p *plan) shown() int {
	return max(slices.Index(p.patterns, "cardioid"), 0)
}

func (p *plan) printWorth(e *env) {
	n := p.shown()
	e.print("")
	e.print("  %s: without a distance the ± (no floor counted) would grow", p.patterns[n])
	e.print("  %-15s%-22s%s", "", "of the mix", "of the port spacing")
	for _, w := range p.found[n].Worth {
		e.print("  %-15s%-22s%s", w.Label, times(w.GradientFraction), times(w.PortSpacing)+"  "+worthBar(w.PortSpacing))
	}
}

func times(x float64) string {
	if math.IsInf(x, 1) || x > 99 {
		return "over 99 times"
	}
	return fmt.Sprintf("%.2f times", x)
}

// worthBar is a factor from 1 as a bar of at most 24 signs, on a logarithmic scale to 16.
func worthBar(x float64) string {
	n := int(math.Round(24 * math.Log2(math.Max(math.Min(x, 16), 1)) / 4))
	return strings.Repeat("#", n)
}

func (p *plan) printBudget(e *env) {
	n := p.shown()
	e.print("")
	e.print("  %s: what the ± come from, each with k = 2", p.patterns[n])
	e.print("  %-22s%-15s%s", "", "mix", "port spacing")
	for _, l := range p.found[n].Budget.Lines {
		if l.Source == "room" {
			continue
		}
		e.print("  %-22s%-15s%s", l.Source, tiny(2*l.GradientFraction), tiny(2e3*l.PortSpacing)+" mm")
	}
}

// tiny is a ± with two digits, however small.
func tiny(x float64) string {
	if x == 0 {
		return "0"
	}
	return fmt.Sprintf("%.2g", x)
}

func (p *plan) printBetter(e *env) {
	if p.list == nil {
		return
	}
	n := p.shown()
	var labels []string
	for _, m := range p.list {
		labels = append(labels, lengthLabel(m))
	}
	e.print("")
	e.print("  a better list of %d from %s to %s", len(p.list), number.Length(p.nearest), number.Length(p.farthest))
	e.print("  distances: [%s]", strings.Join(labels, ", "))
	before, after := p.found[n].Budget, p.better[n].Budget
	e.print("  %s: mix %s instead of %s, spacing %s instead of %s", p.patterns[n], p.half(after.GradientFraction, 1, ""), p.half(before.GradientFraction, 1, ""),
		p.half(after.PortSpacing, 1e3, "mm"), p.half(before.PortSpacing, 1e3, "mm"))
	if !p.found[n].Resolved {
		e.print("  %s", p.cure())
	}
}

// cure is what would make a spacing resolved.
func (p *plan) cure() string {
	var out []string
	if p.nearest > 0.035 {
		out = append(out, "reach 35 mm or nearer (--nearest)")
	}
	if p.data.Radius > 0.020 {
		out = append(out, "use a source of radius below 20 mm")
	}
	if len(out) == 0 {
		out = append(out, "set the nearest distances with a gauge, and know source.radius better")
	}
	return "for the spacing: " + strings.Join(out, "; ")
}

func (p *plan) printAssumed(e *env) {
	noise := fmt.Sprintf("a take at 100 mm stands %.0f dB over the noise (--clear)", p.snr)
	if math.IsNaN(p.snr) {
		noise = "noise and level of the virtual bench, as the rig has them"
	}
	e.print("")
	e.print("  assumed       %s", noise)
	e.print("                gate %s, %s; fitted %s to %s", number.Time(p.gate.Length), p.gateSaid, number.Frequency(p.data.Hz[0]), number.Frequency(p.data.Hz[len(p.data.Hz)-1]))
	e.print("                %s left over beside the noise (--left-over)", number.Percent(p.leftOver))
	e.print("                all ± are expanded, k = 2, about 95 %%; the model is taken to hold")
}

// planJSON is the forecast for programs; ± as in a result.
type planJSON struct {
	Schema   string        `json:"schema"`
	Spacing  float64       `json:"port_spacing_m"` // expected
	Gate     float64       `json:"gate_s"`
	From     float64       `json:"from_hz"`
	To       float64       `json:"to_hz"`
	Clear    *float64      `json:"clear_db"` // null on a virtual bench
	LeftOver float64       `json:"left_over"`
	Patterns []patternJSON `json:"patterns"`
	Better   []float64     `json:"better_distances_m"`
}

type patternJSON struct {
	Pattern  string         `json:"pattern"`
	Model    string         `json:"model"`
	Body     string         `json:"body"`
	Resolved bool           `json:"port_spacing_resolved"`
	Budget   fit.Budget     `json:"budget"`
	Scatter  map[string]any `json:"scatter"` // standard, what repeats of the whole measurement would scatter by
	Worth    []worthJSON    `json:"distances"`
	Better   *fit.Budget    `json:"better_budget"`
}

type worthJSON struct {
	Label   string   `json:"label"`
	Mix     *float64 `json:"gradient_fraction_without"` // factor; null when nothing would be left
	Spacing *float64 `json:"port_spacing_without"`
}

func (p *plan) asJSON() planJSON {
	out := planJSON{Schema: "standoff/plan/1", Spacing: p.spacing, Gate: p.gate.Length, From: p.data.Hz[0], To: p.data.Hz[len(p.data.Hz)-1],
		LeftOver: p.leftOver, Better: p.list}
	if !math.IsNaN(p.snr) {
		out.Clear = &p.snr
	}
	for i, f := range p.found {
		q := patternJSON{Pattern: p.patterns[i], Model: f.Model.Form, Body: f.Model.Body, Resolved: f.Resolved, Budget: f.Budget,
			Scatter: map[string]any{"gradient_fraction": f.Scatter[0], "port_spacing_m": f.Scatter[1]}}
		for _, w := range f.Worth {
			q.Worth = append(q.Worth, worthJSON{w.Label, finiteOrNil(w.GradientFraction), finiteOrNil(w.PortSpacing)})
		}
		if p.better != nil {
			q.Better = &p.better[i].Budget
		}
		out.Patterns = append(out.Patterns, q)
	}
	return out
}

func finiteOrNil(x float64) *float64 {
	if math.IsInf(x, 0) || math.IsNaN(x) {
		return nil
	}
	return &x
}

// writeFigure writes what each distance is worth, in the list and in the better one.
func (p *plan) writeFigure(path string) error {
	n := p.shown()
	var have []float64
	for _, pt := range p.data.Points {
		have = append(have, pt.Nominal)
	}
	said := func(b fit.Budget) string {
		return fmt.Sprintf("mix %s, port spacing %s (k = 2)", p.half(b.GradientFraction, 1, ""), p.half(b.PortSpacing, 1e3, "mm"))
	}
	lists := []report.PlanList{{Title: p.patterns[n] + ", as the rig has it: " + said(p.found[n].Budget), Metres: have, Worth: p.found[n].Worth}}
	if p.better != nil {
		lists = append(lists, report.PlanList{Title: "a better list: " + said(p.better[n].Budget), Metres: p.list, Worth: p.better[n].Worth})
	}
	plot := report.PlanPlot(lists, report.DefaultStyle())
	write := map[string]func(io.Writer) error{".png": plot.WritePNG, ".svg": plot.WriteSVG}[strings.ToLower(filepath.Ext(path))]
	if write == nil {
		return usage(fmt.Errorf("--figure %s: neither .png nor .svg", path), "")
	}
	var b bytes.Buffer
	if err := write(&b); err != nil {
		return err
	}
	return createNew(path, func(w io.Writer) error { _, err := w.Write(b.Bytes()); return err })
}
