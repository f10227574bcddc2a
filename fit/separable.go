package fit

import (
	"math"
	"math/cmplx"

	"standoff/fit/lsq"

	"gonum.org/v1/gonum/mat"
)

// separable is the joint fit as a least-squares problem. With the model
//
//	Y_i(f) = S(f)·H(f, r_i)·e^{−jωt_i} + noise,  r_i = nominal_i + δ + ε_i
//
// the complex far response S is linear and has a closed form for each set of the
// other parameters; it is eliminated at each frequency (variable projection:
// G. H. Golub, V. Pereyra, SIAM J. Numer. Anal. 10, 413 (1973)) and the Jacobian
// is Kaufman's (L. Kaufman, BIT 15, 49 (1975)):
//
//	r = (I − hh⁺)·y,  ∂r ≈ −(I − hh⁺)·∂h·S,  h_i = H_i/σ_i,  y_i = Y_i/σ_i.
//
// What is known beforehand enters as pseudo-observations (value − prior)/u.
type separable struct {
	data  *Dataset
	model Model
	at    layout
	sigma [][]float64 // [point][frequency], of one quadrature

	// Filled by evaluate, for the last x.
	h     [][]complex128 // [point][frequency], divided by sigma
	s     []complex128   // far response
	power []float64      // Σ|h|²
}

// layout says where each parameter is in the vector.
type layout struct{ beta, spacing, setback, radius, speed, tape, delay, drift, n int }

func newSeparable(d *Dataset, m Model) *separable {
	p := &separable{data: d, model: m}
	n := len(d.Points)
	p.at = layout{beta: 0, spacing: 1, setback: 2, radius: 3, speed: 4, tape: 5, delay: 5 + n, n: 5 + n}
	if d.FreeClock {
		p.at.n += n - 1 // the first response's delay is part of S
	}
	p.layDrifts()
	p.sigma = make([][]float64, n)
	p.h = make([][]complex128, n)
	for i := range d.Points {
		p.sigma[i] = make([]float64, len(d.Hz))
		for j := range d.Hz {
			p.sigma[i][j] = math.Sqrt(d.variance(i, j) / 2)
		}
		p.h[i] = make([]complex128, len(d.Hz))
	}
	p.s = make([]complex128, len(d.Hz))
	p.power = make([]float64, len(d.Hz))
	return p
}

func (p *separable) acoustics(x []float64) Acoustics {
	return Acoustics{Beta: x[p.at.beta], Spacing: x[p.at.spacing], Radius: x[p.at.radius], Speed: x[p.at.speed]}
}

// distance of point i, source to capsule centre, kept clear of the source.
func (p *separable) distance(x []float64, i int) float64 {
	r := p.data.Points[i].Nominal + x[p.at.setback] + x[p.at.tape+i]
	return math.Max(r, p.model.nearestReach(x[p.at.spacing])*1.001)
}

func (p *separable) delayOf(x []float64, i int) float64 {
	if !p.data.FreeClock || i == 0 {
		return 0
	}
	return x[p.at.delay+i-1]
}

// fill computes h for x.
func (p *separable) fill(h [][]complex128, x []float64) {
	e := newEvaluator(p.model, p.acoustics(x), p.data.Hz)
	for i := range p.data.Points {
		r, t, drift := p.distance(x, i), p.delayOf(x, i), p.driftOf(x, i)
		for j, f := range p.data.Hz {
			v := scaled(e.output(j, r), 1/p.sigma[i][j])
			if t != 0 || drift != 0 {
				v *= cmplx.Rect(1, -2*math.Pi*f*(t+drift*p.data.passes(f)))
			}
			h[i][j] = v
		}
	}
}

// evaluate fills h, s and power.
func (p *separable) evaluate(x []float64) {
	p.fill(p.h, x)
	for j := range p.data.Hz {
		var top complex128
		var power float64
		for i, pt := range p.data.Points {
			h := p.h[i][j]
			top += cmplx.Conj(h) * scaled(pt.Value[j], 1/p.sigma[i][j])
			power += real(h)*real(h) + imag(h)*imag(h)
		}
		p.s[j], p.power[j] = top/complex(power, 0), power
	}
}

func (p *separable) observations() int { return 2 * len(p.data.Points) * len(p.data.Hz) }

