package fit

import (
	"encoding/csv"
	"math"
	"math/cmplx"
	"os"
	"strconv"
	"testing"

	"standoff/fit/lsq"
)

// A head is two ports on a solid body, measured for real at five near distances: the
// sphere's series with one parameter, its radius, describes the ratio of the ears. See
// testdata/reference/head. The levels are rounded to 0.01 dB, 0.5 % of the smallest, and
// the speed of sound that those fits went by is not known: 0.4 mm are left to both.
func TestHeadInTheNearField(t *testing.T) {
	rows := headLevels(t)
	const c = 343.0
	for k, want := range []struct{ hz, radius, misfit float64 }{{300, 0.0984, 0.11}, {400, 0.1016, 0.14}, {500, 0.1084, 0.10}} {
		residuals := func(dst, x []float64) {
			s := newSphereSeries(2*math.Pi*want.hz/c, x[0])
			for i, row := range rows {
				front, rear := s.polePressures(row[0], 0)
				dst[i] = decibels(cmplx.Abs(front)/cmplx.Abs(rear)) - row[1+k]
			}
		}
		r, err := lsq.Solve(lsq.Problem{Residuals: residuals, M: len(rows), Lower: []float64{0.05}, Upper: []float64{0.15}}, []float64{0.09}, lsq.Settings{})
		if err != nil || !r.Status.Good() {
			t.Fatal(err, r)
		}
		misfit := math.Sqrt(2 * r.Cost / float64(len(rows)))
		t.Logf("%g Hz: radius %.4f m, rms misfit %.2f dB", want.hz, r.X[0], misfit)
		if math.Abs(r.X[0]-want.radius) > 4e-4 || math.Abs(misfit-want.misfit) > 0.02 {
			t.Errorf("%g Hz: radius %.4f m and misfit %.3f dB, want %.4f and %.2f", want.hz, r.X[0], misfit, want.radius, want.misfit)
		}
	}
}

func headLevels(t *testing.T) (out [][]float64) {
	f, err := os.Open("../testdata/reference/head/levels.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range rows[1:] {
		var values []float64
		for _, text := range row {
			v, err := strconv.ParseFloat(text, 64)
			if err != nil {
				t.Fatal(err)
			}
			values = append(values, v)
		}
		out = append(out, values)
	}
	return out
}
