package main

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"standoff/fit"
	"standoff/measure"
	"standoff/measure/rig"
)

type planCmd struct {
	Rig      string  `arg:"" help:"The rig."`
	Pattern  string  `default:"claimed" help:"What to expect of the capsule: omni subcardioid cardioid supercardioid hypercardioid figure-8, claimed (what the rig says) or all."`
	Spacing  string  `default:"25mm" help:"Port spacing to expect, a length."`
	Nearest  string  `help:"Nearest distance that can be reached; the list's when left out."`
	Farthest string  `help:"Farthest distance that the room has; the list's when left out."`
	Gate     string  `help:"Gate to expect, a time; the rig's, or 5ms."`
	Clear    float64 `default:"80" placeholder:"DB" help:"Decibels over the noise to expect of a take at 100 mm, as run prints them after each take. With backend: virtual the rig says it."`
	LeftOver string  `default:"0.1%" help:"What to expect to be left over beside the noise, a percentage."`
	Figure   string  `placeholder:"FILE" help:"Write a figure: .svg or .png."`
	JSON     bool    `help:"Print the forecast as JSON."`
}

func (planCmd) Help() string {
	return `Tells what a list of distances will hold before anybody measures: the expected ± of mix and port spacing, what each distance is worth to them, what every source of doubt costs, and a better list of the same length. Nothing is played or recorded. What has to be assumed is printed.

The ± are expanded, k = 2, about 95 %. They leave out what only a measurement can tell: whether the model holds.

Example:

  standoff plan rig.yaml --nearest 25mm --farthest 80cm` + exits("  3    done, but a spacing that is asked for will not be resolved\n")
}

func (c *planCmd) Run(e *env) error {
	r, err := rig.Load(c.Rig)
	if err != nil {
		return err
	}
	p, err := c.prepare(r)
	if err != nil {
		return err
	}
	if err := p.forecast(); err != nil {
		return fmt.Errorf("%s: distances: %w", r.Path, err)
	}
	if c.Figure != "" {
		if err := p.writeFigure(c.Figure); err != nil {
			return err
		}
	}
	if c.JSON {
		err = e.json(p.asJSON())
	} else {
		p.print(e)
	}
	if err == nil && slices.ContainsFunc(p.found, func(f *fit.Forecast) bool { return !f.Resolved && f.Acoustics.Beta > 0 }) {
		return errLook
	}
	return err
}

// plan is a rig with what has to be assumed about it.
type plan struct {
	rig               *rig.Rig
	gate              measure.Gate
	gateSaid          string
	snr               float64 // dB over the noise at 100 mm
	leftOver          float64
	spacing           float64
	nearest, farthest float64
	patterns          []string
	data              *fit.Dataset
	found, better     []*fit.Forecast // one for each pattern
	list              []float64       // better distances
}

// prepare reads the options.
func (c *planCmd) prepare(r *rig.Rig) (*plan, error) {
	p := &plan{rig: r, snr: c.Clear}
	var err error
	if p.spacing, err = rig.Length(c.Spacing); err != nil || !(p.spacing > 0.001 && p.spacing < 0.2) {
		return nil, usage(fmt.Errorf("--spacing %s: not a length from 1mm to 200mm", c.Spacing), "write such as --spacing 27mm")
	}
	if p.leftOver, err = rig.Percentage(c.LeftOver); err != nil || !(p.leftOver >= 0 && p.leftOver < 0.3) {
		return nil, usage(fmt.Errorf("--left-over %s: not a percentage from 0%% to 30%%", c.LeftOver), "write such as --left-over 0.2%")
	}
	if !(c.Clear > 0 && c.Clear < 160) {
		return nil, usage(fmt.Errorf("--clear %g: not between 0 and 160 dB", c.Clear), "")
	}
	if err := p.limits(c); err != nil {
		return nil, err
	}
	if err := p.gateFor(c.Gate); err != nil {
		return nil, err
	}
	return p, p.choosePatterns(c.Pattern)
}