// size is the number of residuals: both quadratures, then the priors.
func (p *separable) size() int { return p.observations() + 3 + len(p.data.Points) + p.drifts() }

func (p *separable) residuals(dst, x []float64) {
	p.evaluate(x)
	at := 0
	for i, pt := range p.data.Points {
		for j := range p.data.Hz {
			r := scaled(pt.Value[j], 1/p.sigma[i][j]) - p.h[i][j]*p.s[j]
			dst[at], dst[at+1] = real(r), imag(r)
			at += 2
		}
	}
	d := p.data
	dst[at] = (x[p.at.setback] - d.Setback) / d.SetbackUncertainty
	dst[at+1] = (x[p.at.radius] - d.Radius) / d.RadiusUncertainty
	dst[at+2] = (x[p.at.speed] - d.Speed) / d.SpeedUncertainty
	for i, pt := range d.Points {
		dst[at+3+i] = x[p.at.tape+i] / pt.Tape
	}
	p.driftPriors(dst[at+3+len(d.Points):], x)
}

// jacobian is Kaufman's, with forward differences of the model only.
func (p *separable) jacobian(dst *mat.Dense, x []float64) {
	p.evaluate(x)
	dist := p.derivative(x, p.at.setback, 2e-8)
	p.project(dst, p.at.setback, dist, -1)
	for i := range p.data.Points {
		p.project(dst, p.at.tape+i, dist, i)
	}
	p.project(dst, p.at.beta, p.derivative(x, p.at.beta, 1e-6), -1)
	p.project(dst, p.at.spacing, p.derivative(x, p.at.spacing, 2e-8), -1)
	p.project(dst, p.at.speed, p.derivative(x, p.at.speed, 1e-4), -1)
	if p.model.Source == PistonSource {
		p.project(dst, p.at.radius, p.derivative(x, p.at.radius, 2e-8), -1)
	}
	if p.data.FreeClock {
		p.delays(dst)
	}
	p.driftColumns(dst)
	at, d := p.observations(), p.data
	dst.Set(at, p.at.setback, 1/d.SetbackUncertainty)
	dst.Set(at+1, p.at.radius, 1/d.RadiusUncertainty)
	dst.Set(at+2, p.at.speed, 1/d.SpeedUncertainty)
	for i, pt := range d.Points {
		dst.Set(at+3+i, p.at.tape+i, 1/pt.Tape)
	}
}

// derivative of h, which is that of x, by one parameter.
func (p *separable) derivative(x []float64, param int, step float64) [][]complex128 {
	plus := p.grid()
	y := append([]float64(nil), x...)
	y[param] += step
	p.fill(plus, y)
	for i := range plus {
		for j := range plus[i] {
			plus[i][j] = scaled(plus[i][j]-p.h[i][j], 1/step)
		}
	}
	return plus
}

func (p *separable) grid() [][]complex128 {
	out := make([][]complex128, len(p.data.Points))
	for i := range out {
		out[i] = make([]complex128, len(p.data.Hz))
	}
	return out
}

// delays are the columns of the free delays: ∂h/∂t = −jω·h.
func (p *separable) delays(dst *mat.Dense) {
	for i := 1; i < len(p.data.Points); i++ {
		g := p.grid()
		for j, f := range p.data.Hz {
			g[i][j] = complex(0, -2*math.Pi*f) * p.h[i][j]
		}
		p.project(dst, p.at.delay+i-1, g, i)
	}
}

// project writes −(I − hh⁺)·∂h·S as one column; only is the one point that the
// parameter moves, or −1 for all.
func (p *separable) project(dst *mat.Dense, column int, dh [][]complex128, only int) {
	n := len(p.data.Hz)
	for j := range p.data.Hz {
		var along complex128
		for i := range dh {
			if only < 0 || only == i {
				along += cmplx.Conj(p.h[i][j]) * dh[i][j]
			}
		}
		along *= p.s[j] / complex(p.power[j], 0)
		for i := range dh {
			var v complex128
			if only < 0 || only == i {
				v = dh[i][j] * p.s[j]
			}
			v -= p.h[i][j] * along
			row := 2 * (i*n + j)
			dst.Set(row, column, -real(v))
			dst.Set(row+1, column, -imag(v))
		}
	}
}

