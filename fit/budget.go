package fit

import (
	"encoding/json"
	"math"
)

// Budget is the uncertainty budget of mix and spacing (JCGM 100:2008, clauses 4
// and 5): what is in doubt, by how much, and what that does to the two.
type Budget struct {
	Lines            []BudgetLine `json:"lines"`
	GradientFraction BudgetSum    `json:"gradient_fraction"`
	PortSpacing      BudgetSum    `json:"port_spacing_m"`
}

// BudgetLine is one source of doubt. All are standard uncertainties.
type BudgetLine struct {
	Source           string  `json:"source"`
	Type             string  `json:"type"` // A: by statistics from this measurement; B: known otherwise
	Size             float64 `json:"size"` // of the source itself
	Unit             string  `json:"unit"`
	GradientFraction float64 `json:"gradient_fraction"` // what it contributes
	PortSpacing      float64 `json:"port_spacing_m"`
	Freedom          Freedom `json:"degrees_of_freedom"`
}

// BudgetSum is the root of the sum of squares of a column, with its effective
// degrees of freedom by the Welch–Satterthwaite formula (G.2b) and the factor that
// makes an interval of at least 95 % of it: 2, or Student's t where that is more.
type BudgetSum struct {
	Standard       float64 `json:"standard"`
	Freedom        Freedom `json:"degrees_of_freedom"`
	CoverageFactor float64 `json:"coverage_factor"`
	Expanded       float64 `json:"expanded"`
}

// Freedom is a number of degrees of freedom, null in JSON where it is infinite.
type Freedom float64

// MarshalJSON writes an infinite number as null.
func (f Freedom) MarshalJSON() ([]byte, error) {
	if math.IsInf(float64(f), 0) {
		return []byte("null"), nil
	}
	return json.Marshal(float64(f))
}

// UnmarshalJSON reads null as infinite.
func (f *Freedom) UnmarshalJSON(b []byte) error {
	*f = Freedom(math.Inf(1))
	if string(b) == "null" {
		return nil
	}
	return json.Unmarshal(b, (*float64)(f))
}

// doubtful are the degrees of freedom of an estimate whose uncertainty is itself
// known to 25 % (JCGM 100:2008, G.4.2: ½·0.25⁻²).
const doubtful = 8

// budget lists what is in doubt about the chosen model.
func (a *Analysis) budget() Budget {
	best, d := a.Best(), a.Data
	free := Freedom(math.Max(float64(best.Freedom)/best.Alike, 1))
	known := Freedom(math.Inf(1))
	line := func(source, kind string, size float64, unit string, of cause, freedom Freedom) BudgetLine {
		s := best.parts[of]
		return BudgetLine{source, kind, size, unit, math.Sqrt(s.beta), math.Sqrt(s.spacing), freedom}
	}
	b := Budget{Lines: []BudgetLine{
		line("noise", "A", d.typicalNoise(), "relative", byNoise, free),
		line("unexplained", "A", d.Unexplained, "relative", byLeftover, free),
		line("room", "A", d.Room, "1/m", byRoom, free),
		line("tape", "B", d.typicalTape(), "m", byTape, known),
		line("setback", "B", d.SetbackUncertainty, "m", bySetback, known),
		line("source radius", "B", d.RadiusUncertainty, "m", byRadius, known),
		line("speed of sound", "B", d.SpeedUncertainty, "m/s", bySpeed, known),
		line("clocks", "B", 1e6*d.typicalClock(), "ppm", byClock, known),
		{"model form", "B", float64(len(a.equals()) - 1), "other models", a.formUncertainty(mixOf), a.formUncertainty(spacingOf), doubtful},
		{"band", "B", a.bandSize(), "Hz", a.bandUncertainty(mixOf, byMixSE), a.bandUncertainty(spacingOf, bySpacingSE), doubtful},
		{"method", "B", d.MethodMix, "1", d.MethodMix, a.methodSpacing(), known},
	}}
	b.GradientFraction = b.sum(func(l BudgetLine) float64 { return l.GradientFraction })
	b.PortSpacing = b.sum(func(l BudgetLine) float64 { return l.PortSpacing })
	return b
}

func mixOf(j *Joint) float64       { return j.Acoustics.Beta }
func spacingOf(j *Joint) float64   { return j.Acoustics.Spacing }
func byMixSE(j *Joint) float64     { return j.BetaSE }
func bySpacingSE(j *Joint) float64 { return j.SpacingSE }

// bandSize is up to where the second look at the band goes, 0 without one.
func (a *Analysis) bandSize() float64 {
	if a.lower == nil {
		return 0
	}
	hz := a.lower.data.Hz
	return hz[len(hz)-1]
}

// methodSpacing is the method's own uncertainty of the spacing: its relative one,
// and what its error of the mix takes the spacing along by, since the data hold a
// combination of both better than either.
func (a *Analysis) methodSpacing() float64 {
	best := a.Best()
	along := 0.0
	if v := best.covariance[0][0]; v > 0 {
		along = best.covariance[0][1] / v * a.Data.MethodMix
	}
	return math.Hypot(along, a.Data.MethodSpacing*best.Acoustics.Spacing)
}

func (b Budget) sum(of func(BudgetLine) float64) BudgetSum {
	var parts, freedom []float64
	for _, l := range b.Lines {
		parts, freedom = append(parts, of(l)), append(freedom, float64(l.Freedom))
	}
	u, nu := root(parts...), effectiveFreedom(parts, freedom)
	if nu > 1e4 {
		nu = math.Inf(1) // as good as
	}
	k := coverageFactor(nu)
	return BudgetSum{u, Freedom(nu), k, k * u}
}

// typicalNoise is the root of the mean noise variance relative to the response.
func (d *Dataset) typicalNoise() float64 {
	var sum, n float64
	for _, p := range d.Points {
		for j, y := range p.Value {
			sum += p.Variance[j] / math.Max(real(y)*real(y)+imag(y)*imag(y), 1e-300)
			n++
		}
	}
	return math.Sqrt(sum / n)
}

// typicalClock is the root of the mean square of what is in doubt about the clocks.
func (d *Dataset) typicalClock() float64 {
	var sum float64
	for _, p := range d.Points {
		sum += p.Clock * p.Clock
	}
	return math.Sqrt(sum / float64(len(d.Points)))
}

// typicalTape is the root of the mean square of the distances' uncertainties.
func (d *Dataset) typicalTape() float64 {
	var sum float64
	for _, p := range d.Points {
		sum += p.Tape * p.Tape
	}
	return math.Sqrt(sum / float64(len(d.Points)))
}
