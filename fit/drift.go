package fit

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/mat"
)

// What is left of the offset of a recorder's clock after it was corrected is a
// parameter of each response, with a prior: ε_i = 0 ± Point.Clock. It delays the
// frequency f by ε_i·L·ln(f/f0), the time at which the sweep of the rate L passes it;
// f0 is no more than a delay, which a free clock has anyway.

const (
	surelyNoDrift = 1e-9   // standard, where one response has none and others have
	driftMiddle   = 1000.0 // f0, Hz
)

// passes is the time in s, after that of f0, at which the sweep passes f.
func (d *Dataset) passes(f float64) float64 { return d.SweepRate * math.Log(f/driftMiddle) }

// drifts is the number of drift parameters: none where clocks are common or certain.
func (p *separable) drifts() int {
	if !p.data.FreeClock || !(p.data.SweepRate > 0) {
		return 0
	}
	for _, pt := range p.data.Points {
		if pt.Clock > surelyNoDrift {
			return len(p.data.Points)
		}
	}
	return 0
}

func (p *separable) layDrifts() {
	p.at.drift, p.drifting = p.at.n, p.drifts()
	p.at.n += p.drifting
}

func (p *separable) driftOf(x []float64, i int) float64 {
	if i >= p.drifting {
		return 0
	}
	return x[p.at.drift+i]
}

func (p *separable) driftPriors(dst, x []float64) {
	for i := range p.drifts() {
		dst[i] = x[p.at.drift+i] / math.Max(p.data.Points[i].Clock, surelyNoDrift)
	}
}

// driftColumns are ∂h/∂ε = −jω·L·ln(f/f0)·h and the priors' part of the Jacobian.
func (p *separable) driftColumns(dst *mat.Dense) {
	first := p.observations() + 3 + len(p.data.Points)
	for i := range p.drifts() {
		g := p.grid()
		for j, f := range p.data.Hz {
			g[i][j] = complex(0, -2*math.Pi*f*p.data.passes(f)) * p.h[i][j]
		}
		p.project(dst, p.at.drift+i, g, i)
		dst.Set(first+i, p.at.drift+i, 1/math.Max(p.data.Points[i].Clock, surelyNoDrift))
	}
}

// steadied is point i without the drift that the joint fit found. The others' fit
// without it may have put a drift that all share into S or not: what it did is seen in
// the drifts of the others.
func (d *Dataset) steadied(i int, all, others *Joint) Point {
	drift := all.Drifts[i]
	for k, v := range others.Drifts {
		at := k
		if k >= i {
			at++
		}
		drift += (v - all.Drifts[at]) / float64(len(others.Drifts))
	}
	p := d.Points[i]
	if drift == 0 {
		return p
	}
	p.Value = append([]complex128(nil), p.Value...)
	for j, f := range d.Hz {
		p.Value[j] *= cmplx.Rect(1, 2*math.Pi*f*drift*d.passes(f))
	}
	return p
}
