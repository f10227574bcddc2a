package report

import (
	"math"

	"standoff/fit"
	"standoff/report/figure"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// PlanList is a list of distances with what is expected of it.
type PlanList struct {
	Title  string
	Metres []float64
	Worth  []fit.Worth
}

// PlanPlot shows lists of distances under each other, and what each distance is worth.
func PlanPlot(lists []PlanList, s Style) Plot {
	f := planFigure{}
	lo, hi, top := math.Inf(1), 0.0, 1.5
	for _, l := range lists {
		for _, v := range l.Worth {
			top = math.Max(top, math.Min(1.06*math.Max(v.GradientFraction, v.PortSpacing), figure.MostWorth))
		}
		for _, m := range l.Metres {
			lo, hi = math.Min(lo, m), math.Max(hi, m)
		}
	}
	for i, l := range lists {
		w := figure.Worth{Style: s.Figure, M: l.Metres, Title: l.Title, Lo: lo / 1.15, Hi: hi * 1.15, Top: top}
		for _, v := range l.Worth {
			w.Mix, w.Spacing = append(w.Mix, v.GradientFraction), append(w.Spacing, v.PortSpacing)
		}
		if i == 0 {
			w.Note = []string{"dark, left: port spacing", "light, right: mix"}
			if top == figure.MostWorth {
				w.Note = append(w.Note, "at the top: there or more")
			}
		}
		f.rows = append(f.rows, w)
	}
	return Plot{"plan", f, 500, planHeight * vg.Length(len(lists))}
}

// A list's height, and what is left free under it, points.
const (
	planHeight = 200
	gap        = 10
)

// planFigure stacks figures.
type planFigure struct{ rows []figure.Worth }

// Draw draws them from the top.
func (f planFigure) Draw(c draw.Canvas) {
	height := (c.Max.Y - c.Min.Y) / vg.Length(max(len(f.rows), 1))
	for i, row := range f.rows {
		part := draw.Crop(c, 0, 0, vg.Length(len(f.rows)-1-i)*height+gap, -vg.Length(i)*height)
		row.Draw(part)
	}
}
