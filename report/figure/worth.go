package figure

import (
	"image/color"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Worth is what each distance of a list is worth: by which factor the ± of mix and of
// spacing grow without it.
type Worth struct {
	Style        Style
	M            []float64 // distances
	Mix, Spacing []float64 // factors, from 1; +Inf is drawn at the top
	Lo, Hi       float64   // of the axis of distances, m
	Top          float64   // of the axis of factors
	Title        string
	Note         []string
}

// MostWorth is where the axis of factors ends at the latest: what is worth more is at
// its end.
const MostWorth = 10

// Draw draws it.
func (w Worth) Draw(c draw.Canvas) { w.plot().Draw(c) }

func (w Worth) plot() *plot.Plot {
	s := w.Style
	p := frame(s)
	distanceAxis(p, w.Lo, w.Hi)
	p.X.Label.Text = "distance, mm"
	p.Y.Label.Text = "± without this distance, times"
	step, digits := steps(1, w.Top, 6)
	p.Y.Min, p.Y.Max = 1, w.Top
	p.Y.Tick.Marker = levelTicks{step, digits}
	p.Title.Text = w.Title
	p.Title.TextStyle = s.text(s.Text, true, s.Ink, float64(draw.XCenter), float64(draw.YTop))
	p.Title.Padding = vg.Points(4)
	p.Add(grid{s})
	// Side by side, so that none covers the other.
	const aside = 1.012
	for i := range min(len(w.M), len(w.Mix), len(w.Spacing)) {
		w.stem(p, w.M[i]/aside, w.Spacing[i], s.Near)
		w.stem(p, w.M[i]*aside, w.Mix[i], s.Far)
	}
	p.Add(note{s, w.Note})
	return p
}

func (w Worth) stem(p *plot.Plot, m, factor float64, colour color.Color) {
	v := math.Min(factor, w.Top)
	if math.IsNaN(v) {
		return
	}
	p.Add(curve{[]float64{m, m}, []float64{1, v}, stroke(colour, vg.Points(2.2))})
	p.Add(dots{[]float64{m}, []float64{v}, nil, colour, vg.Points(2.6)})
}
