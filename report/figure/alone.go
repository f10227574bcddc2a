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
	Note            []string  // what points and band are, in a corner
}

// leastSpan keeps the axis of a mix from showing differences that mean nothing.
const leastSpan = 0.01

// Draw draws it.
func (a Alone) Draw(c draw.Canvas) { a.plot().Draw(c) }

func (a Alone) plot() *plot.Plot {
	s := a.Style
	p := frame(s)
	x := newSpan()
	x.add(a.M...)
	if x.empty() {
		x.add(0.03, 1)
	}
	mixAxis(p, s, a.Value, a.Expanded, a.Beta, a.Half, a.Known, len(a.Note))
	p.Add(grid{s})
	distanceAxis(p, math.Max(x.lo, 1e-3)/1.15, math.Max(x.hi, 1e-3)*1.15)
	p.X.Label.Text = "distance, mm"
	for i := range min(len(a.M), len(a.Value), len(a.Expanded)) {
		colour := s.Ramp(i, len(a.M))
		p.Add(dots{a.M[i : i+1], a.Value[i : i+1], a.Expanded[i : i+1], colour, vg.Points(2)})
	}
	p.Add(note{s, a.Note})
	return p
}

// mixAxis spans mixes with their ± and, where it is known, that of all with its band,
// which it draws, and leaves room above them for the lines of a note.
func mixAxis(p *plot.Plot, s Style, value, expanded []float64, beta, half float64, known bool, lines int) {
	y := newSpan()
	for i := range min(len(value), len(expanded)) {
		y.add(value[i]-expanded[i], value[i]+expanded[i])
	}
	if known {
		y.add(beta-half, beta+half)
		p.Add(flatBand{at: beta, half: half, s: s})
	}
	if y.empty() {
		y.add(0, 1)
	}
	if middle := (y.hi + y.lo) / 2; y.hi-y.lo < leastSpan {
		y = span{middle - leastSpan/2, middle + leastSpan/2}
	}
	p.Y.Label.Text = "mix"
	levelAxis(p, y.lo, y.hi+0.07*float64(lines)*(y.hi-y.lo))
}

// distanceAxis is logarithmic, in m with numbers in mm.
func distanceAxis(p *plot.Plot, lo, hi float64) {
	p.X.Scale = logScale{}
	p.X.Min, p.X.Max = lo, hi
	p.X.Tick.Marker = logTicks{label: func(m float64) string { return number.Fixed(1000*m, 0) }, at: []float64{1, 2, 3, 5, 7}}
}
