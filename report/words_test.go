package report

import (
	"math"
	"os"
	"strings"
	"testing"

	"standoff/fit"
)

// The guide explains every page, in the order of the pages.
func TestGuideFollowsThePages(t *testing.T) {
	guide, err := os.ReadFile("GUIDE.md")
	if err != nil {
		t.Fatal(err)
	}
	var headings, questions []string
	for _, line := range strings.Split(string(guide), "\n") {
		if h, ok := strings.CutPrefix(line, "## "); ok {
			headings = append(headings, h)
		}
	}
	for _, p := range pages(sample(3), DefaultStyle()) {
		questions = append(questions, p.question)
	}
	if a, b := strings.Join(headings, "\n"), strings.Join(questions, "\n"); a != b {
		t.Errorf("the guide has\n%s\nthe pages are\n%s", a, b)
	}
}

// riseOf is a table by |1 + β/(jkr)| (physics of a point source), c = 344 m/s.
func riseOf(beta float64, metres ...float64) fit.RiseTable {
	t := fit.RiseTable{Distances: metres, Frequencies: []float64{100}, DB: [][]float64{nil}}
	for _, r := range metres {
		t.DB[0] = append(t.DB[0], 10*math.Log10(1+math.Pow(beta*344/(2*math.Pi*100*r), 2)))
	}
	return t
}

// A cardioid is within 1 dB at 100 Hz from β·c/(2πf·√(10^0.1 − 1)) = 0.538 m on; the
// table is read between its columns, so some cm are free.
func TestReach(t *testing.T) {
	for _, p := range []struct {
		table fit.RiseTable
		want  string
	}{
		{riseOf(0.5, 0.1, 0.3, 0.5, 0.58, 0.7), "From about 54 cm on, the rise at 100 Hz is below 1 dB."},
		{riseOf(1, 0.1, 0.3, 0.6), "At 600 mm the rise at 100 Hz is still above 1 dB."},
		{riseOf(0, 0.1, 0.3, 0.6), "At every distance of the table the rise at 100 Hz is below 1 dB."},
		{riseOf(math.NaN(), 0.1, 0.6), "At 600 mm the rise at 100 Hz is still above 1 dB."},
		{fit.RiseTable{Frequencies: []float64{100}}, ""},
		{fit.RiseTable{}, ""},
	} {
		if got := strings.Join(reach(p.table, 100), " "); got != p.want {
			t.Errorf("%q, want %q", got, p.want)
		}
	}
}

// The directivity index has its best, 6.02 dB, at β = 0.75: 0.70 and 0.80 both give
// 5.963 (REE 0.09 + 0.49/3 and 0.04 + 0.64/3), so ± is 0.06 there, not nothing. The
// null is at 109.5°, at 115.4° for 0.70; at 90° 0.25 ± 0.05 is −12.0 and down to −14.0 dB.
func TestPatternRowsAtTheBestIndex(t *testing.T) {
	var all []string
	for _, row := range patternRows(0.75, 0.05) {
		all = append(all, row[0]+": "+row[1])
	}
	text := strings.Join(all, "\n")
	for _, want := range []string{"directivity index: 6.02 ± 0.06 dB", "level at 90°: −12.0 ± 1.9 dB", "level at 180°: −6.0 ± 1.9 dB", "null angle: 109 ± 6°"} {
		if !strings.Contains(text, want) {
			t.Errorf("lacks %q:\n%s", want, text)
		}
	}
}

func TestCapitalised(t *testing.T) {
	for in, want := range map[string]string{
		"": "", "turn it down": "Turn it down", "ümlaut": "Ümlaut", "source.polarity is not said": "source.polarity is not said", "30mm is off": "30mm is off", "stop.": "Stop.",
	} {
		if got := capitalised(in); got != want {
			t.Errorf("%q becomes %q, want %q", in, got, want)
		}
	}
}

// A long cell of text takes several lines, and what is too long even for them is cut.
func TestLongCells(t *testing.T) {
	d := newDocument(sample(1), DefaultStyle())
	d.pdf.AddPage()
	d.font("", 8.5, d.style.Figure.Ink)
	for _, p := range []struct {
		words, lines int
		cut          bool
	}{{1, 1, false}, {8, 2, false}, {100, mostLines, true}} {
		lines := d.cellLines(strings.TrimSpace(strings.Repeat("reason ", p.words)), 180)
		if len(lines) != p.lines || strings.HasSuffix(lines[len(lines)-1], "…") != p.cut {
			t.Errorf("%d words: %q", p.words, lines)
		}
		for _, l := range lines {
			if w := d.pdf.GetStringWidth(l); w > 180-gutter {
				t.Errorf("%q is %.0f wide", l, w)
			}
		}
	}
}
