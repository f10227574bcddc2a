package bench

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// ring is a circle of monopoles in the plane of the baffle, around the axis.
type ring struct {
	radius float64 // m
	weight float64 // share of the source's volume velocity; they add up to 1
}

// rings cut a flat piston of the given radius in m into rings. A point on the
// axis has the same distance to all monopoles of a ring, so that no angles are
// needed. The nodes are those of Gauss–Legendre in the distance R to a point on
// the axis at r, since there ρ dρ = R dR and the integrand has no root:
//
//	p(r) = (2/b²) ∫ e^{−jkR}/R · ρ dρ = Σ weight · e^{−jkR}/R
//
// Source: the Rayleigh integral over a baffled circular piston (Kinsler, Frey,
// Coppens & Sanders, Fundamentals of Acoustics, sec. 7.4).
func rings(radius, r, kMax float64) []ring {
	if radius == 0 {
		return []ring{{0, 1}}
	}
	edge := math.Hypot(r, radius)
	// The phase over the piston turns by k(edge−r); eight nodes are enough for
	// the amplitude and one for each radian is generous.
	n := 8 + int(math.Ceil(kMax*(edge-r)))
	nodes, weights := make([]float64, n), make([]float64, n)
	quad.Legendre{}.FixedLocations(nodes, weights, r, edge)
	out := make([]ring, n)
	for i, x := range nodes {
		out[i] = ring{
			radius: math.Sqrt((x - r) * (x + r)),
			weight: 2 / (radius * radius) * x * weights[i],
		}
	}
	return out
}

// onAxis is the free-field pressure of the rings at x on the axis, in units in
// which a point source gives e^{−jkx}/x.
func onAxis(source []ring, k, x float64) complex128 {
	var sum complex128
	for _, s := range source {
		sum += complex(s.weight, 0) * monopole(k, math.Hypot(x, s.radius))
	}
	return sum
}

// monopole is e^{−jkR}/R.
func monopole(k, R float64) complex128 {
	sin, cos := math.Sincos(k * R)
	return complex(cos/R, -sin/R)
}
