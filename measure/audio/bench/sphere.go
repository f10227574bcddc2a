package bench

import (
	"math"
	"math/cmplx"
)

// poles is the pressure of a ring of monopoles at the two poles of a rigid
// sphere of radius a: front faces the source, and the sphere's centre is at r on
// the ring's axis. With R² = r² + ρ², cos γ = r/R and a monopole of e^{−jkR}/R:
//
//	p = conj[ −1/(k a²) · Σ_m (2m+1) · h_m(kR)/h'_m(ka) · P_m(±cos γ) ],  h_m = j_m + j·y_m
//
// h_m overflows long before the sum has converged, so the ratios are carried by
// recurrence: with q_m(x) = h_m(x)/h_{m−1}(x),
//
//	q_{m+1} = (2m+1)/x − 1/q_m,  q_1 = 1/x − j,  h'_m/h_m = 1/q_m − (m+1)/x
//
// The sum ends after two small terms in a row: odd terms vanish at 90°, so one
// alone proves nothing.
//
// Sources: Rabinowitz, Maxwell, Shao & Wei, Presence 2 (1993); Duda & Martens,
// JASA 104 (1998) 3048 (both from memory); the series is checked with values
// published by Sridhar & Choueiri (JAES 2021).
func poles(k, a, r, rho float64) (front, rear complex128) {
	const small, most = 1e-14, 2000
	R := math.Hypot(r, rho)
	cos := r / R
	far, near := hankel(k*R), hankel(k*a)
	// h_0(x) = −j·e^{jx}/x
	ratio := cmplx.Exp(complex(0, k*(R-a))) * complex(a/R, 0)
	p0, p1 := 1.0, cos // P_{m}, P_{m+1}
	var even, odd complex128
	for m, quiet := 0, 0; m < most && quiet < 2; m++ {
		term := complex(float64(2*m+1)*p0, 0) * ratio / near.slope()
		if m%2 == 0 {
			even += term
		} else {
			odd += term
		}
		if cmplx.Abs(term) < small*cmplx.Abs(even+odd) {
			quiet++
		} else {
			quiet = 0
		}
		far.step()
		near.step()
		ratio *= far.q / near.q
		p0, p1 = p1, (float64(2*m+3)*cos*p1-float64(m+1)*p0)/float64(m+2)
	}
	scale := complex(-1/(k*a*a), 0)
	return cmplx.Conj(scale * (even + odd)), cmplx.Conj(scale * (even - odd))
}

// hankelRatio walks up the orders of spherical Hankel functions by their ratios.
type hankelRatio struct {
	x float64
	m int        // the order
	q complex128 // h_m/h_{m−1}; meaningless at m = 0
}

func hankel(x float64) *hankelRatio { return &hankelRatio{x: x} }

// step goes to the next order.
func (h *hankelRatio) step() {
	if h.m == 0 {
		h.q = complex(1/h.x, -1)
	} else {
		h.q = complex(float64(2*h.m+1)/h.x, 0) - 1/h.q
	}
	h.m++
}

// slope is h'_m/h_m.
func (h *hankelRatio) slope() complex128 {
	if h.m == 0 {
		return complex(-1/h.x, 1) // h'_0 = −h_1
	}
	return 1/h.q - complex(float64(h.m+1)/h.x, 0)
}
