// Package figure draws the figures of the pages, each in a file of its own, on any
// canvas of gonum/plot: in the PDF, as PNG and as SVG.
package figure

import (
	"image/color"
	"math"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Style is how figures look. It is passed, never global.
type Style struct {
	Ink, Soft, Grid, Band color.Color // text and axes, secondary text, grid lines, areas of doubt
	Accent                color.Color // for the one line that is not part of the ramp
	Near, Middle, Far     color.RGBA  // the ramp of distances
	Text, Small           vg.Length   // sizes of type
	Line, Hair            vg.Length   // widths
}

// Default is the style of the pages: ink on white, distances from ink blue over
// green to ochre, which grow lighter evenly, so that they hold in grey and for all
// eyes.
func Default() Style {
	return Style{
		Ink: color.RGBA{38, 38, 38, 255}, Soft: color.RGBA{112, 112, 112, 255}, Grid: color.RGBA{224, 224, 222, 255},
		Band: color.RGBA{236, 233, 224, 255}, Accent: color.RGBA{168, 58, 42, 255},
		Near: color.RGBA{11, 27, 51, 255}, Middle: color.RGBA{58, 122, 116, 255}, Far: color.RGBA{216, 160, 50, 255},
		Text: vg.Points(8), Small: vg.Points(7), Line: vg.Points(1.1), Hair: vg.Points(0.4),
	}
}

// Ramp is the colour of item i of n, near to far.
func (s Style) Ramp(i, n int) color.RGBA {
	t := 0.0
	if n > 1 {
		t = float64(i) / float64(n-1)
	}
	if t < 0.5 {
		return blend(s.Near, s.Middle, 2*t)
	}
	return blend(s.Middle, s.Far, 2*t-1)
}

func blend(a, b color.RGBA, t float64) color.RGBA {
	mix := func(x, y uint8) uint8 { return uint8(math.Round(float64(x)*(1-t) + float64(y)*t)) }
	return color.RGBA{mix(a.R, b.R), mix(a.G, b.G), mix(a.B, b.B), 255}
}

// pale is a colour towards white, for bands.
func pale(c color.RGBA, t float64) color.RGBA { return blend(c, color.RGBA{255, 255, 255, 255}, t) }

// sans is the typeface of everything.
func sans(size vg.Length, bold bool) font.Font {
	f := font.Font{Typeface: "Liberation", Variant: "Sans", Size: size}
	if bold {
		f.Weight = weightBold
	}
	return f
}

// text is a style of type on the canvas.
func (s Style) text(size vg.Length, bold bool, c color.Color, x, y float64) draw.TextStyle {
	return draw.TextStyle{Color: c, Font: sans(size, bold), Handler: handler, XAlign: draw.XAlignment(x), YAlign: draw.YAlignment(y)}
}

// stroke is a line style.
func stroke(c color.Color, w vg.Length, dashes ...vg.Length) draw.LineStyle {
	return draw.LineStyle{Color: c, Width: w, Dashes: dashes}
}

// Figure is something that can be drawn.
type Figure interface{ Draw(draw.Canvas) }

// leastContrast is what small type needs against white (W3C, Web Content Accessibility
// Guidelines 2.2, success criterion 1.4.3).
const leastContrast = 4.5

// readable darkens a colour until type in it can be read on white.
func readable(c color.Color) color.RGBA {
	out := color.RGBAModel.Convert(c).(color.RGBA)
	for contrast(out) < leastContrast {
		out = blend(out, color.RGBA{0, 0, 0, 255}, 0.04)
	}
	return out
}

// contrast is the ratio 1.05/(L + 0.05) of white to a colour of relative luminance L
// (the same guidelines, for sRGB).
func contrast(c color.RGBA) float64 { return 1.05 / (luminance(c) + 0.05) }

// luminance is the relative luminance of a colour, 0 to 1 (IEC 61966-2-1, sRGB).
func luminance(c color.RGBA) float64 {
	linear := func(v uint8) float64 {
		x := float64(v) / 255
		if x <= 0.04045 {
			return x / 12.92
		}
		return math.Pow((x+0.055)/1.055, 2.4)
	}
	return 0.2126*linear(c.R) + 0.7152*linear(c.G) + 0.0722*linear(c.B)
}
