package figure

import (
	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Series is one named line with the half-width of its band.
type Series struct {
	Label      string
	X, Y, Half []float64
}

// Responses are levels against frequency, one line for each distance, bands for
// their ±.
type Responses struct {
	Style Style
	Lines []Series
	Axis  string // what the level is
	// SmoothBelow is the frequency in Hz below which a gate leaves no detail; 0: none.
	SmoothBelow float64
}

// Draw draws it.
func (r Responses) Draw(c draw.Canvas) {
	// Names stand behind the ends of the lines.
	r.plot().Draw(draw.Crop(c, 0, -nameWidth, 0, 0))
}

// nameWidth is the room that names behind the lines take.
const nameWidth = vg.Length(46)

// Stack is one figure above another with their frames in line.
type Stack struct{ Upper, Lower Responses }

// Draw draws it.
func (k Stack) Draw(c draw.Canvas) {
	h := c.Max.Y - c.Min.Y
	top, bottom := draw.Crop(c, 0, -nameWidth, h*0.51, 0), draw.Crop(c, 0, -nameWidth, 0, -h*0.52)
	alignDraw([][]*plot.Plot{{k.Upper.plot()}, {k.Lower.plot()}}, []draw.Canvas{top, bottom})
}

func (r Responses) plot() *plot.Plot {
	s := r.Style
	p := frame(s)
	p.Add(smoothed{r.SmoothBelow, s}, grid{s})
	logFrequency(p, 20, 20000)
	p.Y.Label.Text = r.Axis
	span := newSpan()
	for i, l := range r.Lines {
		p.Add(band{l.X, l.Y, l.Half, pale(s.Ramp(i, len(r.Lines)), 0.72)})
		span.add(l.Y...)
	}
	var names []label
	for i, l := range r.Lines {
		colour := s.Ramp(i, len(r.Lines))
		p.Add(curve{l.X, l.Y, stroke(colour, s.Line)})
		if n := lastFinite(l.Y); n >= 0 {
			names = append(names, label{l.Label, l.X[n], l.Y[n], colour})
		}
	}
	if span.empty() {
		span.add(-10, 0)
	}
	if span.hi-span.lo > 90 {
		span.lo = span.hi - 90
	}
	levelAxis(p, span.lo-0.04*(span.hi-span.lo), span.hi)
	p.Add(labels{s, names, false}, smoothedName{r.SmoothBelow, s})
	return p
}

// smoothed shades what lies below a frequency.
type smoothed struct {
	below float64
	s     Style
}

func (m smoothed) Plot(c draw.Canvas, p *plot.Plot) {
	if !(m.below > p.X.Min) {
		return
	}
	x, _ := p.Transforms(&c)
	hi := min(x(m.below), c.Max.X)
	c.FillPolygon(m.s.Band, []vg.Point{{X: c.Min.X, Y: c.Min.Y}, {X: hi, Y: c.Min.Y}, {X: hi, Y: c.Max.Y}, {X: c.Min.X, Y: c.Max.Y}})
}

// smoothedName says why, above the grid.
type smoothedName smoothed

func (m smoothedName) Plot(c draw.Canvas, p *plot.Plot) {
	const text = "no detail below one over the gate"
	style := m.s.text(m.s.Small, false, m.s.Soft, float64(draw.XLeft), float64(draw.YBottom))
	if x, _ := p.Transforms(&c); !(m.below > p.X.Min) || x(m.below)-c.Min.X < style.Width(text) {
		return
	}
	c.FillText(style, vg.Point{X: c.Min.X + vg.Points(4), Y: c.Min.Y + vg.Points(3)}, text)
}

func lastFinite(y []float64) int {
	for i := len(y) - 1; i >= 0; i-- {
		if finite(y[i]) {
			return i
		}
	}
	return -1
}