// limits of the better list.
func (p *plan) limits(c *planCmd) (err error) {
	p.nearest, p.farthest = math.Inf(1), 0
	for _, d := range p.rig.Distances {
		p.nearest, p.farthest = math.Min(p.nearest, d.Metres), math.Max(p.farthest, d.Metres)
	}
	for _, o := range []struct {
		flag, text string
		to         *float64
	}{{"--nearest", c.Nearest, &p.nearest}, {"--farthest", c.Farthest, &p.farthest}} {
		if o.text == "" {
			continue
		}
		if *o.to, err = rig.Length(o.text); err != nil || !(*o.to >= 0.001 && *o.to <= 20) {
			return usage(fmt.Errorf("%s %s: not a length from 1mm to 20m", o.flag, o.text), "write such as "+o.flag+" 25mm")
		}
	}
	if p.farthest < 2*p.nearest {
		return usage(fmt.Errorf("nearest %.0f mm, farthest %.0f mm: less than twice as far", 1e3*p.nearest, 1e3*p.farthest), "give --nearest and --farthest room")
	}
	return nil
}

func (p *plan) gateFor(text string) error {
	switch {
	case text != "":
		length, err := rig.Duration(text)
		if err != nil || !(length >= 0.001 && length <= 0.5) {
			return usage(fmt.Errorf("--gate %s: not a time from 1ms to 500ms", text), "write such as --gate 6ms")
		}
		p.gate, p.gateSaid = measure.FixedGate(length), "as asked for"
	case p.rig.Fit.Gate > 0:
		p.gate, p.gateSaid = measure.FixedGate(p.rig.Fit.Gate), "as the rig has it"
	case p.rig.Virtual != nil && p.rig.Audio.Backend == "virtual" && p.rig.Virtual.Room == nil:
		p.gate, p.gateSaid = measure.FixedGate(0.025), "without a room"
	default:
		p.gate, p.gateSaid = measure.FixedGate(0.005), "as in a usual room; --gate"
	}
	return nil
}

// mixes of the patterns.
var mixes = map[string]float64{"omni": 0, "subcardioid": 0.3, "cardioid": 0.5, "supercardioid": (3 - math.Sqrt2*math.Sqrt(1.5)) / 2, "hypercardioid": 0.75, "figure-8": 1}

func (p *plan) choosePatterns(asked string) error {
	switch {
	case asked == "claimed" && p.rig.Unit.Claimed != "":
		p.patterns = []string{p.rig.Unit.Claimed}
	case asked == "claimed" || asked == "all":
		p.patterns = rig.Patterns
	case slices.Contains(rig.Patterns, asked):
		p.patterns = []string{asked}
	default:
		return usage(fmt.Errorf("--pattern %s: there is no such pattern", asked), "one of "+strings.Join(rig.Patterns, " ")+", claimed or all")
	}
	return nil
}

// model that a pattern most likely has, within what the rig says.
func (p *plan) model(pattern string) fit.Model {
	m := fit.Model{Form: fit.PhaseShift, Body: fit.Sphere, Source: p.rig.Source.Kind}
	if p.rig.Capsule.Body != "auto" {
		m.Body = p.rig.Capsule.Body
	}
	if p.rig.Capsule.Model != "auto" {
		m.Form = p.rig.Capsule.Model
	}
	if mixes[pattern] < 0.1 {
		m.Form = fit.Summed
	}
	return m
}

func (p *plan) capsules() (out []fit.Capsule) {
	for _, name := range p.patterns {
		out = append(out, fit.Capsule{Model: p.model(name), Acoustics: fit.Acoustics{Beta: mixes[name], Spacing: p.spacing}})
	}
	return out
}

// forecast fills what is found, for the list as it is and for a better one.
func (p *plan) forecast() error {
	if err := p.dataset(); err != nil {
		return err
	}
	for _, c := range p.capsules() {
		f, err := p.data.Forecast(c.Model, c.Acoustics)
		if err != nil {
			return err
		}
		p.found = append(p.found, f)
	}
	var with []fit.Capsule
	for _, c := range p.capsules() {
		if c.Acoustics.Beta > 0 {
			with = append(with, c)
		}
	}
	p.list = p.data.Better(with, p.nearest, p.farthest)
	if p.list == nil {
		return nil
	}
	other := *p.data
	other.Points = slices.Clone(p.data.Points)
	for i := range other.Points {
		other.Points[i].Nominal, other.Points[i].Label = p.list[i], lengthLabel(p.list[i])
	}
	for _, c := range p.capsules() {
		f, err := other.Forecast(c.Model, c.Acoustics)
		if err != nil {
			p.list, p.better = nil, nil
			return nil
		}
		p.better = append(p.better, f)
	}
	return nil
}

// lengthLabel is a distance as a rig would have it.
func lengthLabel(m float64) string { return fmt.Sprintf("%gmm", math.Round(1e4*m)/10) }
