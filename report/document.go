package report

import (
	"errors"
	"fmt"
	"image/color"
	"io"
	"slices"
	"strings"
	"time"
	"unicode"

	"codeberg.org/go-fonts/liberation/liberationsansbold"
	"codeberg.org/go-fonts/liberation/liberationsansregular"
	"codeberg.org/go-pdf/fpdf"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"standoff/report/figure"
)

const family = "Liberation Sans"

// The frame of a page, in points from the edges of the paper.
const (
	marginLeft, marginRight = 48.0, 48.0
	headerAt, footerUp      = 34.0, 30.0
	contentTop              = 66.0
	contentBottom           = 52.0
)

// document is a PDF being written: a place on the current page and the means to
// put text, tables and figures there.
type document struct {
	pdf   *fpdf.Fpdf
	style Style
	data  *Data
	y     float64 // where the next thing goes, from the top
	pages int     // how many there will be
}

// Write writes the pages as one PDF: vector, searchable, fonts embedded, and the
// same bytes for the same data.
func Write(w io.Writer, d *Data, s Style) error {
	if d == nil || d.Result == nil {
		return errors.New("a report needs a result")
	}
	doc := newDocument(d, s)
	all := pages(d, s)
	doc.pages = len(all)
	for _, page := range all {
		doc.page(page)
	}
	if err := doc.pdf.Output(w); err != nil {
		return fmt.Errorf("report: %w", err)
	}
	return nil
}

func newDocument(d *Data, s Style) *document {
	pdf := fpdf.NewCustom(&fpdf.InitType{OrientationStr: "P", UnitStr: "pt", Size: fpdf.SizeType{Wd: s.Paper.Width, Ht: s.Paper.Height}})
	pdf.SetCatalogSort(true)
	when := d.Measured.UTC()
	if d.Measured.IsZero() {
		when = time.Unix(0, 0).UTC()
	}
	pdf.SetCreationDate(when)
	pdf.SetModificationDate(when)
	pdf.AddUTF8FontFromBytes(family, "", liberationsansregular.TTF)
	pdf.AddUTF8FontFromBytes(family, "B", liberationsansbold.TTF)
	pdf.SetTitle("Near-field report "+clean(d.Tag), true)
	pdf.SetAuthor("standoff "+clean(d.Version), true)
	pdf.SetSubject("Proximity effect of "+unitName(d), true)
	pdf.SetCreator("standoff", true)
	pdf.SetProducer("standoff", true)
	pdf.SetAutoPageBreak(false, 0)
	pdf.SetMargins(marginLeft, 0, marginRight)
	pdf.SetCellMargin(0)
	return &document{pdf: pdf, style: s, data: d}
}

func unitName(d *Data) string {
	if d.Serial == "" {
		return clean(d.Tag)
	}
	return clean(d.Tag) + ", serial " + clean(d.Serial)
}

// clean takes out what cannot be printed.
func clean(s string) string {
	return strings.Map(func(r rune) rune {
		if !unicode.IsPrint(r) || r > 0xFFFF {
			return -1
		}
		return r
	}, s)
}

// page is one page: the question it answers, the answer in a sentence, and the
// evidence.
type page struct {
	question string
	answer   string
	draw     func(*document)
}

func (d *document) page(p page) {
	d.pdf.AddPage()
	d.header()
	d.footer()
	d.pdf.Bookmark(p.question, 0, 0)
	d.y = contentTop
	d.font("B", 17, d.style.Figure.Ink)
	d.text(marginLeft, d.y+14, p.question)
	d.y += 34
	d.paragraph(p.answer, 10.5, d.style.Figure.Ink)
	d.y += 10
	p.draw(d)
}

func (d *document) width() float64  { return d.style.Paper.Width - marginLeft - marginRight }
func (d *document) right() float64  { return d.style.Paper.Width - marginRight }
func (d *document) bottom() float64 { return d.style.Paper.Height - contentBottom }

// room is how much height is left.
func (d *document) room() float64 { return d.bottom() - d.y }

func (d *document) font(style string, size float64, c color.Color) {
	d.pdf.SetFont(family, style, size)
	r, g, b, _ := rgb(c)
	d.pdf.SetTextColor(r, g, b)
}

// text writes one line on a baseline.
func (d *document) text(x, y float64, s string) { d.pdf.Text(x, y, clean(s)) }

// textRight ends at x.
func (d *document) textRight(x, y float64, s string) {
	s = clean(s)
	d.pdf.Text(x-d.pdf.GetStringWidth(s), y, s)
}

