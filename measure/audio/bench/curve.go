package bench

import (
	"math"
	"math/cmplx"
)

// curve is a slow complex function of frequency on a logarithmic grid, to be
// read in between by cubic (Catmull–Rom) interpolation in log f.
type curve struct {
	from, perOctave float64
	v               []complex128
}

// Below curveFrom a curve keeps f·value, which tends to a constant for what
// integrates.
const curveFrom = 1.0

func newCurve(top float64, f func(float64) complex128) curve       { return sampled(top, 48, f) }
func newCoarseCurve(top float64, f func(float64) complex128) curve { return sampled(top, 6, f) }

func sampled(top, perOctave float64, f func(float64) complex128) curve {
	n := int(math.Ceil(perOctave*math.Log2(top/curveFrom))) + 3
	c := curve{from: curveFrom, perOctave: perOctave, v: make([]complex128, n)}
	for i := range c.v {
		// One point before and one after, for the interpolation.
		c.v[i] = f(curveFrom * math.Exp2((float64(i)-1)/perOctave))
	}
	return c
}

// at is the curve's value at f.
func (c curve) at(f float64) complex128 { return c.atOctave(math.Log2(f), f) }

// atOctave is at, with the logarithm already taken.
func (c curve) atOctave(octave, f float64) complex128 {
	if f < c.from {
		return c.v[1] * complex(c.from/f, 0)
	}
	x := (octave-math.Log2(curveFrom))*c.perOctave + 1
	i := min(max(int(x), 1), len(c.v)-3)
	t := x - float64(i)
	// Weights of the cubic that passes through the two middle points with the
	// slopes of their neighbours.
	w0, w1 := t*(-0.5+t*(1-0.5*t)), 1+t*t*(-2.5+1.5*t)
	w2, w3 := t*(0.5+t*(2-1.5*t)), t*t*(-0.5+0.5*t)
	p := c.v[i-1 : i+3 : i+3]
	return complex(w0*real(p[0])+w1*real(p[1])+w2*real(p[2])+w3*real(p[3]),
		w0*imag(p[0])+w1*imag(p[1])+w2*imag(p[2])+w3*imag(p[3]))
}

// octaves are the logarithms of bins that are step Hz apart.
func octaves(n int, step float64) []float64 {
	out := make([]float64, n)
	for i := 1; i < n; i++ {
		out[i] = math.Log2(float64(i) * step)
	}
	return out
}

// addTo adds the curve, delayed, to bins that are step Hz apart, with their
// logarithms.
func (c curve) addTo(h []complex128, octave []float64, step, delay float64) {
	turn := cmplx.Rect(1, -2*math.Pi*step*delay)
	var z complex128
	for i := 1; i < len(h); i++ {
		if i%256 == 1 {
			z = cmplx.Rect(1, -2*math.Pi*step*delay*float64(i))
		} else {
			z *= turn
		}
		h[i] += c.atOctave(octave[i], float64(i)*step) * z
	}
}
