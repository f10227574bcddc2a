package fit

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"
)

// solved is a data set of testdata/reference/fit with what scipy made of it.
type solved struct {
	model                 Model
	data                  *Dataset
	chi, cost             float64
	freedom               int
	value, standardErrors map[string]float64
}

func rowsOf(t testing.TB, file string) [][]string {
	t.Helper()
	f, err := os.Open(filepath.Join("..", "testdata", "reference", "fit", file))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows[1:]
}

func numbers(t testing.TB, row []string) []float64 {
	t.Helper()
	out := make([]float64, len(row))
	for i, text := range row {
		v, err := strconv.ParseFloat(text, 64)
		if err != nil {
			t.Fatal(err)
		}
		out[i] = v
	}
	return out
}

func readSolved(t testing.TB) (names []string, sets map[string]*solved) {
	sets = map[string]*solved{}
	tapes := map[string]float64{}
	for _, row := range rowsOf(t, "set.csv") {
		v := numbers(t, row[4:])
		names = append(names, row[0])
		tapes[row[0]] = v[7]
		sets[row[0]] = &solved{
			model: Model{Form: row[1], Body: row[2], Source: row[3]}, chi: v[8], freedom: int(v[9]), cost: v[10],
			data: &Dataset{FreeClock: v[0] != 0, Setback: v[1], SetbackUncertainty: v[2],
				Radius: v[3], RadiusUncertainty: v[4], Speed: v[5], SpeedUncertainty: v[6]},
			value: map[string]float64{}, standardErrors: map[string]float64{},
		}
	}
	for _, row := range rowsOf(t, "data.csv") {
		v := numbers(t, row[1:])
		sets[row[0]].data.add(v[0], tapes[row[0]], v[1], complex(v[2], v[3]), v[4])
	}
	for _, row := range rowsOf(t, "optimum.csv") {
		v := numbers(t, row[2:])
		sets[row[0]].value[row[1]], sets[row[0]].standardErrors[row[1]] = v[0], v[1]
	}
	return names, sets
}

// add appends one value; lines come distance by distance.
func (d *Dataset) add(nominal, tape, hz float64, value complex128, variance float64) {
	n := len(d.Points)
	if n == 0 || d.Points[n-1].Nominal != nominal {
		d.Points = append(d.Points, Point{Label: fmt.Sprint(nominal), Nominal: nominal, Tape: tape})
		n++
	}
	if n == 1 {
		d.Hz = append(d.Hz, hz)
	}
	p := &d.Points[n-1]
	p.Value, p.Variance = append(p.Value, value), append(p.Variance, variance)
}

// How far FitModel may be from scipy's optimum. Both solve the same problem, one
// with S eliminated, one with S explicit. The program's solver ends where a step
// promises less than 1e−10 of the cost, so within √(2e−10·cost), some 2e−4 of a
// standard error; its 6 rings of a piston before a sphere add less than that.
const (
	valuesWithin = 5e-4 // standard errors
	errorsWithin = 1e-4 // relative
	misfitWithin = 1e-7 // relative
)

// The joint fit against scipy.optimize.least_squares: optimum, standard errors
// and misfit, for all forms, bodies, sources and clocks.
func TestJointAgainstScipy(t *testing.T) {
	names, sets := readSolved(t)
	for _, name := range names {
		t.Run(name, func(t *testing.T) { sets[name].compare(t) })
	}
}

func (s *solved) compare(t *testing.T) {
	j, err := FitModel(s.data, s.model)
	if err != nil {
		t.Fatal(err)
	}
	if !j.Status.Good() {
		t.Errorf("status: %v", j.Status)
	}
	s.check(t, "beta", j.Acoustics.Beta, j.BetaSE)
	s.check(t, "spacing", j.Acoustics.Spacing, j.SpacingSE)
	s.check(t, "setback", j.Setback, j.SetbackSE)
	s.check(t, "speed", j.Acoustics.Speed, j.SpeedSE)
	if s.model.Source == PistonSource {
		s.check(t, "radius", j.Acoustics.Radius, j.RadiusSE)
	}
	for i := range s.data.Points {
		s.check(t, fmt.Sprintf("distance-%d", i), j.Distances[i], j.DistanceSE[i])
		if s.data.FreeClock && i > 0 {
			name := fmt.Sprintf("delay-%d", i)
			s.check(t, name, j.Delays[i], s.standardErrors[name])
		}
	}
	if j.Freedom != s.freedom {
		t.Errorf("%d degrees of freedom, want %d", j.Freedom, s.freedom)
	}
	if math.Abs(j.ChiSquare-s.chi) > misfitWithin*s.chi {
		t.Errorf("chi-square %.9g, scipy %.9g", j.ChiSquare, s.chi)
	}
	if cost := j.costAt(); math.Abs(cost-s.cost) > misfitWithin*s.cost {
		t.Errorf("cost %.9g, scipy %.9g", cost, s.cost)
	}
}

// costAt is ½‖r‖² with the priors.
func (j *Joint) costAt() float64 {
	p := newSeparable(j.data, j.Model)
	res := make([]float64, p.size())
	p.residuals(res, j.x)
	var sum float64
	for _, r := range res {
		sum += r * r
	}
	return sum / 2
}

func (s *solved) check(t *testing.T, name string, value, standardError float64) {
	t.Helper()
	want, se := s.value[name], s.standardErrors[name]
	t.Logf("%-10s %.9g, scipy %.9g (%.1e ±); ± %.4g, scipy %.4g (%.1e)", name, value, want, (value-want)/se, standardError, se, standardError/se-1)
	if !(math.Abs(value-want) <= valuesWithin*se) {
		t.Errorf("%s %.9g, scipy %.9g", name, value, want)
	}
	if !(math.Abs(standardError-se) <= errorsWithin*se) {
		t.Errorf("standard error of %s %.5g, scipy %.5g", name, standardError, se)
	}
}
