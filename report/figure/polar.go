package figure

import (
	"math"
	"slices"

	"standoff/fit"
	"standoff/report/number"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Polar is the pattern that a mix implies, far from walls and sources, with the
// band of its ±. The radius is 30 dB.
type Polar struct {
	Style          Style
	Beta, Expanded float64
	Known          bool // false: no mix, the axes alone
	Small          bool
}

// radiusDB is what the radius spans. IEC 60263 has 25, 50 or, in its newer edition,
// other multiples; 30 dB show the lobes of every first-order pattern.
const radiusDB = 30.0

// Draw draws it.
func (p Polar) Draw(c draw.Canvas) {
	s := p.Style
	centre := vg.Point{X: (c.Min.X + c.Max.X) / 2, Y: (c.Min.Y + c.Max.Y) / 2}
	radius := min(c.Max.X-c.Min.X, c.Max.Y-c.Min.Y)/2 - s.Text*2
	p.axes(c, centre, radius)
	if !p.Known {
		return
	}
	if p.Expanded > 0 && !p.Small {
		p.band(c, centre, radius)
	}
	var line []vg.Point
	for a := 0; a <= 720; a++ {
		theta := float64(a) * math.Pi / 360
		line = append(line, p.place(centre, radius, theta, math.Abs(fit.LevelAtAngle(p.Beta, theta))))
	}
	c.StrokeLines(stroke(s.Near, s.Line*1.3), line)
	if !p.Small {
		p.null(c, centre, radius)
	}
}

// null marks the angle at which nothing is heard, on both sides, where there is one.
func (p Polar) null(c draw.Canvas, centre vg.Point, radius vg.Length) {
	s := p.Style
	angle, ok := fit.NullAngle(p.Beta)
	if !ok {
		return
	}
	sin, cos := math.Sincos(angle)
	dash := stroke(s.Accent, vg.Points(0.7), vg.Points(3), vg.Points(2))
	for _, side := range []vg.Length{-1, 1} {
		c.StrokeLine2(dash, centre.X, centre.Y, centre.X+side*radius*vg.Length(sin), centre.Y+radius*vg.Length(cos))
	}
	at := 0.78 * radius
	style := s.text(s.Small, true, s.Accent, float64(draw.XLeft), float64(draw.YBottom))
	place := vg.Point{X: centre.X + at*vg.Length(sin) + vg.Points(4), Y: centre.Y + at*vg.Length(cos) + vg.Points(3)}
	c.FillText(style, place, "null "+number.Fixed(angle*180/math.Pi, 0)+"°")
}

// place is the point for a level at an angle; 0° is up.
func (Polar) place(centre vg.Point, radius vg.Length, theta, level float64) vg.Point {
	r := 1 + 20*math.Log10(math.Max(level, 1e-9))/radiusDB
	r = math.Max(math.Min(r, 1.2), 0)
	sin, cos := math.Sincos(theta)
	return vg.Point{X: centre.X - radius*vg.Length(r*sin), Y: centre.Y + radius*vg.Length(r*cos)}
}

func (p Polar) band(c draw.Canvas, centre vg.Point, radius vg.Length) {
	var outer, inner []vg.Point
	for a := 0; a <= 720; a++ {
		theta := float64(a) * math.Pi / 360
		lo, hi := math.Inf(1), 0.0
		for _, t := range []float64{-1, -0.5, 0, 0.5, 1} {
			beta := math.Min(math.Max(p.Beta+t*p.Expanded, 0), 1)
			v := math.Abs(fit.LevelAtAngle(beta, theta))
			lo, hi = math.Min(lo, v), math.Max(hi, v)
		}
		outer = append(outer, p.place(centre, radius, theta, hi))
		inner = append(inner, p.place(centre, radius, theta, lo))
	}
	// One area, not one for each angle: seams between areas show on screens.
	slices.Reverse(inner)
	c.FillPolygon(pale(p.Style.Near, 0.75), append(outer, inner...))
}

func (p Polar) axes(c draw.Canvas, centre vg.Point, radius vg.Length) {
	s := p.Style
	for dB := 0.0; dB > -radiusDB; dB -= 10 {
		r := radius * vg.Length(1+dB/radiusDB)
		var circle vg.Path
		circle.Move(vg.Point{X: centre.X + r, Y: centre.Y})
		circle.Arc(centre, r, 0, 2*math.Pi)
		c.SetLineStyle(stroke(s.Grid, s.Hair))
		if dB == 0 {
			c.SetLineStyle(stroke(s.Soft, s.Hair))
		}
		c.Stroke(circle)
		if dB == 0 {
			continue // the pattern itself stands there
		}
		style := s.text(s.Small, false, s.Soft, float64(draw.XLeft), float64(draw.YCenter))
		sin, cos := math.Sincos(11 * math.Pi / 180)
		c.FillText(style, vg.Point{X: centre.X + r*vg.Length(sin), Y: centre.Y + r*vg.Length(cos) - s.Small*0.7}, number.Fixed(dB, 0)+" dB")
	}
	step := 30
	if p.Small {
		step = 45
	}
	for a := 0; a < 360; a += step {
		theta := float64(a) * math.Pi / 180
		sin, cos := math.Sincos(theta)
		edge := vg.Point{X: centre.X - radius*vg.Length(sin), Y: centre.Y + radius*vg.Length(cos)}
		c.StrokeLine2(stroke(s.Grid, s.Hair), centre.X, centre.Y, edge.X, edge.Y)
		style := s.text(s.Small, false, s.Soft, float64(draw.XCenter), float64(draw.YCenter))
		out := radius + s.Text*1.2
		shown := a
		if a > 180 {
			shown = 360 - a
		}
		c.FillText(style, vg.Point{X: centre.X - out*vg.Length(sin), Y: centre.Y + out*vg.Length(cos)}, number.Fixed(float64(shown), 0)+"°")
	}
}
