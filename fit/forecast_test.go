package fit

import (
	"fmt"
	"math"
	"testing"
)

// list is a dataset of distances in mm with noise relative to each response.
func list(noise, from, to float64, mm ...float64) *Dataset {
	d := &Dataset{Setback: 0, SetbackUncertainty: 1e-3, Radius: 0, RadiusUncertainty: 1e-3, Speed: 343, SpeedUncertainty: 0.6}
	for f := from; f < to*1.001; f *= math.Exp2(1.0 / 12) {
		d.Hz = append(d.Hz, f)
	}
	for _, r := range mm {
		d.Points = append(d.Points, Point{Label: fmt.Sprint(r), Nominal: r / 1e3, Tape: 0.0005, Variance: make([]float64, len(d.Hz))})
	}
	d.Unexplained = noise
	return d
}

// Cramér–Rao bounds computed apart from the program, rounded to two figures: a point
// source, 1 % of noise in each quadrature of each value, twelve values an octave, tape
// ±0.5 mm, setback ±1 mm, speed of sound known. The last list's lengths are not told; the
// rows with eight and seven distances are on lists much like those here.
func TestForecastAgainstBounds(t *testing.T) {
	six := []float64{25, 50, 100, 200, 400, 800}
	m := Model{Form: Summed, Body: Open, Source: PointSource}
	for _, c := range []struct {
		d                       *Dataset
		beta, spacing, mix, gap float64
	}{
		{list(0.01*math.Sqrt2, 40, 2000, six...), 0.5, 0.020, 0.0017, 1.5e-3},
		{list(0.01*math.Sqrt2, 40, 10000, six...), 0.5, 0.020, 0.0012, 0.7e-3},
		{list(0.01*math.Sqrt2, 40, 2000, 50, 75, 110, 160, 240, 360, 540, 800), 0.5, 0.020, 0.0017, 3.5e-3},
		{list(0.01*math.Sqrt2, 40, 2000, 80, 120, 170, 250, 370, 540, 800), 0.5, 0.020, 0.0021, 8e-3},
		{list(0.01*math.Sqrt2, 40, 2000, six...), 1, 0.030, 0.0024, 1.6e-3},
	} {
		c.d.SpeedUncertainty = 1e-3
		f, err := c.d.Forecast(m, Acoustics{Beta: c.beta, Spacing: c.spacing})
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(f.Scatter[0]/c.mix-1) > 0.08 || math.Abs(f.Scatter[1]/c.gap-1) > 0.08 {
			t.Errorf("%d distances, mix %g: %.5f and %.2f mm, want %.4f and %.1f mm", len(c.d.Points), c.beta, f.Scatter[0], 1e3*f.Scatter[1], c.mix, 1e3*c.gap)
		}
	}
}

// The forecast is the covariance that the fit then gives, and the spacing lives in the
// nearest places.
func TestForecastIsWhatTheFitSays(t *testing.T) {
	d := list(0.003, 100, 4000, 30, 45, 70, 110, 200, 400)
	d.Radius, d.Setback = 0.017, 0.006
	for _, body := range []string{Open, Sphere} {
		m := Model{Form: PhaseShift, Body: body, Source: PistonSource}
		truth := Acoustics{Beta: 0.5, Spacing: 0.027}
		f, err := d.Forecast(m, truth)
		if err != nil {
			t.Fatal(err)
		}
		j, err := FitModel(d.ideal(m, truth), m)
		if err != nil {
			t.Fatal(err)
		}
		// Without noise what is left of rounding is alike at neighbouring frequencies, by
		// which the data's part of the uncertainty is raised, and the tape's is not: 4 %.
		raised := math.Sqrt(j.Alike)
		if math.Abs(raised*f.Scatter[0]/j.BetaSE-1) > 0.04 || math.Abs(raised*f.Scatter[1]/j.SpacingSE-1) > 0.04 {
			t.Errorf("%s: forecast %.5f and %.3f mm, the fit has %.5f and %.3f mm", body, f.Scatter[0], 1e3*f.Scatter[1], j.BetaSE, 1e3*j.SpacingSE)
		}
		for i, w := range f.Worth {
			if w.GradientFraction < 0.999 || w.PortSpacing < 0.999 {
				t.Errorf("%s: without %s mm the uncertainty shrinks: %v", body, w.Label, w)
			}
			if i > 0 && w.PortSpacing > f.Worth[0].PortSpacing {
				t.Errorf("%s: %s mm is worth more to the spacing than the nearest: %v", body, w.Label, f.Worth)
			}
		}
	}
}

// The quick sums of the search are the covariance of a whole fit, and the list that it
// finds is better by it.
func TestBetterListIsBetter(t *testing.T) {
	d := list(0.003, 100, 4000, 60, 80, 110, 150, 210, 300)
	d.Radius, d.Setback = 0.017, 0.006
	c := Capsule{Model{Form: PhaseShift, Body: Sphere, Source: PistonSource}, Acoustics{Beta: 0.5, Spacing: 0.027}}
	before, err := d.Forecast(c.Model, c.Acoustics)
	if err != nil {
		t.Fatal(err)
	}
	var places []float64
	for _, p := range d.Points {
		places = append(places, p.Nominal)
	}
	quick := d.sheet(c, places).score([]int{0, 1, 2, 3, 4, 5})
	if whole := math.Log(before.Scatter[0]) + math.Log(before.Scatter[1]); math.Abs(quick-whole) > 1e-3 {
		t.Errorf("the quick score is %.5f, a whole forecast has %.5f", quick, whole)
	}
	better := d.Better([]Capsule{c}, 0.025, 0.8)
	if len(better) != len(d.Points) || better[0] < 0.025 || better[len(better)-1] > 0.8 {
		t.Fatalf("the better list is %v", better)
	}
	e := *d
	e.Points = append([]Point(nil), d.Points...)
	for i := range e.Points {
		e.Points[i].Nominal, e.Points[i].Label = better[i], fmt.Sprint(better[i])
	}
	after, err := e.Forecast(c.Model, c.Acoustics)
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("%v: mix %.5f → %.5f, spacing %.3f → %.3f mm", better, before.Scatter[0], after.Scatter[0], 1e3*before.Scatter[1], 1e3*after.Scatter[1])
	if after.Scatter[1] > 0.5*before.Scatter[1] || after.Scatter[0] > before.Scatter[0] {
		t.Errorf("no better: mix %.5f → %.5f, spacing %.3f → %.3f mm", before.Scatter[0], after.Scatter[0], 1e3*before.Scatter[1], 1e3*after.Scatter[1])
	}
}
