package figure

import (
	"math"

	"standoff/fit"
	"standoff/report/number"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Levels are levels against distance at some frequencies, beside the 1/r law of
// pressure.
type Levels struct {
	Style  Style
	Curves []fit.LevelCurve
}

// Draw draws it.
func (l Levels) Draw(c draw.Canvas) { l.plot().Draw(c) }

func (l Levels) plot() *plot.Plot {
	s := l.Style
	p := frame(s)
	p.Add(grid{s})
	x, y := newSpan(), newSpan()
	for _, c := range l.Curves {
		x.add(c.LineM...)
		y.add(c.LineDB...)
		y.add(c.DB...)
	}
	if x.empty() || y.empty() {
		x.add(0.03, 1)
		y.add(0, 30)
	}
	distanceAxis(p, x.lo/1.35, x.hi) // room for the names
	p.X.Label.Text = "distance to the capsule's centre, mm"
	p.Y.Label.Text = "level, dB re a far source at 1 m"
	levelAxis(p, y.lo, y.hi)
	var names []label
	for i, c := range l.Curves {
		// Low frequencies rise most: they get the near end of the ramp.
		colour := s.Ramp(i, len(l.Curves))
		if i == 0 {
			p.Add(curve{c.LineM, c.FreeFieldDB, stroke(s.Soft, vg.Points(0.8), vg.Points(3), vg.Points(2))})
		}
		p.Add(curve{c.LineM, c.LineDB, stroke(colour, s.Line)})
		p.Add(dots{c.M, c.DB, c.Expanded, colour, vg.Points(1.6)})
		if len(c.LineM) > 0 {
			at := 0
			names = append(names, label{number.Frequency(c.Hz), c.LineM[at], c.LineDB[at], colour})
		}
	}
	p.Add(labels{s, names, true})
	p.Add(note{s, []string{"points: measured, with ± (k = 2)", "lines: fitted", "dashes: the 1/r law of pressure"}})
	return p
}

// Impulses are impulse responses under each other on one axis of time, each to its
// own largest value, with the gate.
type Impulses struct {
	Style            Style
	Lines            []Series // X in s, Y within ±1
	GateFrom, GateTo float64  // s
}

// Draw draws it.
func (m Impulses) Draw(c draw.Canvas) {
	// The numbers at both ends of the axis reach over it.
	m.plot().Draw(draw.Crop(c, vg.Points(8), -vg.Points(8), 0, 0))
}

func (m Impulses) plot() *plot.Plot {
	s := m.Style
	p := frame(s)
	n := float64(max(len(m.Lines), 1))
	span := newSpan()
	for _, l := range m.Lines {
		if len(l.X) > 0 {
			span.add(1e3*l.X[0], 1e3*l.X[len(l.X)-1])
		}
	}
	if span.empty() {
		span.add(-2, 10)
	}
	p.X.Min, p.X.Max = span.lo, span.hi
	p.X.Label.Text = "time after the direct sound, ms"
	p.X.Tick.Marker = timeTicks{}
	p.Y.Min, p.Y.Max = -n+0.4, 0.75
	p.Y.Tick.Marker = noTicks{}
	p.Y.LineStyle.Width = 0
	p.Add(window{m, s})
	var names []label
	for i, l := range m.Lines {
		colour := s.Ramp(i, len(m.Lines))
		x, y := make([]float64, len(l.X)), make([]float64, len(l.Y))
		for k := range l.X {
			x[k] = 1e3 * l.X[k]
		}
		for k := range l.Y {
			y[k] = 0.62*l.Y[k] - float64(i)
		}
		p.Add(curve{[]float64{span.lo, span.hi}, []float64{-float64(i), -float64(i)}, stroke(s.Grid, s.Hair)})
		p.Add(curve{x, y, stroke(colour, vg.Points(0.8))})
		names = append(names, label{l.Label, span.lo, -float64(i), colour})
	}
	p.Add(above{s, names})
	return p
}

// window shades what the gate keeps.
type window struct {
	m Impulses
	s Style
}

func (w window) Plot(c draw.Canvas, p *plot.Plot) {
	x, _ := p.Transforms(&c)
	lo, hi := max(x(1e3*w.m.GateFrom), c.Min.X), min(x(1e3*w.m.GateTo), c.Max.X)
	if hi <= lo {
		return
	}
	c.FillPolygon(w.s.Band, []vg.Point{{X: lo, Y: c.Min.Y}, {X: hi, Y: c.Min.Y}, {X: hi, Y: c.Max.Y}, {X: lo, Y: c.Max.Y}})
	style := w.s.text(w.s.Small, false, w.s.Soft, float64(draw.XRight), float64(draw.YTop))
	c.FillText(style, vg.Point{X: hi - vg.Points(3), Y: c.Max.Y - vg.Points(2)}, "gate, closed at "+number.Time(w.m.GateTo))
}

type noTicks struct{}

func (noTicks) Ticks(float64, float64) []plot.Tick { return nil }

// timeTicks are whole ms, at most a dozen.
type timeTicks struct{}

func (timeTicks) Ticks(lo, hi float64) []plot.Tick {
	step := 1.0
	for (hi-lo)/step > 12 {
		step *= map[bool]float64{true: 2, false: 2.5}[math.Mod(math.Log10(step)+9, 1) < 0.1 || math.Mod(math.Log10(step)+9, 1) > 0.6]
	}
	return levelTicks{step, 0}.Ticks(lo, hi)
}
