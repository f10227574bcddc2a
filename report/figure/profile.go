package figure

import (
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"standoff/report/number"
)

// Profile is how much worse a fit becomes when one number is held elsewhere and all
// others are fitted again: the profile likelihood.
type Profile struct {
	Style         Style
	Value, Excess []float64 // Excess: 1 is one standard uncertainty squared
	Axis          string    // what the number is, with its unit
	At, Half      float64   // the value reported and its ±
	Known         bool      // false: it is not resolved
	Limit         float64   // one-sided 95 % limit where it is not resolved; NaN for none
	Note          []string  // at the top
}

// The 95 % points of chi-square for one number, two-sided and, for a limit, one-sided.
const (
	TwoSided = 3.84
	OneSided = 2.71
)

// profileTop is where the frame ends: a curve that has left it has said enough.
const profileTop = 8.0

// Interval is where a profile has risen to a level on either side of its least, −∞
// and +∞ where it never does; NaN without points.
func Interval(value, excess []float64, level float64) (lo, hi float64) {
	v, e := plausible(value, excess)
	if len(v) == 0 {
		return math.NaN(), math.NaN()
	}
	least := 0
	for i := range e {
		if e[i] < e[least] {
			least = i
		}
	}
	side := func(step int) float64 {
		for i := least + step; i >= 0 && i < len(v); i += step {
			if e[i] >= level && e[i-step] <= level {
				// The root of the excess is linear near its least.
				a, b := math.Sqrt(e[i-step]), math.Sqrt(e[i])
				return v[i-step] + (v[i]-v[i-step])*(math.Sqrt(level)-a)/math.Max(b-a, 1e-300)
			}
		}
		return math.Inf(step)
	}
	return side(-1), side(1)
}

// plausible are the points that can be drawn; an excess is not below nothing.
func plausible(value, excess []float64) (v, e []float64) {
	for i := range min(len(value), len(excess)) {
		if math.Abs(value[i]) < absurd && finite(excess[i]) {
			v, e = append(v, value[i]), append(e, math.Max(excess[i], 0))
		}
	}
	return v, e
}

// Draw draws it.
func (f Profile) Draw(c draw.Canvas) {
	// The numbers at both ends of the axis reach over it.
	f.plot().Draw(draw.Crop(c, 0, -vg.Points(8), 0, 0))
}

func (f Profile) plot() *plot.Plot {
	s := f.Style
	p := frame(s)
	v, e := plausible(f.Value, f.Excess)
	f.axes(p, v, e)
	if f.Known && finite(f.At) && finite(f.Half) {
		p.Add(standingBand{f.At, f.Half, s})
	}
	p.Add(grid{s})
	// Names stand where the curve is low.
	left := len(e) > 0 && e[0] < e[len(e)-1]
	lines := []levelLine{{TwoSided, "95 %", false, left, s}}
	if !f.Known && finite(f.Limit) {
		lines = append(lines, levelLine{OneSided, "95 %, one-sided", true, left, s})
		p.Add(upright{f.Limit, stroke(s.Accent, vg.Points(0.8))})
	}
	for _, l := range lines {
		p.Add(l)
	}
	p.Add(curve{between(v), squares(between(roots(e))), stroke(s.Near, s.Line)})
	p.Add(dots{v, e, nil, s.Near, vg.Points(1.3)})
	p.Add(middleNote{s, f.Note})
	return p
}

