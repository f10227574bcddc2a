package figure

import (
	"math"

	xfont "golang.org/x/image/font"
	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"standoff/report/number"
)

const weightBold = xfont.WeightBold

// handler sets type by Liberation Sans; it is read only once made.
var handler = text.Plain{Fonts: font.NewCache(liberation.Collection())}

// frame is an empty plot in our look: no box, hairline grid, ticks of our own.
func frame(s Style) *plot.Plot {
	p := plot.New()
	p.BackgroundColor = nil
	p.TextHandler = handler
	for _, a := range []*plot.Axis{&p.X, &p.Y} {
		a.Padding = 0
		a.LineStyle = stroke(s.Ink, s.Hair)
		a.Tick.LineStyle = stroke(s.Ink, s.Hair)
		a.Tick.Length = vg.Points(3)
		a.Tick.Label = s.text(s.Text, false, s.Ink, float64(draw.XCenter), float64(draw.YCenter))
		a.Label.TextStyle = s.text(s.Text, false, s.Soft, float64(draw.XCenter), float64(draw.YCenter))
		a.Label.Padding = vg.Points(4)
	}
	p.X.Tick.Label.YAlign = draw.YTop
	p.X.Label.TextStyle.YAlign = draw.YBottom
	p.Y.Tick.Label.XAlign = draw.XRight
	p.Y.Label.TextStyle.YAlign = draw.YBottom
	return p
}

// logFrequency is an axis from lo to hi Hz with the numbers that people know.
func logFrequency(p *plot.Plot, lo, hi float64) {
	p.X.Scale = logScale{}
	p.X.Min, p.X.Max = lo, hi
	p.X.Tick.Marker = logTicks{label: func(f float64) string {
		if f >= 1000 {
			return number.Fixed(f/1000, 0) + "k"
		}
		return number.Fixed(f, 0)
	}, at: []float64{1, 2, 5}}
	p.X.Label.Text = "frequency, Hz"
}

// logScale maps a positive range; what lies outside is drawn at the edge, so that
// nothing a measurement can bring makes it fail.
type logScale struct{}

func (logScale) Normalize(lo, hi, x float64) float64 {
	return math.Log(math.Max(x, lo*1e-3)/lo) / math.Log(hi/lo)
}

// logTicks labels the numbers in at times powers of ten, and marks the others.
type logTicks struct {
	label func(float64) string
	at    []float64
}

func (t logTicks) Ticks(lo, hi float64) []plot.Tick {
	var out []plot.Tick
	for decade := math.Pow(10, math.Floor(math.Log10(lo))); decade <= hi; decade *= 10 {
		for n := 1.0; n < 10; n++ {
			v := n * decade
			if v < lo*0.9999 || v > hi*1.0001 {
				continue
			}
			tick := plot.Tick{Value: v}
			for _, a := range t.at {
				if a == n {
					tick.Label = t.label(v)
				}
			}
			out = append(out, tick)
		}
	}
	return out
}

// levelTicks are every step dB.
type levelTicks struct {
	step   float64
	digits int
}

func (t levelTicks) Ticks(lo, hi float64) []plot.Tick {
	var out []plot.Tick
	for v := math.Ceil(lo/t.step-1e-9) * t.step; v <= hi+1e-9*t.step; v += t.step {
		out = append(out, plot.Tick{Value: v, Label: number.Fixed(v, t.digits)})
	}
	return out
}

// levelAxis spans the values with a little air, and marks at most eight whole steps of
// 1, 2 or 5 in any decade.
func levelAxis(p *plot.Plot, lo, hi float64) {
	if !(hi > lo) {
		lo, hi = lo-1, lo+1
	}
	step, digits := steps(lo, hi, 8)
	air := 0.03 * (hi - lo)
	p.Y.Min, p.Y.Max = lo-air, hi+air
	p.Y.Tick.Marker = levelTicks{step, digits}
}

// steps is the least whole step that fits a number of times at most into a range, and
// the digits that it takes after the point.
func steps(lo, hi, most float64) (step float64, digits int) {
	for _, decade := range []float64{1e-3, 1e-2, 1e-1, 1, 10, 100, 1e3, 1e4, 1e5} {
		for _, n := range []float64{1, 2, 5} {
			if step = n * decade; (hi-lo)/step <= most {
				return step, max(0, -int(math.Floor(math.Log10(step)+1e-9)))
			}
		}
	}
	return step, 0
}

// grid draws hairlines at every labelled tick.
type grid struct{ s Style }

func (g grid) Plot(c draw.Canvas, p *plot.Plot) {
	x, y := p.Transforms(&c)
	line := stroke(g.s.Grid, g.s.Hair)
	for _, t := range p.X.Tick.Marker.Ticks(p.X.Min, p.X.Max) {
		if t.Label != "" {
			c.StrokeLine2(line, x(t.Value), c.Min.Y, x(t.Value), c.Max.Y)
		}
	}
	for _, t := range p.Y.Tick.Marker.Ticks(p.Y.Min, p.Y.Max) {
		if t.Label != "" {
			c.StrokeLine2(line, c.Min.X, y(t.Value), c.Max.X, y(t.Value))
		}
	}
}

// span is the range of all plausible values: no level, distance or time is beyond
// absurd, and an axis that long would have no end of ticks.
type span struct{ lo, hi float64 }

const absurd = 1e5

func newSpan() span { return span{math.Inf(1), math.Inf(-1)} }

func (s *span) add(values ...float64) {
	for _, v := range values {
		if math.Abs(v) < absurd {
			s.lo, s.hi = math.Min(s.lo, v), math.Max(s.hi, v)
		}
	}
}

func (s span) empty() bool { return s.lo > s.hi }
