package report

import "strings"

// column is a column of a table: its share of the width, and how it stands. A
// column of numbers stands on its decimal points.
type column struct {
	head  string
	share float64
	align alignment
}

type alignment int

const (
	left alignment = iota
	right
	decimal
)

const (
	rowHeight = 13.5
	gutter    = 12 // between columns
)

// table draws rows under a head; rows that no longer fit are counted in a last line.
func (d *document) table(columns []column, rows [][]string) {
	st := d.style.Figure
	var sum float64
	for _, c := range columns {
		sum += c.share
	}
	d.heads(columns, sum)
	d.rule(d.y, st.Ink, 0.6)
	after := widestAfterPoint(d, columns, rows)
	for i, row := range rows {
		if d.room() < 2*rowHeight && i < len(rows)-1 {
			d.font("", 8, st.Soft)
			d.text(marginLeft, d.y+10, "and "+plural(len(rows)-i, "row", "rows")+" more in result.json")
			d.y += rowHeight
			return
		}
		d.font("", 8.5, st.Ink)
		x := marginLeft
		for k, c := range columns {
			w := c.share / sum * d.width()
			if k < len(row) {
				d.cell(c, row[k], x, d.y+10, w, after[k])
			}
			x += w
		}
		d.y += rowHeight
		d.rule(d.y, st.Grid, 0.4)
	}
	d.y += 4
}

// heads are the names of the columns, where there are any.
func (d *document) heads(columns []column, sum float64) {
	d.font("", 7.5, d.style.Figure.Soft)
	x, any := marginLeft, false
	for _, c := range columns {
		w := c.share / sum * d.width()
		if any = any || c.head != ""; c.align == left {
			d.text(x, d.y+9, d.fitted(c.head, w-gutter))
		} else {
			d.textRight(x+w-gutter, d.y+9, d.fitted(c.head, w-gutter))
		}
		x += w
	}
	if any {
		d.y += 13
	}
}

// cell writes one cell; after is the room that a decimal column keeps for what
// stands behind the point.
func (d *document) cell(c column, s string, x, y, w, after float64) {
	s = d.fitted(s, w-gutter)
	switch c.align {
	case left:
		d.text(x, y, s)
	case right:
		d.textRight(x+w-gutter, y, s)
	case decimal:
		d.textRight(x+w-gutter-after+d.pdf.GetStringWidth(tail(s)), y, s)
	}
}

// tail is what stands behind the digits before the point.
func tail(s string) string {
	if i := strings.IndexAny(s, "."); i >= 0 {
		return s[i:]
	}
	if i := strings.Index(s, " "); i >= 0 {
		return s[i:]
	}
	return ""
}

func widestAfterPoint(d *document, columns []column, rows [][]string) []float64 {
	d.font("", 8.5, d.style.Figure.Ink)
	out := make([]float64, len(columns))
	for _, row := range rows {
		for k := range columns {
			if k < len(row) {
				out[k] = max(out[k], d.pdf.GetStringWidth(tail(clean(row[k]))))
			}
		}
	}
	return out
}
