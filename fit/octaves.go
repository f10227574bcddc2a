package fit

import (
	"math"

	"standoff/fit/lsq"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// OctaveMix is the mix in one octave, everything else as the whole band settles it.
type OctaveMix struct {
	From             float64 `json:"from_hz"`
	To               float64 `json:"to_hz"`
	GradientFraction Value   `json:"gradient_fraction"`
}

// octaveCentres are the octaves in which the mix is looked for, Hz.
var octaveCentres = []float64{63, 125, 250, 500, 1000, 2000, 4000, 8000}

// octaves are the mixes of all octaves with data in them. The far response S is
// free at every frequency, as in the joint fit; spacing, distances, source and air
// stay where the joint fit has them, and their covariance C enters each mix by the
// law of propagation: with the column j of the mix and J of the others,
//
//	∂β/∂θ = −(jᵀj)⁻¹ jᵀJ,   u² = (jᵀj)⁻¹ + ∂β/∂θ·C·∂β/∂θᵀ.
func (a *Analysis) octaves() []OctaveMix {
	out := []OctaveMix{}
	for _, centre := range octaveCentres {
		from, to := centre/math.Sqrt2, centre*math.Sqrt2
		part := a.Data.between(from, to)
		if len(part.Hz) == 0 {
			continue
		}
		out = append(out, OctaveMix{From: from, To: to, GradientFraction: a.octave(part)})
	}
	return out
}

func (a *Analysis) octave(part *Dataset) Value {
	best := a.Best()
	models := []Model{best.Model}
	if best.Model.Form == PhaseShift {
		// Near an omni the phase-shift form ends.
		models = append(models, Model{Form: Summed, Body: best.Model.Body, Source: best.Model.Source})
	}
	for _, m := range models {
		if beta, u, ok := a.mixWithin(m, part); ok {
			return mixValue(beta, standard(math.Hypot(u, a.Data.MethodMix)))
		}
	}
	return unresolved("1")
}

// mixWithin fits the mix alone; ok is false where it ends on a bound.
func (a *Analysis) mixWithin(m Model, part *Dataset) (beta, u float64, ok bool) {
	best := a.Best()
	p := newSeparable(part, m)
	problem := p.problem()
	for i := range best.x {
		if i != p.at.beta {
			problem.Lower[i], problem.Upper[i] = best.x[i], best.x[i]
		}
	}
	r, err := lsq.Solve(problem, best.x, lsq.Settings{MaxIterations: 40, FTol: 1e-10, XTol: 1e-9, Scale: p.scale()})
	if err != nil || r.AtBound[p.at.beta] != 0 || !r.Status.Good() {
		return 0, 0, false
	}
	raised := math.Max(r.ReducedChiSquare(p.observations()-2*len(part.Hz)-1), 1)
	return r.X[p.at.beta], math.Sqrt(best.Alike*raised*p.alone(r.X) + p.carried(r.X, best.full)), true
}

// alone is (jᵀj)⁻¹ of the mix.
func (p *separable) alone(x []float64) float64 {
	j := mat.NewDense(p.size(), p.at.n, nil)
	p.jacobian(j, x)
	col := mat.NewVecDense(p.size(), mat.Col(nil, p.at.beta, j))
	return 1 / mat.Dot(col, col)
}

// carried is the variance that the other parameters' covariance brings in.
func (p *separable) carried(x []float64, c *mat.SymDense) float64 {
	if c == nil {
		return 0
	}
	j := mat.NewDense(p.size(), p.at.n, nil)
	p.jacobian(j, x)
	col := mat.NewVecDense(p.size(), mat.Col(nil, p.at.beta, j))
	power := mat.Dot(col, col)
	by := mat.NewDense(1, p.at.n, nil)
	for k := range p.at.n {
		if k != p.at.beta {
			by.Set(0, k, -mat.Dot(col, j.ColView(k))/power)
		}
	}
	return propagate(by, c).At(0, 0)
}

// between is the dataset from one frequency to below another.
func (d *Dataset) between(from, to float64) *Dataset {
	a := 0
	for a < len(d.Hz) && d.Hz[a] < from {
		a++
	}
	b := a
	for b < len(d.Hz) && d.Hz[b] < to {
		b++
	}
	out := *d
	out.Hz = d.Hz[a:b]
	if d.level != nil {
		out.level = d.level[a:b]
	}
	out.Points = append([]Point(nil), d.Points...)
	for i := range out.Points {
		out.Points[i].Value = out.Points[i].Value[a:b]
		out.Points[i].Variance = out.Points[i].Variance[a:b]
	}
	return &out
}

// By how much the mixes of octaves have to differ before it is said.
const (
	variesBy     = 0.05
	variesChance = 0.001 // of saying so when nothing does
)

// varies reports the octaves with the least and the largest mix when the octaves
// that hold a mix do not agree with a common one.
func varies(octaves []OctaveMix) (least, most OctaveMix, yes bool) {
	var held []OctaveMix
	for _, o := range octaves {
		if o.GradientFraction.Resolved {
			held = append(held, o)
		}
	}
	if len(held) < 2 {
		return least, most, false
	}
	weight := func(o OctaveMix) float64 {
		u := *o.GradientFraction.Expanded / o.GradientFraction.CoverageFactor
		return 1 / (u * u)
	}
	var sum, weights, chi float64
	least, most = held[0], held[0]
	for _, o := range held {
		v := *o.GradientFraction.Value
		sum, weights = sum+v*weight(o), weights+weight(o)
		if v < *least.GradientFraction.Value {
			least = o
		}
		if v > *most.GradientFraction.Value {
			most = o
		}
	}
	for _, o := range held {
		off := *o.GradientFraction.Value - sum/weights
		chi += off * off * weight(o)
	}
	limit := distuv.ChiSquared{K: float64(len(held) - 1)}.Quantile(1 - variesChance)
	return least, most, chi > limit && *most.GradientFraction.Value-*least.GradientFraction.Value > variesBy
}
