package report

import (
	"image/color"
	"image/png"
	"io"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgsvg"

	"standoff/fit"
	"standoff/report/figure"
)

// Plot is a figure of the pages as a file of its own.
type Plot struct {
	Name          string // of the file, without its ending
	figure        figure.Figure
	width, height vg.Length
}

// Plots are all figures.
func Plots(d *Data, s Style) ([]Plot, error) {
	absolute, relative := responseSeries(d)
	beta, expanded, known := mixOf(d)
	impulses := figure.Impulses{Style: s.Figure}
	for _, m := range d.Impulses {
		impulses.Lines = append(impulses.Lines, figure.Series{Label: m.Label, X: m.Seconds, Y: m.Value})
		impulses.GateFrom, impulses.GateTo = m.GateFrom, m.GateTo
	}
	octaves, left := octavesFigure(d, s)
	octaves.Note = partsNote(d, octavesCoverage(d.Result), left)
	alone := aloneFigure(d, s)
	alone.Note = partsNote(d, aloneCoverage(d.Result), 0)
	mix, spacing := mixProfile(d, s), spacingProfile(d, s)
	mix.Axis += ": " + covered(d.Result.Capsule.GradientFraction, 1, "")
	spacing.Axis += ": " + covered(d.Result.Capsule.PortSpacing, 1000, "mm")
	const w = 500
	return []Plot{
		{"rise", figure.Rise{Style: s.Figure, Curves: riseCurves(d), Residuals: true}, w, 560},
		{"responses", absoluteFigure(d, s, absolute), w, 320},
		{"relative", relativeFigure(s, relative), w, 320},
		{"distance", figure.Levels{Style: s.Figure, Curves: levelCurves(d)}, w, 380},
		{"pattern", figure.Polar{Style: s.Figure, Beta: beta, Expanded: expanded, Known: known}, w, w},
		{"impulses", impulses, w, 440},
		{"alone", alone, w, 240},
		{"profile-mix", mix, w, 300},
		{"profile-spacing", spacing, w, 300},
		{"octaves", octaves, w, 240},
	}, nil
}

func levelCurves(d *Data) []fit.LevelCurve {
	if d.Curves == nil {
		return nil
	}
	return d.Curves.Levels
}

// edge of white around a figure, points.
const edge = 14

func (p Plot) draw(c draw.Canvas) {
	c.SetColor(color.White)
	c.Fill(c.Rectangle.Path())
	p.figure.Draw(draw.Crop(c, edge, -edge, edge, -edge))
}

// WritePNG writes it at 192 dots per inch, twice what screens were made for.
func (p Plot) WritePNG(w io.Writer) error {
	c := vgimg.NewWith(vgimg.UseWH(p.width, p.height), vgimg.UseDPI(192), vgimg.UseBackgroundColor(color.White))
	p.draw(draw.New(c))
	return png.Encode(w, c.Image())
}

// WriteSVG writes it as vectors with its text as text.
func (p Plot) WriteSVG(w io.Writer) error {
	c := vgsvg.New(p.width, p.height)
	p.draw(draw.New(c))
	_, err := c.WriteTo(w)
	return err
}