// problem is the least-squares problem with its bounds.
func (p *separable) problem() lsq.Problem {
	lower, upper := p.bounds()
	return lsq.Problem{Residuals: p.residuals, Jacobian: p.jacobian, M: p.size(), Lower: lower, Upper: upper}
}

// Bounds of the mix. A phase-shift capsule's delay is unbounded for β → 0, so
// that form ends where the summed one takes over.
const (
	lowestSummed     = -0.15
	lowestPhaseShift = 0.08
	highestMix       = 1.25
	smallestSpacing  = 0.001 // m
	largestSpacing   = 0.12  // m
)

func (p *separable) bounds() (lower, upper []float64) {
	lower, upper = make([]float64, p.at.n), make([]float64, p.at.n)
	for i := range lower {
		lower[i], upper[i] = math.Inf(-1), math.Inf(1)
	}
	d := p.data
	lower[p.at.beta], upper[p.at.beta] = lowestSummed, highestMix
	if p.model.Form == PhaseShift {
		lower[p.at.beta] = lowestPhaseShift
	}
	reach := d.nearest() / p.model.nearestReach(1)
	lower[p.at.spacing] = smallestSpacing
	upper[p.at.spacing] = math.Max(math.Min(0.95*reach, largestSpacing), 2*smallestSpacing)
	lower[p.at.radius], upper[p.at.radius] = 0, d.Radius+6*d.RadiusUncertainty
	if p.model.Source == PointSource {
		lower[p.at.radius], upper[p.at.radius] = d.Radius, d.Radius
	}
	lower[p.at.speed], upper[p.at.speed] = d.Speed-6*d.SpeedUncertainty, d.Speed+6*d.SpeedUncertainty
	return lower, upper
}

// start is a first guess: what is known beforehand, with the given mix and
// spacing.
func (p *separable) start(beta, spacing float64) []float64 {
	x := make([]float64, p.at.n)
	d := p.data
	x[p.at.beta], x[p.at.spacing] = beta, spacing
	x[p.at.setback], x[p.at.radius], x[p.at.speed] = d.Setback, d.Radius, d.Speed
	return x
}

func (p *separable) scale() []float64 {
	s := make([]float64, p.at.n)
	for i := range s {
		s[i] = 1e-5 // delays, s
	}
	d := p.data
	s[p.at.beta], s[p.at.spacing] = 0.1, 0.01
	s[p.at.setback], s[p.at.radius], s[p.at.speed] = d.SetbackUncertainty, d.RadiusUncertainty, d.SpeedUncertainty
	for i, pt := range d.Points {
		s[p.at.tape+i] = pt.Tape
	}
	for i := range p.drifts() {
		s[p.at.drift+i] = math.Max(d.Points[i].Clock, surelyNoDrift)
	}
	return s
}

// settleDelays gives each response of a free clock the delay at which it lines up
// with the first: the weighted slope of the phase between what is measured and
// what the model says.
func (p *separable) settleDelays(x []float64) {
	if !p.data.FreeClock {
		return
	}
	p.fill(p.h, x)
	first := p.data.Points[0]
	for i := 1; i < len(p.data.Points); i++ {
		ratio := make([]complex128, len(p.data.Hz))
		for j := range ratio {
			// Measured against model, relative to the first response.
			ratio[j] = p.data.Points[i].Value[j] * cmplx.Conj(first.Value[j]) * cmplx.Conj(p.h[i][j]) * p.h[0][j]
		}
		x[p.at.delay+i-1] = phaseSlope(ratio, p.data.Hz)
	}
}

// phaseSlope is the delay t in s, within some ms, that makes Σ z·e^{jωt}/|z| largest, found by
// search and refinement.
func phaseSlope(z []complex128, hz []float64) float64 {
	score := func(t float64) float64 {
		var s complex128
		for j, v := range z {
			if v != 0 {
				s += v / complex(cmplx.Abs(v), 0) * cmplx.Rect(1, 2*math.Pi*hz[j]*t)
			}
		}
		return real(s)
	}
	best, at := math.Inf(-1), 0.0
	step := 0.1 / hz[len(hz)-1]
	for i := -60; i <= 60; i++ {
		if s := score(float64(i) * step); s > best {
			best, at = s, float64(i)*step
		}
	}
	for ; step > 1e-9; step /= 2 {
		for _, t := range []float64{at - step, at + step} {
			if s := score(t); s > best {
				best, at = s, t
			}
		}
	}
	return at
}
