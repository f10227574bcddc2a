package fit

import (
	"math"
	"sync"

	"standoff/fit/lsq"
)

// Profiles are the profile likelihoods of mix and spacing.
type Profiles struct {
	GradientFraction Profile `json:"gradient_fraction"`
	PortSpacing      Profile `json:"port_spacing_m"`
}

// Profile says how well each value of a parameter fits when everything else is
// fitted again (S. A. Murphy, A. W. van der Vaart, J. Am. Stat. Assoc. 95, 449
// (2000)). Excess is the misfit above the least, in units in which 1 is one standard
// uncertainty squared and 3.84 the limit of 95 %. It is the data's word alone, without
// what the budget adds for model form, band and method.
type Profile struct {
	Value  []float64 `json:"value"`
	Excess []float64 `json:"excess"`
}

// oneSided is the excess at a one-sided limit of 95 %: 1.645².
const oneSided = 2.7055

// profiles follows mix and spacing to both sides of the chosen solution.
func (a *Analysis) profiles() Profiles {
	best := a.Best()
	p := newSeparable(a.Data, best.Model)
	lower, upper := p.bounds()
	var out Profiles
	var wg sync.WaitGroup
	wg.Go(func() {
		out.GradientFraction = best.profile(p.at.beta, best.BetaSE, math.Max(lower[p.at.beta], -0.1), math.Min(upper[p.at.beta], 1.1))
	})
	wg.Go(func() {
		out.PortSpacing = best.profile(p.at.spacing, best.SpacingSE, lower[p.at.spacing], upper[p.at.spacing])
	})
	wg.Wait()
	return out
}

// A profile goes profileSteps to either side, up to profileReach standard errors,
// or to the bounds where there is no standard error or the data hold next to nothing.
const (
	profileSteps = 6
	profileReach = 3.5
)

// profile of one parameter between two bounds.
func (j *Joint) profile(param int, se, lower, upper float64) Profile {
	inflate := math.Max(j.ReducedChiSquare(), 1) * j.Alike
	p := newSeparable(j.data.scaledBy(inflate), j.Model)
	at := j.x[param]
	ends := [2]float64{lower, upper}
	if se > 0 {
		ends[0], ends[1] = math.Max(lower, at-profileReach*se), math.Min(upper, at+profileReach*se)
	}
	left := p.follow(param, j.x, steps(at, ends[0]))
	right := p.follow(param, j.x, steps(at, ends[1]))
	var out Profile
	for i := len(left) - 1; i >= 0; i-- {
		out.Value, out.Excess = append(out.Value, left[i].at), append(out.Excess, left[i].misfit)
	}
	out.Value, out.Excess = append(out.Value, at), append(out.Excess, p.misfit(j.x))
	for _, s := range right {
		out.Value, out.Excess = append(out.Value, s.at), append(out.Excess, s.misfit)
	}
	least := math.Inf(1)
	for _, e := range out.Excess {
		least = math.Min(least, e)
	}
	for i := range out.Excess {
		out.Excess[i] -= least
	}
	return out
}

// steps lead from a value to an end, the value itself left out.
func steps(from, to float64) []float64 {
	if from == to {
		return nil
	}
	out := make([]float64, profileSteps)
	for i := range out {
		out[i] = from + (to-from)*float64(i+1)/profileSteps
	}
	return out
}

type profilePoint struct{ at, misfit float64 }

// follow holds one parameter at each of the values and fits the others again, each
// time from where the last fit ended. It stops where a fit cannot be made.
func (p *separable) follow(param int, from, values []float64) []profilePoint {
	x := append([]float64(nil), from...)
	var out []profilePoint
	for _, v := range values {
		x[param] = v
		problem := p.problem()
		problem.Lower[param], problem.Upper[param] = v, v
		r, err := lsq.Solve(problem, x, lsq.Settings{MaxIterations: 30, FTol: 1e-7, XTol: 1e-6, Scale: p.scale()})
		if err != nil || math.IsNaN(r.Cost) {
			break
		}
		copy(x, r.X)
		out = append(out, profilePoint{v, 2 * r.Cost})
	}
	return out
}

// misfit is the sum of squares at x, priors included.
func (p *separable) misfit(x []float64) float64 {
	res := make([]float64, p.size())
	p.residuals(res, x)
	var sum float64
	for _, r := range res {
		sum += r * r
	}
	return sum
}

// above is the largest value that the data do not exclude at the excess, nil when
// they exclude none up to the profile's end; below is the smallest.
func (p Profile) above(excess float64) *float64 {
	least := p.least()
	for i := least + 1; i < len(p.Value); i++ {
		if p.Excess[i] > excess {
			return ptr(crossingAt(p, i-1, i, excess))
		}
	}
	return nil
}

func (p Profile) below(excess float64) *float64 {
	for i := p.least() - 1; i >= 0; i-- {
		if p.Excess[i] > excess {
			return ptr(crossingAt(p, i+1, i, excess))
		}
	}
	return nil
}

func (p Profile) least() int {
	at := 0
	for i, e := range p.Excess {
		if e < p.Excess[at] {
			at = i
		}
	}
	return at
}

// crossingAt interpolates by the square root, which is linear near the minimum.
func crossingAt(p Profile, inside, outside int, excess float64) float64 {
	in, out := math.Sqrt(math.Max(p.Excess[inside], 0)), math.Sqrt(p.Excess[outside])
	t := (math.Sqrt(excess) - in) / (out - in)
	return p.Value[inside] + t*(p.Value[outside]-p.Value[inside])
}

// limits are the one-sided 95 % limits of a parameter that is not resolved, over all
// that its bounds allow; nil where the data exclude nothing. Of the models that the
// data cannot refuse the widest counts.
func (a *Analysis) limits(spacing bool) (below, above *float64) {
	for i, j := range a.equals() {
		p := newSeparable(a.Data, j.Model)
		lower, upper := p.bounds()
		param := p.at.beta
		if spacing {
			param = p.at.spacing
		}
		wide := j.profile(param, 0, lower[param], upper[param])
		b, t := wide.below(oneSided), wide.above(oneSided)
		if i == 0 {
			below, above = b, t
			continue
		}
		below, above = widest(below, b, -1), widest(above, t, 1)
	}
	return below, above
}

// widest of two limits, nil being no limit; towards −1 the lower.
func widest(a, b *float64, towards float64) *float64 {
	if a == nil || b == nil {
		return nil
	}
	if (*b-*a)*towards > 0 {
		return b
	}
	return a
}
