package fit

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"slices"

	"standoff/fit/lsq"

	"gonum.org/v1/gonum/mat"
)

// Joint is one model fitted to all distances together.
type Joint struct {
	Model     Model
	Acoustics Acoustics
	Setback   float64
	Distances []float64 // fitted, source to capsule centre, m
	Delays    []float64 // of each response, s; zero with a common clock
	Drifts    []float64 // what was left of each clock's offset, relative

	ChiSquare float64 // of the data, priors left out
	Freedom   int     // degrees of freedom of the data
	Status    lsq.Status
	// Alike is how many neighbouring frequencies deviate alike: the integrated
	// correlation of the residuals, at least 1. What is left of a room or of a
	// model is no noise; that many points count as one.
	Alike float64

	// Standard uncertainties, the variance of the data scaled so that the
	// reduced chi-square is at most 1, and by Alike. Zero at a bound.
	BetaSE, SpacingSE, SetbackSE, RadiusSE, SpeedSE float64
	DistanceSE                                      []float64
	BetaAtBound, SpacingAtBound                     bool

	far []complex128 // S on the dataset's grid
	// Of S: how far the fit holds it, E|error|².
	farVariance []float64
	covariance  [2][2]float64  // of β and d
	parts       [causes]spread // what it comes from
	full        *mat.SymDense  // of all parameters
	data        *Dataset
	misfit      []float64 // reduced chi-square of each point
	x           []float64
}

// ReducedChiSquare of the data.
func (j *Joint) ReducedChiSquare() float64 { return j.ChiSquare / math.Max(float64(j.Freedom), 1) }

// Misfit is the sum of squares that the fit made least: of the data over their
// variances and of what is known beforehand.
func (j *Joint) Misfit() float64 { return newSeparable(j.data, j.Model).misfit(j.x) }

// FitModel fits one model to a dataset from several starts and keeps the best.
func FitModel(d *Dataset, m Model) (*Joint, error) { return fitModel(d, m, nil) }

// fitModel starts from an earlier solution where there is one.
func fitModel(d *Dataset, m Model, before *Joint) (*Joint, error) {
	if err := m.validate(); err != nil {
		return nil, err
	}
	if err := d.Validate(); err != nil {
		return nil, err
	}
	p := newSeparable(d, m)
	starts := [][]float64{}
	if before != nil && before.Status.Good() && len(before.x) == p.at.n {
		starts = append(starts, before.x)
	} else {
		starts = p.scan(2)
	}
	best, err := solveFrom(p, starts)
	if err != nil {
		return nil, err
	}
	return summarise(d, m, best)
}

// scan looks over a coarse grid of mixes and spacings, everything else as it is
// believed beforehand, and returns the best places to start from. A null of the
// far form inside the band makes valleys that a single start would be caught in.
func (p *separable) scan(keep int) [][]float64 {
	lower, upper := p.bounds()
	type place struct {
		x    []float64
		cost float64
	}
	var places []place
	res := make([]float64, p.size())
	for spacing := 0.006; spacing < 0.07; spacing *= 1.25 {
		d := math.Min(spacing, upper[p.at.spacing])
		p.evaluate(p.start(0.5, d))
		for _, beta := range []float64{0.02, 0.12, 0.22, 0.32, 0.45, 0.6, 0.8, 1} {
			x := p.start(math.Max(beta, lower[p.at.beta]), d)
			p.settleDelays(x)
			p.remix(p.h, x)
			p.eliminate()
			p.compare(res, x)
			var cost float64
			for _, r := range res {
				cost += r * r
			}
			if !math.IsNaN(cost) {
				places = append(places, place{x, cost})
			}
		}
	}
	slices.SortStableFunc(places, func(a, b place) int { return cmp.Compare(a.cost, b.cost) })
	var out [][]float64
	for _, pl := range places[:min(keep, len(places))] {
		out = append(out, pl.x)
	}
	return out
}

// solveFrom solves from each start and keeps the best.
func solveFrom(p *separable, starts [][]float64) (*lsq.Result, error) {
	var best *lsq.Result
	for _, x := range starts {
		r, err := solve(p, p.problem(), x)
		if err != nil {
			return nil, err
		}
		if best == nil || r.Cost < best.Cost*(1-1e-9) {
			best = r
		}
	}
	if best == nil {
		return nil, errors.New("the model is not finite anywhere near what the rig says")
	}
	return best, nil
}

