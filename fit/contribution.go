package fit

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// cause is what an error of the result comes from.
type cause int

const (
	byNoise cause = iota
	byLeftover
	byRoom
	byTape
	bySetback
	byRadius
	bySpeed
	byClock
	causes
)

// spread is a covariance of mix and spacing.
type spread struct{ beta, spacing, both float64 }

func (s spread) plus(t spread) spread {
	return spread{s.beta + t.beta, s.spacing + t.spacing, s.both + t.both}
}

// contributions share the covariance of mix and spacing out among its causes. The
// estimate is linear in the observations, pseudo-observations of what is known
// beforehand included, so that the law of propagation (JCGM 100:2008, eq. 13) gives
// for a set g of observations, J being the Jacobian and C = (JᵀJ)⁻¹,
//
//	V_g = C·J_gᵀJ_g·C,   Σ V_g = C.
//
// A datum is shared among noise, room and what else is left over in proportion to
// the variances it was given; what the variance was raised by, for residuals that are
// alike or too large, is no noise and goes to the other two.
func (p *separable) contributions(x []float64, c *mat.SymDense) [causes]spread {
	var out [causes]spread
	j := mat.NewDense(p.size(), p.at.n, nil)
	p.jacobian(j, x)
	of := func(row int) spread {
		var b, d float64
		for k, v := range j.RawRowView(row) {
			b += c.At(p.at.beta, k) * v
			d += c.At(p.at.spacing, k) * v
		}
		return spread{b * b, d * d, b * d}
	}
	add := func(to cause, s spread, share float64) {
		out[to] = out[to].plus(spread{s.beta * share, s.spacing * share, s.both * share})
	}
	row := 0
	for i := range p.data.Points {
		for n := range p.data.Hz {
			s := of(row).plus(of(row + 1))
			row += 2
			noise, leftover, room := p.data.shares(i, n)
			add(byNoise, s, noise)
			add(byLeftover, s, leftover)
			add(byRoom, s, room)
		}
	}
	add(bySetback, of(row), 1)
	add(byRadius, of(row+1), 1)
	add(bySpeed, of(row+2), 1)
	for i := range p.data.Points {
		add(byTape, of(row+3+i), 1)
	}
	for i := range p.drifting {
		add(byClock, of(row+3+len(p.data.Points)+i), 1)
	}
	return out
}

// shares of a datum's variance: of noise, of what is left over relative to the
// response, and of the room; they add up to 1.
func (d *Dataset) shares(i, n int) (noise, leftover, room float64) {
	total := d.variance(i, n)
	noise = math.Min(d.Points[i].Variance[n]/total, 1)
	l, r := d.leftover(i, n), d.room(n)
	if l+r == 0 {
		return noise, 1 - noise, 0
	}
	return noise, (1 - noise) * l / (l + r), (1 - noise) * r / (l + r)
}
