package bench

import (
	"math"
	"math/cmplx"
)

// grid is a row of frequencies for slow functions: equal steps in log f from 1 Hz
// up to a turn, equal steps in f from there on, of the size that they have there.
type grid struct {
	perOctave float64
	turn      float64 // Hz
	octave    float64 // log2 of it
	length    int     // points, with one before 1 Hz and two beyond the top
}

// turnedBy is the phase in rad that a function may gain from point to point.
const turnedBy = 0.3

// newGrid serves functions whose parts arrive within spread seconds.
func newGrid(perOctave, spread, top float64) grid {
	g := grid{perOctave: perOctave, turn: top}
	if spread > 0 {
		step := turnedBy / (2 * math.Pi * spread)
		g.turn = math.Min(top, math.Max(1, step*perOctave/math.Ln2))
	}
	g.octave = math.Log2(g.turn)
	g.length = int(g.position(top)) + 4
	return g
}

// position of a frequency: 1 is the point at 1 Hz.
func (g grid) position(f float64) float64 {
	if f <= g.turn {
		return 1 + g.perOctave*math.Log2(f)
	}
	return 1 + g.perOctave*(g.octave+(f/g.turn-1)/math.Ln2)
}

// frequency at a position, Hz.
func (g grid) frequency(position float64) float64 {
	octave := (position - 1) / g.perOctave
	if octave <= g.octave {
		return math.Exp2(octave)
	}
	return g.turn * (1 + (octave-g.octave)*math.Ln2)
}

// curve is a slow function of frequency on a grid, read by cubic (Catmull–Rom)
// interpolation.
type curve struct {
	grid
	v []complex128
}

func (g grid) sample(f func(float64) complex128) curve {
	c := curve{g, make([]complex128, g.length)}
	for i := range c.v {
		c.v[i] = f(g.frequency(float64(i)))
	}
	return c
}

// at is the value at f ≥ 0. Below 1 Hz it goes on as spectra of real signals do,
// with a level real part and an imaginary part in proportion to f.
func (c curve) at(f float64) complex128 {
	if f < 1 {
		return complex(real(c.v[1]), imag(c.v[1])*f)
	}
	x := c.position(f)
	i := min(int(x), len(c.v)-3)
	t := x - float64(i)
	// Weights of the cubic that passes through the two middle points with the
	// slopes of their neighbours.
	w0, w1 := t*(-0.5+t*(1-0.5*t)), 1+t*t*(-2.5+1.5*t)
	w2, w3 := t*(0.5+t*(2-1.5*t)), t*t*(-0.5+0.5*t)
	p := c.v[i-1 : i+3 : i+3]
	return complex(w0*real(p[0])+w1*real(p[1])+w2*real(p[2])+w3*real(p[3]),
		w0*imag(p[0])+w1*imag(p[1])+w2*imag(p[2])+w3*imag(p[3]))
}

// delayed calls each with the bins 0, 1 … n−1, step Hz apart, and e^{−jω·delay}.
func delayed(n int, step, delay float64, each func(bin int, turn complex128)) {
	const afresh = 256 // bins, before rounding adds up
	by := cmplx.Rect(1, -2*math.Pi*step*delay)
	var turn complex128
	for i := range n {
		if i%afresh == 0 {
			turn = cmplx.Rect(1, -2*math.Pi*step*delay*float64(i))
		}
		each(i, turn)
		turn *= by
	}
}

// addTo adds the curve, later by delay seconds, to bins that are step Hz apart.
func (c curve) addTo(bins []complex128, step, delay float64) {
	delayed(len(bins), step, delay, func(i int, turn complex128) { bins[i] += c.at(float64(i)*step) * turn })
}
