package fit

import (
	"math"
	"math/cmplx"
)

// sphereSeries carries what the series of a rigid sphere needs for one
// wavenumber and radius, whatever the place of the source.
//
// A monopole e^{−jkR}/R at distance R from the centre, at the angle γ from the
// axis, makes on the sphere, at the pole of cos θ = ±1,
//
//	p = conj[ −1/(ka²) Σ (2m+1)·h_m(kR)/h'_m(ka)·P_m(±cos γ) ]
//
// h_m overflows early, so the series is carried by the bounded functions
//
//	g_m(x) = x^{m+1}·h_m(x)/(2m−1)!!,  g_{m+1} = g_m − x²·g_{m−1}/((2m+1)(2m−1)),
//	g_0 = −j·e^{jx},  g_1 = −(x+j)·e^{jx},
//
// with which h_m(kR)/h'_m(ka) = ka·(a/R)^{m+1}·g_m(kR)/e_m(ka) and
//
//	e_m(x) = x²·g_{m−1}(x)/(2m−1) − (m+1)·g_m(x).
//
// Sources: W. M. Rabinowitz et al., Presence 2, 125 (1993); R. O. Duda,
// W. L. Martens, J. Acoust. Soc. Am. 104, 3048 (1998); NIST DLMF 10.51 for the
// recurrence (all from memory).
type sphereSeries struct {
	k, a      float64
	inverse   []complex128 // (2m+1)/e_m(ka), as far as it has been needed
	before, g complex128   // g_{m−1} and g_m of the next term
}

// sphereTerms is the most terms that a series may take. With a source no nearer
// than 1.25 radii the terms fall as 0.8^m.
const sphereTerms = 160

func newSphereSeries(k, a float64) *sphereSeries {
	x := k * a
	turn := cmplx.Rect(1, x)
	s := &sphereSeries{k: k, a: a, before: complex(0, -1) * turn, g: -complex(x, 1) * turn}
	// h'_0 = −h_1, so e_0 = −g_1.
	s.inverse = append(make([]complex128, 0, 24), -1/s.g)
	return s
}

// term is (2m+1)/e_m(ka).
func (s *sphereSeries) term(m int) complex128 {
	x2 := s.k * s.a * s.k * s.a
	for n := len(s.inverse); n <= m; n++ {
		e := scaled(s.before, x2/float64(2*n-1)) - scaled(s.g, float64(n+1))
		s.inverse = append(s.inverse, complex(float64(2*n+1), 0)/e)
		s.before, s.g = s.g, s.g-scaled(s.before, x2/float64((2*n+1)*(2*n-1)))
	}
	return s.inverse[m]
}

// polePressures are the pressures at the pole that faces the source's plane and
// at the other, for a ring of monopoles of radius rho in a plane at r from the
// centre.
func (s *sphereSeries) polePressures(r, rho float64) (front, rear complex128) {
	const small = 1e-13
	R := math.Hypot(r, rho)
	x, cos := s.k*R, r/R
	turn := cmplx.Rect(1, x)
	before, g := complex(0, -1)*turn, -complex(x, 1)*turn
	p0, p1 := 1.0, cos
	even, odd := scaled(before*s.term(0), s.a/R), complex128(0)
	power := s.a / R
	quiet := 0
	for m := 1; m < sphereTerms && quiet < 2; m++ {
		power *= s.a / R
		term := scaled(g*s.term(m), power*p1)
		if m%2 == 0 {
			even += term
		} else {
			odd += term
		}
		// Two small terms in a row: at 90° every odd one vanishes.
		if l1(term) < small*(l1(even)+l1(odd)) {
			quiet++
		} else {
			quiet = 0
		}
		before, g = g, g-scaled(before, x*x/float64((2*m+1)*(2*m-1)))
		p0, p1 = p1, (float64(2*m+1)*cos*p1-float64(m)*p0)/float64(m+1)
	}
	return cmplx.Conj(scaled(even+odd, -1/s.a)), cmplx.Conj(scaled(even-odd, -1/s.a))
}

func scaled(z complex128, by float64) complex128 { return complex(real(z)*by, imag(z)*by) }

func l1(z complex128) float64 { return math.Abs(real(z)) + math.Abs(imag(z)) }

// planeOnPoles are the pressures at both poles for a plane wave along the axis,
// of pressure 1 at the centre when the sphere is away:
//
//	p = conj[ (1/(ka)²) Σ (2m+1)·j^{−(m−1)}·(±1)^m/h'_m(ka) ]
//
// which is the limit R → ∞ of the series above times R·e^{jkR}.
func planeOnPoles(k, a float64) (front, rear complex128) {
	s := newSphereSeries(k, a)
	x := k * a
	// h_m(kR) → (−j)^{m+1}·e^{jkR}/(kR), so the terms are
	// (2m+1)(−j)^{m+1}/(k·h'_m(ka)), and 1/h'_m(ka) = x^{m+2}/((2m−1)!!·e_m).
	phase, weight := complex(0, -1), x*x
	var even, odd complex128
	for m := range 60 {
		term := scaled(phase*s.term(m), weight)
		if m%2 == 0 {
			even += term
		} else {
			odd += term
		}
		phase *= complex(0, -1)
		weight *= x / float64(2*m+1)
	}
	scale := -1 / (x * x)
	return cmplx.Conj(scaled(even+odd, scale)), cmplx.Conj(scaled(even-odd, scale))
}
