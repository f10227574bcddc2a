package figure

import (
	"math"

	"standoff/fit"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Rise is the rise of each distance against frequency: measured points, fitted
// lines, and below, where Residuals is set, what is left between them.
type Rise struct {
	Style     Style
	Curves    []fit.RiseCurve
	Residuals bool
	Small     bool // a figure beside others: lines only, few names
}

// Draw draws it.
func (r Rise) Draw(c draw.Canvas) {
	if !r.Residuals {
		r.upper().Draw(c)
		return
	}
	h := c.Max.Y - c.Min.Y
	plots := [][]*plot.Plot{{r.upper()}, {r.lower()}}
	top := draw.Crop(c, 0, 0, h*0.34, 0)
	bottom := draw.Crop(c, 0, 0, 0, -h*0.69)
	alignDraw(plots, []draw.Canvas{top, bottom})
}

// alignDraw draws plots one above the other with their frames in line.
func alignDraw(plots [][]*plot.Plot, on []draw.Canvas) {
	widest := vg.Length(0)
	for _, row := range plots {
		box := row[0].DataCanvas(on[0])
		widest = max(widest, box.Min.X-on[0].Min.X)
	}
	for i, row := range plots {
		box := row[0].DataCanvas(on[i])
		row[0].Draw(draw.Crop(on[i], widest-(box.Min.X-on[i].Min.X), 0, 0, 0))
	}
}

// bandOf is where measured points lie, Hz.
func (r Rise) bandOf() (lo, hi float64) {
	s := newSpan()
	for _, c := range r.Curves {
		s.add(c.Hz...)
	}
	if s.empty() {
		return 50, 5000
	}
	return s.lo, s.hi
}

// nameRoom is the ratio of frequencies that the names before the lines take up.
func (r Rise) nameRoom() float64 {
	if r.Small {
		return 2.6
	}
	return 2.0
}

// end is the round frequency at which the last line has ended: a line stops well
// before the null of the far response, and so does the axis.
func (r Rise) end() float64 {
	last := newSpan()
	for _, c := range r.Curves {
		last.add(c.LineHz...)
		last.add(c.Hz...)
	}
	for _, f := range []float64{1000, 2000, 5000, 10000} {
		if last.hi <= f {
			return f
		}
	}
	return 20000
}

func (r Rise) upper() *plot.Plot {
	s := r.Style
	p := frame(s)
	p.Add(grid{s})
	lo, _ := r.bandOf()
	from := math.Max(20, lo/1.6)
	logFrequency(p, from/r.nameRoom(), r.end())
	p.Y.Label.Text = "rise, dB"
	var names []label
	span := newSpan()
	span.add(-1, 3)
	for i, c := range r.Curves {
		colour := s.Ramp(i, len(r.Curves))
		x, y := after(c.LineHz, c.LineDB, from)
		p.Add(curve{x, y, stroke(colour, s.Line)})
		if !r.Small {
			p.Add(dots{c.Hz, c.DB, c.Expanded, colour, vg.Points(1.5)})
			p.Add(cornerMark{c.Corner, from, stroke(colour, vg.Points(1.2))})
			span.add(c.DB...)
		}
		span.add(y...)
		if len(x) > 0 && (!r.Small || keepName(i, len(r.Curves))) {
			names = append(names, label{c.Label, x[0], y[0], colour})
		}
	}
	levelAxis(p, span.lo, span.hi)
	p.Add(labels{s, names, true})
	if !r.Small {
		p.Add(note{s, []string{"points: measured, with ± (k = 2)", "lines: fitted", "| corner of each line, +3 dB"}})
	}
	return p
}

// keepName leaves a small figure four names at most.
func keepName(i, n int) bool { return n <= 4 || i == 0 || i == n-1 || i == n/3 || i == 2*n/3 }

// after is a line from a frequency on.
func after(hz, db []float64, from float64) (x, y []float64) {
	for i, f := range hz {
		if f >= from && i < len(db) {
			x, y = append(x, f), append(y, db[i])
		}
	}
	return x, y
}

// cornerMark is a short upright at +3 dB.
type cornerMark struct {
	hz, from float64 // from is where the lines begin
	style    draw.LineStyle
}

func (m cornerMark) Plot(c draw.Canvas, p *plot.Plot) {
	if m.hz < m.from || m.hz >= p.X.Max {
		return
	}
	x, y := p.Transforms(&c)
	at := y(3.0103)
	c.StrokeLine2(m.style, x(m.hz), at-vg.Points(3.5), x(m.hz), at+vg.Points(3.5))
}

func (r Rise) lower() *plot.Plot {
	s := r.Style
	p := frame(s)
	var half []float64
	span := newSpan()
	for _, c := range r.Curves {
		half = append(half, c.Expanded...)
		span.add(c.Residual...)
	}
	typical := medianOf(half)
	reach := 1.3 * math.Max(math.Max(math.Abs(span.lo), math.Abs(span.hi)), math.Max(typical, 0.004))
	if span.empty() {
		reach = 1
	}
	p.Add(flatBand{half: typical, s: s})
	p.Add(grid{s})
	lo, _ := r.bandOf()
	logFrequency(p, math.Max(20, lo/1.6)/r.nameRoom(), r.end())
	p.Y.Label.Text = "measured − fitted, dB"
	for i, c := range r.Curves {
		colour := s.Ramp(i, len(r.Curves))
		p.Add(curve{c.Hz, c.Residual, stroke(colour, vg.Points(0.6))})
		p.Add(dots{c.Hz, c.Residual, nil, colour, vg.Points(1.2)})
	}
	levelAxis(p, -reach, reach)
	p.Add(note{s, []string{"band: the median ± of a point"}})
	return p
}

func medianOf(x []float64) float64 {
	var s []float64
	for _, v := range x {
		if finite(v) {
			s = append(s, v)
		}
	}
	if len(s) == 0 {
		return 0
	}
	sortFloats(s)
	return s[len(s)/2]
}

// flatBand is at ± half across the frame, with a line in its middle.
type flatBand struct {
	at, half float64
	s        Style
}

func (b flatBand) Plot(c draw.Canvas, p *plot.Plot) {
	_, y := p.Transforms(&c)
	lo, hi := max(y(b.at-b.half), c.Min.Y), min(y(b.at+b.half), c.Max.Y)
	c.FillPolygon(b.s.Band, []vg.Point{{X: c.Min.X, Y: lo}, {X: c.Max.X, Y: lo}, {X: c.Max.X, Y: hi}, {X: c.Min.X, Y: hi}})
	c.StrokeLine2(stroke(b.s.Soft, b.s.Hair), c.Min.X, y(b.at), c.Max.X, y(b.at))
}
