package figure

import (
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"standoff/report/number"
)

// Alone is the mix that each distance gives by itself, beside that of all together
// with the band of its ±. Distances whose mix is not resolved are not in it.
type Alone struct {
	Style           Style
	M               []float64 // distance, m
	Value, Expanded []float64 // mix of the distance and its ±
	Beta, Half      float64   // mix of all and its ±
	Known           bool      // false: there is no mix of all
}

// leastSpan keeps the axis of a mix from showing differences that mean nothing.
const leastSpan = 0.01

// Draw draws it.
func (a Alone) Draw(c draw.Canvas) { a.plot().Draw(c) }

func (a Alone) plot() *plot.Plot {
	s := a.Style
	p := frame(s)
	x, y := newSpan(), newSpan()
	x.add(a.M...)
	for i := range min(len(a.Value), len(a.Expanded)) {
		y.add(a.Value[i]-a.Expanded[i], a.Value[i]+a.Expanded[i])
	}
	if a.Known {
		y.add(a.Beta-a.Half, a.Beta+a.Half)
		p.Add(flatBand{at: a.Beta, half: a.Half, s: s})
	}
	if x.empty() || y.empty() {
		x.add(0.03, 1)
		y.add(0, 1)
	}
	if middle := (y.hi + y.lo) / 2; y.hi-y.lo < leastSpan {
		y = span{middle - leastSpan/2, middle + leastSpan/2}
	}
	p.Add(grid{s})
	distanceAxis(p, math.Max(x.lo, 1e-3)/1.15, math.Max(x.hi, 1e-3)*1.15)
	p.X.Label.Text = "distance, mm"
	p.Y.Label.Text = "mix"
	levelAxis(p, y.lo, y.hi)
	for i := range min(len(a.M), len(a.Value), len(a.Expanded)) {
		colour := s.Ramp(i, len(a.M))
		p.Add(dots{a.M[i : i+1], a.Value[i : i+1], a.Expanded[i : i+1], colour, vg.Points(2)})
	}
	if a.Known {
		p.Add(note{s, []string{"points: each distance by itself, with ± (k = 2)", "band: all distances together, ± (k = 2)"}})
	}
	return p
}

// distanceAxis is logarithmic, in m with numbers in mm.
func distanceAxis(p *plot.Plot, lo, hi float64) {
	p.X.Scale = logScale{}
	p.X.Min, p.X.Max = lo, hi
	p.X.Tick.Marker = logTicks{label: func(m float64) string { return number.Fixed(1000*m, 0) }, at: []float64{1, 2, 3, 5, 7}}
}