// axes show the curve up to the frame's top, and the ± that is reported.
func (f Profile) axes(p *plot.Plot, v, e []float64) {
	x := newSpan()
	lo, hi := Interval(v, e, profileTop)
	for i := range v {
		if v[i] >= lo && v[i] <= hi {
			x.add(v[i])
		}
	}
	x.add(lo, hi)
	if f.Known {
		x.add(f.At-f.Half, f.At+f.Half)
	} else {
		x.add(f.Limit)
	}
	if x.empty() {
		x.add(0, 1)
	}
	p.X.Label.Text, p.Y.Label.Text = f.Axis, "misfit above the least"
	p.Y.Min, p.Y.Max = 0, profileTop
	p.Y.Tick.Marker = levelTicks{2, 0}
	if x.lo > 0 && x.hi > 6*x.lo {
		p.X.Scale = logScale{}
		p.X.Min, p.X.Max = x.lo/1.05, x.hi*1.05
		p.X.Tick.Marker = logTicks{label: plainNumber, at: marks(x)}
		return
	}
	if width := math.Max(1e-3*math.Max(math.Abs(x.lo), math.Abs(x.hi)), 1e-3); x.hi-x.lo < width {
		x.add(x.lo-width, x.hi+width)
	}
	step, digits := steps(x.lo, x.hi, 5)
	air := 0.03 * (x.hi - x.lo)
	p.X.Min, p.X.Max = x.lo-air, x.hi+air
	p.X.Tick.Marker = levelTicks{step, digits}
}

// marks are the numbers of a decade that an axis names: fewer on a longer one.
func marks(x span) []float64 {
	if x.hi > 200*x.lo {
		return []float64{1}
	}
	return []float64{1, 2, 5}
}

func plainNumber(v float64) string {
	return number.Fixed(v, max(0, -int(math.Floor(math.Log10(v)+1e-9))))
}

// between puts seven points between any two.
func between(x []float64) (out []float64) {
	const parts = 8
	for i := range x {
		for k := 0; i > 0 && k < parts; k++ {
			t := float64(k) / parts
			out = append(out, x[i-1]*(1-t)+x[i]*t)
		}
	}
	if len(x) > 0 {
		out = append(out, x[len(x)-1])
	}
	return out
}

func roots(x []float64) []float64   { return each(x, math.Sqrt) }
func squares(x []float64) []float64 { return each(x, func(v float64) float64 { return v * v }) }

func each(x []float64, f func(float64) float64) []float64 {
	out := make([]float64, len(x))
	for i, v := range x {
		out[i] = f(v)
	}
	return out
}

// middleNote is a note at the top in the middle, where a cup is open.
type middleNote note

func (n middleNote) Plot(c draw.Canvas, _ *plot.Plot) {
	style := n.s.text(n.s.Small, false, n.s.Soft, float64(draw.XCenter), float64(draw.YTop))
	for i, line := range n.lines {
		c.FillText(style, vg.Point{X: (c.Min.X + c.Max.X) / 2, Y: c.Max.Y - vg.Points(3) - vg.Length(i)*n.s.Small*1.25}, line)
	}
}

// standingBand is at ± half from bottom to top, with a line in its middle.
type standingBand struct {
	at, half float64
	s        Style
}

func (b standingBand) Plot(c draw.Canvas, p *plot.Plot) {
	x, _ := p.Transforms(&c)
	clip := func(v float64) vg.Length { return min(max(x(v), c.Min.X), c.Max.X) }
	lo, hi := clip(b.at-b.half), clip(b.at+b.half)
	c.FillPolygon(b.s.Band, []vg.Point{{X: lo, Y: c.Min.Y}, {X: lo, Y: c.Max.Y}, {X: hi, Y: c.Max.Y}, {X: hi, Y: c.Min.Y}})
	upright{b.at, stroke(b.s.Soft, b.s.Hair)}.Plot(c, p)
}

// levelLine is a dashed line with its name at one end, above or below it.
type levelLine struct {
	at    float64
	name  string
	below bool
	left  bool
	s     Style
}

func (l levelLine) Plot(c draw.Canvas, p *plot.Plot) {
	_, y := p.Transforms(&c)
	c.StrokeLine2(stroke(l.s.Accent, vg.Points(0.7), vg.Points(3), vg.Points(2)), c.Min.X, y(l.at), c.Max.X, y(l.at))
	gap, side := vg.Points(2), draw.YBottom
	if l.below {
		gap, side = -gap, draw.YTop
	}
	at, end := c.Max.X-vg.Points(2), draw.XRight
	if l.left {
		at, end = c.Min.X+vg.Points(4), draw.XLeft
	}
	style := l.s.text(l.s.Small, true, l.s.Accent, float64(end), float64(side))
	c.FillText(style, vg.Point{X: at, Y: y(l.at) + gap}, l.name)
}