// fitted is s, or as much of it as fits into a width, with an ellipsis.
func (d *document) fitted(s string, width float64) string {
	s = clean(s)
	if d.pdf.GetStringWidth(s) <= width {
		return s
	}
	r := []rune(s)
	for len(r) > 0 && d.pdf.GetStringWidth(string(r)+"…") > width {
		r = r[:len(r)-1]
	}
	return string(r) + "…"
}

func (d *document) header() {
	st := d.style.Figure
	d.font("B", 9, st.Ink)
	tag := d.fitted(d.data.Tag, d.width()*0.55)
	d.text(marginLeft, headerAt, tag)
	x := marginLeft + d.pdf.GetStringWidth(tag) + 10
	d.font("", 8, st.Soft)
	date := d.data.Measured.Format("2 January 2006, 15:04 -07:00")
	if d.data.Measured.IsZero() {
		date = ""
	}
	d.textRight(d.right(), headerAt, date)
	if d.data.Serial != "" {
		d.text(x, headerAt, d.fitted("serial "+d.data.Serial, d.right()-d.pdf.GetStringWidth(date)-12-x))
	}
	d.rule(headerAt+9, st.Ink, 0.8)
}

func (d *document) footer() {
	st := d.style.Figure
	y := d.style.Paper.Height - footerUp
	d.rule(y-11, st.Soft, 0.4)
	d.font("", 7, st.Soft)
	d.text(marginLeft, y, fmt.Sprintf("standoff %s · session %s · %s", clean(d.data.Version), clean(d.data.Session), coverage(d.data.Result)))
	d.textRight(d.right(), y, fmt.Sprintf("page %d of %d", d.pdf.PageNo(), d.pages))
}

func (d *document) rule(y float64, c color.Color, width float64) {
	r, g, b, _ := rgb(c)
	d.pdf.SetDrawColor(r, g, b)
	d.pdf.SetLineWidth(width)
	d.pdf.Line(marginLeft, y, d.right(), y)
}

// paragraph is wrapped text.
func (d *document) paragraph(s string, size float64, c color.Color) {
	if s == "" {
		return
	}
	d.font("", size, c)
	for _, line := range d.wrap(clean(s), d.width()) {
		if d.room() < size {
			return
		}
		d.pdf.Text(marginLeft, d.y+size, line)
		d.y += size * leading
	}
}

// textHeight is what a paragraph takes.
func (d *document) textHeight(s string, size float64) float64 {
	d.font("", size, d.style.Figure.Ink)
	return float64(len(d.wrap(clean(s), d.width()))) * size * leading
}

// leading is the distance of lines relative to the size of type.
const leading = 1.38

// wrap breaks text at spaces, and inside a word that is longer than a line.
func (d *document) wrap(s string, width float64) []string {
	var lines []string
	line := ""
	for _, word := range glued(strings.Fields(s)) {
		for d.pdf.GetStringWidth(word) > width {
			head := d.fitted(word, width)
			cut := strings.TrimSuffix(head, "…")
			if cut == "" {
				break
			}
			lines, word = append(lines, cut), strings.TrimPrefix(word, cut)
		}
		switch {
		case line == "":
			line = word
		case d.pdf.GetStringWidth(line+" "+word) <= width:
			line += " " + word
		default:
			lines, line = append(lines, line), word
		}
	}
	return append(lines, line)
}

// heading is a line in bold above a part of a page; on a full page there is none.
func (d *document) heading(s string) {
	if d.room() < 3*rowHeight {
		return
	}
	d.y += 6
	d.font("B", 10, d.style.Figure.Ink)
	d.text(marginLeft, d.y+10, s)
	d.y += 18
}

// figure draws a figure across the page.
func (d *document) figure(f figure.Figure, height float64) {
	d.figureAt(f, marginLeft, d.width(), height)
	d.y += height
}

// figureAt draws a figure at the current height without moving on.
func (d *document) figureAt(f figure.Figure, x, width, height float64) {
	c := newCanvas(d.pdf, x, d.y+height)
	f.Draw(draw.Canvas{Canvas: c, Rectangle: vg.Rectangle{Max: vg.Point{X: vg.Length(width), Y: vg.Length(height)}}})
}

// glued keeps a number and its unit on one line.
func glued(words []string) []string {
	var out []string
	for i, w := range words {
		bare := strings.TrimRight(w, ".,;:")
		if i > 0 && (slices.Contains(units, bare) || w == "±" || words[i-1] == "±") {
			out[len(out)-1] += " " + w
			continue
		}
		out = append(out, w)
	}
	return out
}

var units = []string{"%", "mm", "cm", "m", "ms", "s", "Hz", "kHz", "dB", "dBFS", "°C", "kPa", "m/s"}
