package fit

import (
	"math"
	"math/cmplx"

	"standoff/fit/lsq"
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
	data     *Dataset
	model    Model
	at       layout
	sigma    [][]float64 // [point][frequency], of one quadrature
	drifting int         // number of drifts
	nodes    []int       // rings of the source for each point: the same whatever x is

	// Filled by evaluate, for the last x.
	h     [][]complex128 // [point][frequency], divided by sigma
	sound [][]entries    // what h is mixed of
	s     []complex128   // far response
	power []float64      // Σ|h|²
}

// layout says where each parameter is in the vector.
type layout struct{ beta, spacing, setback, radius, speed, tape, delay, drift, gain, n int }

func newSeparable(d *Dataset, m Model) *separable {
	p := &separable{data: d, model: m}
	n := len(d.Points)
	p.at = layout{beta: 0, spacing: 1, setback: 2, radius: 3, speed: 4, tape: 5, delay: 5 + n, n: 5 + n}
	if d.FreeClock {
		p.at.n += n - 1 // the first response's delay is part of S
	}
	p.layDrifts()
	if p.at.gain = -1; d.louder > 0 {
		p.at.gain = p.at.n
		p.at.n++
	}
	p.sigma, p.h, p.sound = make([][]float64, n), p.grid(), make([][]entries, n)
	for i, pt := range d.Points {
		p.sigma[i], p.sound[i] = make([]float64, len(d.Hz)), make([]entries, len(d.Hz))
		for j := range d.Hz {
			p.sigma[i][j] = math.Sqrt(d.variance(i, j) / 2)
		}
		p.nodes = append(p.nodes, nodesFor(pt.Nominal+d.Setback-typicalBody, d.Radius))
	}
	p.s = make([]complex128, len(d.Hz))
	p.power = make([]float64, len(d.Hz))
	return p
}

// typicalBody is how far a capsule reaches from its centre to its front, m.
const typicalBody = 0.009

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

// fill computes h for x; sound is where its pressures go, nil for nowhere.
func (p *separable) fill(h [][]complex128, sound [][]entries, x []float64) {
	e := newEvaluator(p.model, p.acoustics(x), p.data.Hz)
	for i := range p.data.Points {
		r := p.distance(x, i)
		for j := range p.data.Hz {
			s := e.entries(j, r, p.nodes[i])
			if sound != nil {
				sound[i][j] = s
			}
			h[i][j] = scaled(e.mix(j, s), 1/p.sigma[i][j])
		}
	}
	p.altered(h, x)
}

// remix computes h for an x that differs from the last one evaluated in its mix only.
func (p *separable) remix(h [][]complex128, x []float64) {
	e := newMixer(p.model, p.acoustics(x), p.data.Hz)
	for i := range p.data.Points {
		for j := range p.data.Hz {
			h[i][j] = scaled(e.mix(j, p.sound[i][j]), 1/p.sigma[i][j])
		}
	}
	p.altered(h, x)
}

// altered gives each response of a free clock its delay, and one whose gain is free
// its gain.
func (p *separable) altered(h [][]complex128, x []float64) {
	if p.at.gain >= 0 {
		for j, v := range h[p.data.louder-1] {
			h[p.data.louder-1][j] = scaled(v, x[p.at.gain])
		}
	}
	for i := range h {
		if t, drift := p.delayOf(x, i), p.driftOf(x, i); t != 0 || drift != 0 {
			for j, f := range p.data.Hz {
				h[i][j] *= cmplx.Rect(1, -2*math.Pi*f*(t+drift*p.data.passes(f)))
			}
		}
	}
}

// evaluate fills h, s and power.
func (p *separable) evaluate(x []float64) {
	p.fill(p.h, p.sound, x)
	p.eliminate()
}

// eliminate gives S its least-squares value for the h that is there.
func (p *separable) eliminate() {
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
	p.compare(dst, x)
}

// compare fills dst for the h and S that are there.
func (p *separable) compare(dst, x []float64) {
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

func (p *separable) grid() [][]complex128 {
	out := make([][]complex128, len(p.data.Points))
	for i := range out {
		out[i] = make([]complex128, len(p.data.Hz))
	}
	return out
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
	if d.pressure {
		lower[p.at.beta], upper[p.at.beta] = 0, 0
		if p.model.Body == Open {
			upper[p.at.spacing] = lower[p.at.spacing]
		}
	}
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
	if p.at.gain >= 0 {
		x[p.at.gain] = 1
	}
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
	if p.at.gain >= 0 {
		s[p.at.gain] = 1
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
	p.fill(p.h, nil, x)
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