func solve(p *separable, problem lsq.Problem, x []float64) (*lsq.Result, error) {
	r, err := lsq.Solve(problem, x, lsq.Settings{MaxIterations: 80, FTol: 1e-13, XTol: 1e-11, Scale: p.scale()})
	if err != nil {
		return nil, fmt.Errorf("fit of %v: %w", p.model, err)
	}
	return r, nil
}

// summarise makes a Joint of a solution. Where the misfit is larger than the
// noise explains, the covariance is taken again with the data's variance raised
// to match; priors keep their own.
func summarise(d *Dataset, m Model, r *lsq.Result) (*Joint, error) {
	p := newSeparable(d, m)
	res := make([]float64, p.size())
	p.residuals(res, r.X)
	out := &Joint{Model: m, Acoustics: p.acoustics(r.X), Setback: r.X[p.at.setback], Status: r.Status, data: d, x: r.X}
	out.ChiSquare, out.misfit = chiSquares(res[:p.observations()], len(d.Points))
	out.Freedom = p.observations() - 2*len(d.Hz) - 2
	out.Alike = alike(res[:p.observations()], len(d.Points))
	inflate := math.Max(out.ReducedChiSquare(), 1) * out.Alike
	q := newSeparable(d.scaledBy(inflate), m)
	again, err := lsq.Solve(q.problem(), r.X, lsq.Settings{MaxIterations: 25, FTol: 1e-8, XTol: 1e-7, Scale: q.scale()})
	if err != nil {
		return nil, fmt.Errorf("covariance of %v: %w", m, err)
	}
	out.errors(q, again)
	out.places(p, r.X)
	p.evaluate(r.X)
	out.far = append([]complex128(nil), p.s...)
	for _, power := range p.power {
		out.farVariance = append(out.farVariance, 2*inflate/power)
	}
	return out, nil
}

func chiSquares(res []float64, points int) (total float64, each []float64) {
	each = make([]float64, points)
	n := len(res) / points
	for i := range each {
		for _, v := range res[i*n : (i+1)*n] {
			each[i] += v * v
		}
		total += each[i]
		// S takes its share of the freedom from every point alike.
		each[i] /= float64(n) * (1 - 1/float64(points))
	}
	return total, each
}

// alike is 1 + 2Σρ_k over the residuals' correlation ρ_k at the distance of k
// frequencies, up to where it no longer stands clear of what white noise has by
// chance (after the initial positive sequence of C. J. Geyer, Stat. Sci. 7, 473
// (1992)).
func alike(res []float64, points int) float64 {
	n := len(res) / points // both quadratures, interleaved
	at := func(lag int) (sum float64) {
		for i := range points {
			r := res[i*n : (i+1)*n]
			for k := 0; k+2*lag < n; k++ {
				sum += r[k] * r[k+2*lag]
			}
		}
		return sum
	}
	total, tau := at(0), 1.0
	for lag := 1; lag < n/4; lag++ {
		rho := at(lag) / total
		if !(rho > 2.5/math.Sqrt(float64(len(res)))) {
			break
		}
		tau += 2 * rho
	}
	return tau
}

func (j *Joint) errors(p *separable, r *lsq.Result) {
	j.BetaAtBound = r.AtBound[p.at.beta] != 0
	j.SpacingAtBound = r.AtBound[p.at.spacing] != 0
	j.DistanceSE = make([]float64, len(p.data.Points))
	c := r.Covariance
	if c == nil {
		j.Status = lsq.NoEffect
		return
	}
	se := func(i int) float64 { return math.Sqrt(math.Max(c.At(i, i), 0)) }
	j.BetaSE, j.SpacingSE = se(p.at.beta), se(p.at.spacing)
	j.SetbackSE, j.RadiusSE, j.SpeedSE = se(p.at.setback), se(p.at.radius), se(p.at.speed)
	j.full = c
	j.parts = p.contributions(r.X, c)
	j.covariance = [2][2]float64{{c.At(0, 0), c.At(0, 1)}, {c.At(1, 0), c.At(1, 1)}}
	for i := range j.DistanceSE {
		t, s := p.at.tape+i, p.at.setback
		j.DistanceSE[i] = math.Sqrt(math.Max(c.At(t, t)+c.At(s, s)+2*c.At(t, s), 0))
	}
}

func (j *Joint) places(p *separable, x []float64) {
	for i := range p.data.Points {
		j.Distances = append(j.Distances, p.distance(x, i))
		j.Delays = append(j.Delays, p.delayOf(x, i))
		j.Drifts = append(j.Drifts, p.driftOf(x, i))
	}
}
