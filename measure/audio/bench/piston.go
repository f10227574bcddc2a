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

// rings cut a flat piston of the given radius b in m into rings. A point on the
// axis has the same distance to all monopoles of a ring, so that no angles are
// needed. The nodes are those of Gauss–Legendre in the distance R to a point on
// the axis at x, since there ρ dρ = R dR and the integrand has no root:
//
//	p(x) = (2/b²) ∫ e^{−jkR}/R · ρ dρ = Σ weight · e^{−jkR}/R
//
// Source: the Rayleigh integral over a baffled circular piston (Kinsler, Frey,
// Coppens & Sanders, Fundamentals of Acoustics, sec. 7.4).
func rings(b, x, kMax float64) []ring {
	const point = 1e-6 // m, too small to be cut
	if b < point {
		return []ring{{0, 1}}
	}
	// In R − x, which keeps its digits far away.
	depth := b * b / (math.Hypot(x, b) + x)
	// The phase over the piston turns by k·depth; a dozen nodes are enough for the
	// amplitude and one for each radian is generous. In fours, because gonum's
	// table for 26 nodes lacks its outermost weights.
	n := 12 + 4*int(math.Ceil(kMax*depth/4))
	nodes, weights := make([]float64, n), make([]float64, n)
	quad.Legendre{}.FixedLocations(nodes, weights, 0, depth)
	out := make([]ring, n)
	for i, s := range nodes {
		out[i] = ring{radius: math.Sqrt(s * (s + 2*x)), weight: 2 / (b * b) * (x + s) * weights[i]}
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
