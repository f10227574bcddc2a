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
}

// Draw draws it.
func (r Responses) Draw(c draw.Canvas) {
	// Names stand behind the ends of the lines.
	r.plot().Draw(draw.Crop(c, 0, -vg.Points(34), 0, 0))
}

func (r Responses) plot() *plot.Plot {
	s := r.Style
	p := frame(s)
	p.Add(grid{s})
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
	p.Add(labels{s, names, false})
	return p
}

func lastFinite(y []float64) int {
	for i := len(y) - 1; i >= 0; i-- {
		if finite(y[i]) {
			return i
		}
	}
	return -1
}
