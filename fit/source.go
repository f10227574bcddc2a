package fit

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/integrate/quad"
)

// pointPressure is e^{−jkr}/r.
func pointPressure(k, r float64) complex128 { return cmplx.Rect(1/r, -k*r) }

// pistonPressure is the pressure on the axis of a baffled circular piston of
// radius b at x, exact, scaled to e^{−jkx}/x far away:
//
//	p = 2/(jkb²)·[e^{−jkx} − e^{−jk√(x²+b²)}]
//
// Source: Kinsler, Frey, Coppens & Sanders, Fundamentals of Acoustics, sec. 7.4
// (from memory). The difference is written as a sine so that small kb lose
// nothing.
func pistonPressure(k, x, b float64) complex128 {
	if b == 0 {
		return pointPressure(k, x)
	}
	R := math.Hypot(x, b)
	longer := b * b / (R + x) // R − x
	half := k * longer / 2
	return cmplx.Rect(4/(k*b*b)*math.Sin(half), -k*x-half)
}

// monopoleRing is a circle of monopoles around the axis in the source's plane.
type monopoleRing struct{ radius, weight float64 }

// ringsOf is a piston as n rings of equal-area quadrature: with u = ρ²/b² the
// surface element is uniform in u, so Gauss–Legendre nodes in u carry their own
// weights. (gonum v0.17 has two wrong weights at exactly 26 nodes.)
func ringsOf(b float64, n int) []monopoleRing {
	if b == 0 {
		return []monopoleRing{{0, 1}}
	}
	u, w := make([]float64, n), make([]float64, n)
	quad.Legendre{}.FixedLocations(u, w, 0, 1)
	out := make([]monopoleRing, n)
	for i := range out {
		out[i] = monopoleRing{radius: b * math.Sqrt(u[i]), weight: w[i]}
	}
	return out
}
