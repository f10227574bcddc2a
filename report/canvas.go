package report

import (
	"image"
	"image/color"
	"image/png"
	"io"
	"math"
	"strconv"

	"codeberg.org/go-pdf/fpdf"
	xfont "golang.org/x/image/font"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
)

// canvas draws figures of gonum/plot on a page of the document, so that they share
// it with text and tables. Its origin is the lower left corner of its frame, y goes
// up, in points; it keeps its own transformation, since text must not be mirrored.
type canvas struct {
	pdf   *fpdf.Fpdf
	state state
	stack []state
}

// state is what Push saves. (x, y) goes to (a·x + c·y + e, b·x + d·y + f) on the
// page, whose y goes down.
type state struct {
	a, b, c, d, e, f float64
	width            vg.Length
	colour           color.Color
	dashes           []vg.Length
	offset           vg.Length
}

// newCanvas is a canvas whose lower left corner is at (x, y) of the page.
func newCanvas(pdf *fpdf.Fpdf, x, y float64) *canvas {
	c := &canvas{pdf: pdf, state: state{a: 1, d: -1, e: x, f: y}}
	vg.Initialize(c)
	return c
}

func (c *canvas) point(p vg.Point) (x, y float64) {
	s := c.state
	return s.a*float64(p.X) + s.c*float64(p.Y) + s.e, s.b*float64(p.X) + s.d*float64(p.Y) + s.f
}

func (c *canvas) SetLineWidth(w vg.Length) { c.state.width = w }

func (c *canvas) SetLineDash(pattern []vg.Length, offset vg.Length) {
	c.state.dashes, c.state.offset = pattern, offset
}

func (c *canvas) SetColor(clr color.Color) {
	if clr == nil {
		clr = color.Black
	}
	c.state.colour = clr
}

func (c *canvas) Rotate(rad float64) {
	sin, cos := math.Sincos(rad)
	s := &c.state
	s.a, s.b, s.c, s.d = s.a*cos+s.c*sin, s.b*cos+s.d*sin, s.c*cos-s.a*sin, s.d*cos-s.b*sin
}

func (c *canvas) Translate(p vg.Point) { c.state.e, c.state.f = c.point(p) }

func (c *canvas) Scale(x, y float64) {
	s := &c.state
	s.a, s.b, s.c, s.d = s.a*x, s.b*x, s.c*y, s.d*y
}

func (c *canvas) Push() { c.stack = append(c.stack, c.state) }

func (c *canvas) Pop() {
	c.state = c.stack[len(c.stack)-1]
	c.stack = c.stack[:len(c.stack)-1]
}

// scale is by how much lengths grow.
func (c *canvas) scale() float64 {
	return math.Sqrt(math.Abs(c.state.a*c.state.d - c.state.b*c.state.c))
}

func (c *canvas) Stroke(p vg.Path) {
	if c.state.width <= 0 || len(p) == 0 {
		return
	}
	r, g, b, _ := rgb(c.state.colour)
	c.pdf.SetDrawColor(r, g, b)
	c.pdf.SetLineWidth(float64(c.state.width) * c.scale())
	c.pdf.SetLineJoinStyle("round")
	dashes := make([]float64, len(c.state.dashes))
	for i, d := range c.state.dashes {
		dashes[i] = float64(d) * c.scale()
	}
	c.pdf.SetDashPattern(dashes, float64(c.state.offset))
	c.path(p)
	c.pdf.DrawPath("D")
	c.pdf.SetDashPattern(nil, 0)
}

func (c *canvas) Fill(p vg.Path) {
	if len(p) == 0 {
		return
	}
	r, g, b, _ := rgb(c.state.colour)
	c.pdf.SetFillColor(r, g, b)
	c.path(p)
	c.pdf.DrawPath("F")
}

func rgb(c color.Color) (r, g, b, a int) {
	n := color.NRGBAModel.Convert(c).(color.NRGBA)
	return int(n.R), int(n.G), int(n.B), int(n.A)
}

func (c *canvas) path(p vg.Path) {
	for _, part := range p {
		x, y := c.point(part.Pos)
		switch part.Type {
		case vg.MoveComp:
			c.pdf.MoveTo(x, y)
		case vg.LineComp:
			c.pdf.LineTo(x, y)
		case vg.ArcComp:
			c.arc(part)
		case vg.CurveComp:
			c.curve(part)
		case vg.CloseComp:
			c.pdf.ClosePath()
		}
	}
}

// arc is cut into parts of a quarter at most, each a cubic curve with the handles
// 4/3·tan(angle/4).
func (c *canvas) arc(part vg.PathComp) {
	n := max(int(math.Ceil(math.Abs(part.Angle)/(math.Pi/2))), 1)
	step := part.Angle / float64(n)
	handle := 4.0 / 3 * math.Tan(step/4)
	at := func(angle, along float64) (float64, float64) {
		sin, cos := math.Sincos(angle)
		r := float64(part.Radius)
		return c.point(vg.Point{X: part.Pos.X + vg.Length(r*(cos-along*sin)), Y: part.Pos.Y + vg.Length(r*(sin+along*cos))})
	}
	x, y := at(part.Start, 0)
	c.pdf.LineTo(x, y)
	for i := range n {
		from := part.Start + float64(i)*step
		x1, y1 := at(from, handle)
		x2, y2 := at(from+step, -handle)
		x3, y3 := at(from+step, 0)
		c.pdf.CurveBezierCubicTo(x1, y1, x2, y2, x3, y3)
	}
}

func (c *canvas) curve(part vg.PathComp) {
	x, y := c.point(part.Pos)
	x1, y1 := c.point(part.Control[0])
	if len(part.Control) == 1 {
		c.pdf.CurveTo(x1, y1, x, y)
		return
	}
	x2, y2 := c.point(part.Control[1])
	c.pdf.CurveBezierCubicTo(x1, y1, x2, y2, x, y)
}

func (c *canvas) FillString(f font.Face, pt vg.Point, text string) {
	if f.Font.Size == 0 || text == "" {
		return
	}
	style := ""
	if f.Font.Weight >= xfont.WeightBold {
		style = "B"
	}
	c.pdf.SetFont(family, style, float64(f.Font.Size)*c.scale())
	r, g, b, _ := rgb(c.state.colour)
	c.pdf.SetTextColor(r, g, b)
	x, y := c.point(pt)
	angle := math.Atan2(-c.state.b, c.state.a)
	if math.Abs(angle) < 1e-9 {
		c.pdf.Text(x, y, text)
		return
	}
	c.pdf.TransformBegin()
	c.pdf.TransformRotate(angle*180/math.Pi, x, y)
	c.pdf.Text(x, y, text)
	c.pdf.TransformEnd()
}

// DrawImage is for raster parts of a figure.
func (c *canvas) DrawImage(rect vg.Rectangle, img image.Image) {
	r, w := io.Pipe()
	go func() { w.CloseWithError(png.Encode(w, img)) }()
	name := "image" + strconv.Itoa(c.pdf.PageNo()) + "-" + strconv.FormatFloat(float64(rect.Min.X+rect.Max.Y), 'f', 3, 64)
	options := fpdf.ImageOptions{ImageType: "PNG"}
	c.pdf.RegisterImageOptionsReader(name, options, r)
	x, y := c.point(vg.Point{X: rect.Min.X, Y: rect.Max.Y})
	size := rect.Size()
	c.pdf.ImageOptions(name, x, y, float64(size.X)*c.scale(), float64(size.Y)*c.scale(), false, options, 0, "")
}
