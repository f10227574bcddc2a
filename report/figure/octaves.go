package figure

import (
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Octaves is the mix that each octave gives by itself, beside that of all together
// with the band of its ±. Octaves whose mix is not resolved are not in it.
type Octaves struct {
	Style           Style
	From, To        []float64 // Hz
	Value, Expanded []float64 // mix of the octave and its ±
	Beta, Half      float64   // mix of all and its ±
	Known           bool      // false: there is no mix of all
	Note            []string  // what points and band are, in a corner
}

// Draw draws it.
func (o Octaves) Draw(c draw.Canvas) { o.plot().Draw(c) }

func (o Octaves) plot() *plot.Plot {
	s := o.Style
	p := frame(s)
	x := newSpan()
	for i := range min(len(o.From), len(o.To)) {
		if o.From[i] > 0 {
			x.add(o.From[i], o.To[i])
		}
	}
	// No less than two octaves, or the axis has no number to it.
	if x.empty() {
		x.add(50, 5000)
	}
	if x.hi < 4*x.lo {
		middle := math.Sqrt(x.lo * x.hi)
		x.add(middle/2, 2*middle)
	}
	mixAxis(p, s, o.Value, o.Expanded, o.Beta, o.Half, o.Known, len(o.Note))
	p.Add(grid{s})
	logFrequency(p, math.Max(x.lo/1.12, 10), math.Min(math.Max(x.hi*1.12, 40), 50e3))
	for i := range min(len(o.From), len(o.To), len(o.Value), len(o.Expanded)) {
		centre := []float64{math.Sqrt(o.From[i] * o.To[i])}
		p.Add(curve{[]float64{o.From[i], o.To[i]}, []float64{o.Value[i], o.Value[i]}, stroke(s.Near, vg.Points(0.8))})
		p.Add(dots{centre, o.Value[i : i+1], o.Expanded[i : i+1], s.Near, vg.Points(2)})
	}
	p.Add(note{s, o.Note})
	return p
}
