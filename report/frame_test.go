package report

import (
	"bytes"
	"fmt"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"standoff/fit"
	"standoff/measure"
)

// word is a word on a page as pdftotext finds it, in points from the upper left.
type word struct {
	page           int
	x0, y0, x1, y1 float64
	text           string
}

var wordLine = regexp.MustCompile(`<word xMin="([-0-9.]+)" yMin="([-0-9.]+)" xMax="([-0-9.]+)" yMax="([-0-9.]+)">(.*)</word>`)

// words are all words of a PDF with their boxes.
func words(t *testing.T, pdf []byte) (out []word) {
	t.Helper()
	page := 0
	for _, line := range strings.Split(poppler(t, pdf, "pdftotext", "-bbox"), "\n") {
		if strings.Contains(line, "<page ") {
			page++
		}
		m := wordLine.FindStringSubmatch(line)
		if m == nil {
			continue
		}
		var box [4]float64
		for i := range box {
			box[i], _ = strconv.ParseFloat(m[i+1], 64)
		}
		out = append(out, word{page, box[0], box[1], box[2], box[3], m[5]})
	}
	if len(out) < 50 {
		t.Fatalf("only %d words found", len(out))
	}
	return out
}

// covers is whether two words share ink: a box holds the height of the line, of
// which capitals and digits fill about the middle half.
func covers(a, b word) bool {
	ha, hb := (a.y1-a.y0)/4, (b.y1-b.y0)/4
	return a.page == b.page &&
		min(a.x1, b.x1)-max(a.x0, b.x0) > 0.5 && min(a.y1-ha, b.y1-hb)-max(a.y0+ha, b.y0+hb) > 0.5
}

// crowded are the cases that push type against type and against the edges.
func crowded() map[string]*Data {
	cases := map[string]*Data{}
	for _, n := range []int{1, 2, 8, 30} {
		cases[fmt.Sprint(n, " distances")] = sample(n)
	}
	for name, crowd := range crowdedEvidence() {
		cases[name] = sample(8)
		crowd(cases[name])
	}
	flat := sample(8)
	for i := range flat.Curves.Rise {
		for _, y := range [][]float64{flat.Curves.Rise[i].DB, flat.Curves.Rise[i].LineDB} {
			for k := range y {
				y[k] = 0
			}
		}
	}
	cases["no rise"] = flat
	long := sample(8)
	long.Tag, long.Serial = strings.Repeat("Ünïcødé Ωмега ", 9), strings.Repeat("0123456789", 12)
	for i := range long.Result.Distances {
		name := fmt.Sprint(1234.5+float64(i), "mm", strings.Repeat("m", 9*i))
		long.Curves.Rise[i].Label, long.Responses[i].Label, long.Impulses[i].Label, long.Result.Distances[i].Label = name, name, name, name
		long.Result.Distances[i].Flags = []measure.Flag{measure.Clipped, measure.LowSNR, measure.Hum, measure.LevelJump}
	}
	long.Result.Warnings = []measure.Warning{{Code: "a", Text: strings.Repeat("a long warning ", 20), Hint: strings.Repeat("with a long hint ", 20)}, {Code: "b", Text: "short"}, {Code: "c", Text: "another"}, {Code: "d", Text: "and one"}, {Code: "e", Text: "the fifth"}}
	long.Result.Models = append(long.Result.Models, fit.Candidate{Model: "phase-shift", Body: "sphere", Rear: "low-pass", Why: strings.Repeat("for a reason that takes a while to tell, ", 4)})
	cases["long names"] = long
	return cases
}

// No word leaves the frame of a page, and no two words stand on each other.
func TestNothingLeavesItsFrameOrCoversAnother(t *testing.T) {
	for name, d := range crowded() {
		for paper, size := range map[string]Paper{"A4": A4, "Letter": Letter} {
			t.Run(name+" on "+paper, func(t *testing.T) {
				style := DefaultStyle()
				style.Paper = size
				var b bytes.Buffer
				if err := Write(&b, d, style); err != nil {
					t.Fatal(err)
				}
				all := words(t, b.Bytes())
				for i, w := range all {
					if w.x0 < marginLeft-1 || w.x1 > size.Width-marginRight+1 || w.y0 < 12 || w.y1 > size.Height-12 {
						t.Errorf("page %d: %q at %.0f to %.0f, %.0f to %.0f is outside the frame", w.page, w.text, w.x0, w.x1, w.y0, w.y1)
					}
					for _, o := range all[i+1:] {
						if covers(w, o) {
							t.Errorf("page %d: %q covers %q at %.0f, %.0f", w.page, w.text, o.text, w.x0, w.y0)
						}
					}
				}
			})
		}
	}
}
