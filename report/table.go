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
	rowHeight  = 13.5
	lineHeight = 10.5 // from line to line within a cell
	gutter     = 12   // between columns
	mostLines  = 3    // of a cell
)

// table draws rows under a head; rows that no longer fit are counted in a last line.
func (d *document) table(columns []column, rows [][]string) { d.tableWith(columns, rows, nil) }

// tableWith is a table in whose cells marks are drawn besides: mark is handed the
// upper left corner of each cell and its width.
func (d *document) tableWith(columns []column, rows [][]string, mark func(row, column int, x, top, width float64)) {
	st := d.style.Figure
	if d.room() < 3*rowHeight {
		return
	}
	var sum float64
	for _, c := range columns {
		sum += c.share
	}
	d.heads(columns, sum)
	d.rule(d.y, st.Ink, 0.6)
	after := widestAfterPoint(d, columns, rows)
	for i, row := range rows {
		lines := d.lines(columns, row, sum)
		height := rowHeight + float64(lines-1)*lineHeight
		need := height
		if i < len(rows)-1 {
			need += rowHeight // for the line that says how many there are
		}
		if d.room() < need {
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
			if mark != nil {
				mark(i, k, x, d.y, w)
			}
			x += w
		}
		d.y += height
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
	if c.align == left {
		for i, line := range d.cellLines(s, w) {
			d.text(x, y+float64(i)*lineHeight, line)
		}
		return
	}
	s = d.fitted(s, w-gutter)
	switch c.align {
	case right:
		d.textRight(x+w-gutter, y, s)
	case decimal:
		d.textRight(x+w-gutter-after+d.pdf.GetStringWidth(tail(s)), y, s)
	}
}

// cellLines are the lines of a cell of text; what is longer than mostLines is cut.
func (d *document) cellLines(s string, w float64) []string {
	lines := d.wrap(clean(s), w-gutter)
	if len(lines) > mostLines {
		rest := strings.Join(lines[mostLines-1:], " ")
		lines = append(lines[:mostLines-1], d.fitted(rest, w-gutter))
	}
	return lines
}

// lines is how many lines a row takes.
func (d *document) lines(columns []column, row []string, sum float64) int {
	d.font("", 8.5, d.style.Figure.Ink)
	most := 1
	for k, c := range columns {
		if k < len(row) && c.align == left {
			most = max(most, len(d.cellLines(row[k], c.share/sum*d.width())))
		}
	}
	return most
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
