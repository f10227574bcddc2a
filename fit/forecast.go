package fit

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Forecast is what a measurement can be expected to hold before it is made.
type Forecast struct {
	Model     Model
	Acoustics Acoustics // taken for true
	Budget    Budget    // what would be in doubt: all lines but model form and band
	Scatter   [2]float64
	Resolved  bool // whether the spacing would be
	Worth     []Worth
}

// Worth is what a distance is worth: by which factor the standard uncertainties of
// mix and spacing would grow without it; +Inf where nothing would be left.
type Worth struct {
	Label                         string
	GradientFraction, PortSpacing float64
}

// errForecast is for a list that holds nothing.
var errForecast = errors.New("these distances hold neither mix nor spacing")

// Forecast tells what the dataset's distances, noise and prior knowledge will make of
// a capsule that is as model and acoustics say. The dataset's values are not used; its
// variances are relative to |S|² = 1, the far response being 1 at 1 m.
//
// The covariance is that of the joint fit at the truth, (JᵀJ)⁻¹: the Cramér–Rao bound
// with what is known beforehand counted as observations.
func (d *Dataset) Forecast(m Model, truth Acoustics) (*Forecast, error) {
	work := d.ideal(m, truth)
	if err := work.Validate(); err != nil {
		return nil, err
	}
	p := newSeparable(work, m)
	x := p.start(truth.Beta, truth.Spacing)
	c := p.bound(x)
	if c == nil {
		return nil, errForecast
	}
	out := &Forecast{Model: m, Acoustics: truth}
	out.Scatter = [2]float64{math.Sqrt(c.At(0, 0)), math.Sqrt(c.At(1, 1))}
	out.Budget = work.expected(p.contributions(x, c), c, truth)
	out.Resolved = spacingValue(truth.Spacing, out.Budget.PortSpacing, truth.Beta-out.Budget.GradientFraction.Expanded, false).Resolved
	for i, pt := range work.Points {
		w := Worth{pt.Label, math.Inf(1), math.Inf(1)}
		q := newSeparable(work.without(i), m)
		if less := q.bound(q.start(truth.Beta, truth.Spacing)); less != nil {
			w.GradientFraction = math.Sqrt(less.At(0, 0)) / out.Scatter[0]
			w.PortSpacing = math.Sqrt(less.At(1, 1)) / out.Scatter[1]
		}
		out.Worth = append(out.Worth, w)
	}
	return out, nil
}

// ideal is the dataset with the responses that a capsule would give, S being 1.
func (d *Dataset) ideal(m Model, truth Acoustics) *Dataset {
	out := *d
	out.Points = append([]Point(nil), d.Points...)
	out.level = make([]float64, len(d.Hz))
	ac := truth
	ac.Radius, ac.Speed = d.Radius, d.Speed
	e := newEvaluator(m, ac, d.Hz)
	for i := range out.Points {
		pt := &out.Points[i]
		pt.Value = make([]complex128, len(d.Hz))
		for j := range d.Hz {
			pt.Value[j] = e.output(j, pt.Nominal+d.Setback)
		}
	}
	for j, f := range d.Hz {
		far := m.Far(ac, f)
		out.level[j] = math.Hypot(real(far), imag(far))
	}
	return &out
}

// bound is the covariance at x, nil where the data do not hold a parameter.
func (p *separable) bound(x []float64) *mat.SymDense {
	j := mat.NewDense(p.size(), p.at.n, nil)
	p.jacobian(j, x)
	var normal mat.SymDense
	normal.SymOuterK(1, j.T())
	for i := range p.at.n {
		if normal.At(i, i) == 0 { // a point has no radius
			normal.SetSym(i, i, 1)
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(&normal) || chol.Cond() > 1e20 {
		return nil
	}
	c := mat.NewSymDense(p.at.n, nil)
	if chol.InverseTo(c) != nil {
		return nil
	}
	return c
}

// expected is the budget of a forecast.
func (d *Dataset) expected(parts [causes]spread, c *mat.SymDense, truth Acoustics) Budget {
	known := Freedom(math.Inf(1))
	var b Budget
	for _, s := range []struct {
		name, kind string
		size       float64
		unit       string
		of         cause
	}{
		{"noise", "A", d.typicalNoise(), "relative", byNoise},
		{"unexplained", "A", d.Unexplained, "relative", byLeftover},
		{"room", "A", d.Room, "1/m", byRoom},
		{"tape", "B", d.typicalTape(), "m", byTape},
		{"setback", "B", d.SetbackUncertainty, "m", bySetback},
		{"source radius", "B", d.RadiusUncertainty, "m", byRadius},
		{"speed of sound", "B", d.SpeedUncertainty, "m/s", bySpeed},
	} {
		b.Lines = append(b.Lines, BudgetLine{s.name, s.kind, s.size, s.unit, math.Sqrt(parts[s.of].beta), math.Sqrt(parts[s.of].spacing), known})
	}
	along := c.At(0, 1) / c.At(0, 0) * d.MethodMix
	b.Lines = append(b.Lines, BudgetLine{"method", "B", d.MethodMix, "1", d.MethodMix, math.Hypot(along, d.MethodSpacing*truth.Spacing), known})
	b.GradientFraction = b.sum(func(l BudgetLine) float64 { return l.GradientFraction })
	b.PortSpacing = b.sum(func(l BudgetLine) float64 { return l.PortSpacing })
	return b
}
