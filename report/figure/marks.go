package figure

import (
	"image/color"
	"math"
	"slices"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// curve is a line through points, broken where a value is no number, and thinned
// to what a page can show.
type curve struct {
	x, y  []float64
	style draw.LineStyle
}

func (l curve) Plot(c draw.Canvas, p *plot.Plot) {
	x, y := p.Transforms(&c)
	var run []vg.Point
	flush := func() {
		if len(run) > 1 {
			c.StrokeLines(l.style, c.ClipLinesXY(run)...)
		}
		run = nil
	}
	for i := range min(len(l.x), len(l.y)) {
		if !finite(l.x[i]) || !finite(l.y[i]) {
			flush()
			continue
		}
		pt := vg.Point{X: x(l.x[i]), Y: y(l.y[i])}
		if n := len(run); n > 0 && i+1 < len(l.x) && near(run[n-1], pt, vg.Points(0.25)) {
			continue
		}
		run = append(run, pt)
	}
	flush()
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }

func near(a, b vg.Point, by vg.Length) bool {
	return math.Abs(float64(a.X-b.X)) < float64(by) && math.Abs(float64(a.Y-b.Y)) < float64(by)
}

// band is the area between y − half and y + half.
type band struct {
	x, y, half []float64
	colour     color.Color
}

func (b band) Plot(c draw.Canvas, p *plot.Plot) {
	x, y := p.Transforms(&c)
	var up, down []vg.Point
	flush := func() {
		if len(up) > 1 {
			slices.Reverse(down)
			c.FillPolygon(b.colour, c.ClipPolygonXY(append(up, down...)))
		}
		up, down = nil, nil
	}
	for i := range min(len(b.x), len(b.y), len(b.half)) {
		if !finite(b.x[i]) || !finite(b.y[i]) || !finite(b.half[i]) {
			flush()
			continue
		}
		pt := vg.Point{X: x(b.x[i]), Y: y(b.y[i] + b.half[i])}
		if n := len(up); n > 0 && near(up[n-1], pt, vg.Points(0.4)) {
			continue
		}
		up = append(up, pt)
		down = append(down, vg.Point{X: x(b.x[i]), Y: y(b.y[i] - b.half[i])})
	}
	flush()
}

// dots are measured points with bars for their ±.
type dots struct {
	x, y, half []float64
	colour     color.Color
	radius     vg.Length
}

func (d dots) Plot(c draw.Canvas, p *plot.Plot) {
	x, y := p.Transforms(&c)
	bar := stroke(d.colour, vg.Points(0.6))
	for i := range min(len(d.x), len(d.y)) {
		if !finite(d.x[i]) || !finite(d.y[i]) {
			continue
		}
		pt := vg.Point{X: x(d.x[i]), Y: y(d.y[i])}
		if !c.Contains(pt) {
			continue
		}
		if i < len(d.half) && finite(d.half[i]) {
			ends := []vg.Point{{X: pt.X, Y: y(d.y[i] - d.half[i])}, {X: pt.X, Y: y(d.y[i] + d.half[i])}}
			c.StrokeLines(bar, c.ClipLinesXY(ends)...)
		}
		c.DrawGlyph(draw.GlyphStyle{Color: d.colour, Radius: d.radius, Shape: draw.CircleGlyph{}}, pt)
	}
}

// label is a name at a place of the plot.
type label struct {
	text   string
	x, y   float64
	colour color.Color
}

// labels are names beside the ends of lines, moved apart so that none covers
// another; left puts them before the point, otherwise after it.
type labels struct {
	s    Style
	list []label
	left bool
}

func (l labels) Plot(c draw.Canvas, p *plot.Plot) {
	x, y := p.Transforms(&c)
	style := l.s.text(l.s.Small, true, nil, float64(draw.XLeft), float64(draw.YCenter))
	gap := vg.Points(5)
	if l.left {
		style.XAlign, gap = draw.XRight, -gap
	}
	places := make([]float64, len(l.list))
	for i, n := range l.list {
		places[i] = math.Min(math.Max(float64(y(n.y)), float64(c.Min.Y)), float64(c.Max.Y))
	}
	moved := spread(places, float64(l.s.Small)*1.15, float64(c.Min.Y), float64(c.Max.Y))
	for i, n := range l.list {
		at := vg.Point{X: x(n.x), Y: vg.Length(places[i])}
		to := vg.Point{X: at.X + gap, Y: vg.Length(moved[i])}
		if math.Abs(moved[i]-places[i]) > 3 {
			c.StrokeLine2(stroke(n.colour, l.s.Hair), at.X+gap/5, at.Y, to.X-gap/5, to.Y)
		}
		style.Color = readable(n.colour)
		blank(c, style, to, short(n.text))
		c.FillText(style, to, short(n.text))
	}
}

// blank takes the grid away from behind a text.
func blank(c draw.Canvas, style text.Style, at vg.Point, s string) {
	r := style.Rectangle(s).Add(at)
	c.FillPolygon(color.White, []vg.Point{r.Min, {X: r.Max.X, Y: r.Min.Y}, r.Max, {X: r.Min.X, Y: r.Max.Y}})
}

// longestName is what the room beside lines holds, in letters.
const longestName = 10

// short is a name that fits beside a line.
func short(name string) string {
	if r := []rune(name); len(r) > longestName {
		return string(r[:longestName-1]) + "…"
	}
	return name
}

// above are names that stand on their lines, at their beginning.
type above struct {
	s    Style
	list []label
}

func (a above) Plot(c draw.Canvas, p *plot.Plot) {
	x, y := p.Transforms(&c)
	style := a.s.text(a.s.Small, true, nil, float64(draw.XLeft), float64(draw.YBottom))
	for _, n := range a.list {
		style.Color = readable(n.colour)
		c.FillText(style, vg.Point{X: x(n.x), Y: y(n.y) + vg.Points(2)}, short(n.text))
	}
}

// spread moves places apart to at least gap, as little as it can, within lo to hi
// where there is room for all.
func spread(places []float64, gap, lo, hi float64) []float64 {
	order := make([]int, len(places))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case places[a] < places[b]:
			return -1
		case places[a] > places[b]:
			return 1
		}
		return 0
	})
	if n := float64(len(places) - 1); n*gap > hi-lo {
		gap = (hi - lo) / n
	}
	out := slices.Clone(places)
	for range 200 {
		moved := false
		for k := 1; k < len(order); k++ {
			a, b := order[k-1], order[k]
			if d := gap - (out[b] - out[a]); d > 1e-6 {
				out[a], out[b], moved = out[a]-d/2, out[b]+d/2, true
			}
		}
		for k, i := range order {
			out[i] = math.Max(out[i], lo+float64(k)*gap)
			out[i] = math.Min(out[i], hi-float64(len(order)-1-k)*gap)
		}
		if !moved {
			break
		}
	}
	return out
}

// note is a line of small type in a corner of the frame.
type note struct {
	s     Style
	lines []string
}

func (n note) Plot(c draw.Canvas, _ *plot.Plot) {
	style := n.s.text(n.s.Small, false, n.s.Soft, float64(draw.XRight), float64(draw.YTop))
	for i, line := range n.lines {
		at := vg.Point{X: c.Max.X - vg.Points(2), Y: c.Max.Y - vg.Points(2) - vg.Length(i)*n.s.Small*1.25}
		blank(c, style, at, line)
		c.FillText(style, at, line)
	}
}

// upright is a vertical line.
type upright struct {
	x     float64
	style draw.LineStyle
}

func (u upright) Plot(c draw.Canvas, p *plot.Plot) {
	if u.x < p.X.Min || u.x > p.X.Max {
		return
	}
	x, _ := p.Transforms(&c)
	c.StrokeLine2(u.style, x(u.x), c.Min.Y, x(u.x), c.Max.Y)
}

func sortFloats(x []float64) { slices.Sort(x) }
