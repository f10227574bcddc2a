package fit

import (
	"math"
	"math/cmplx"
)

// LeastUnexplained is the least that is believed to be left over beside the noise,
// relative to a response: about what gate and deconvolution are right to.
const LeastUnexplained = 0.0003

// What a response is thought to differ from the model before that is known, and the
// most that is believed afterwards, relative to its magnitude; and the least and the
// most for the room, 1/m.
const (
	firstUnexplained = 0.003
	mostUnexplained  = 0.1
	leastRoom        = 1e-4
	mostRoom         = 3
)

// residue is a fit's residual with what it is judged by.
type residue struct {
	square   float64 // |residual|², made larger by what S has taken of it
	noise    float64 // variance
	response float64 // |Y|²
	level    float64 // |S·Far|²
}

// residues are those of all points at all frequencies.
func (j *Joint) residues() []residue {
	p := newSeparable(j.data, j.Model)
	p.evaluate(j.x)
	level := j.levels()
	// S takes its share of each datum; the other parameters take from all alike.
	observed := float64(p.observations())
	others := observed / math.Max(observed-2-2*float64(len(j.data.Hz)), 1) * (1 - 1/float64(len(j.data.Points)))
	var out []residue
	for i, pt := range j.data.Points {
		for n, y := range pt.Value {
			h := p.h[i][n]
			taken := (real(h)*real(h) + imag(h)*imag(h)) / p.power[n]
			r := y - scaled(h, p.sigma[i][n])*p.s[n]
			out = append(out, residue{
				square: math.Max(others, 1) * (real(r)*real(r) + imag(r)*imag(r)) / math.Max(1-taken, 0.1),
				noise:  pt.Variance[n], response: real(y)*real(y) + imag(y)*imag(y), level: level[n] * level[n],
			})
		}
	}
	return out
}

// levels are |S·Far| on the data's grid.
func (j *Joint) levels() []float64 {
	out := make([]float64, len(j.data.Hz))
	for n, f := range j.data.Hz {
		out[n] = cmplx.Abs(j.far[n] * j.Model.Far(j.Acoustics, f))
	}
	return out
}

// leftovers estimates Unexplained and Room by maximum likelihood of the residuals,
// which are taken to be complex normal with variance
//
//	v = noise + u²·|Y|² + ρ²·|S·Far|².
//
// The room's part is only believed when it makes the residuals clearly likelier than
// a relative part alone, by as much as one parameter more may (Akaike).
func leftovers(r []residue) (unexplained, room float64) {
	alone := least(func(u float64) float64 { return unlikely(r, u, 0) }, LeastUnexplained, mostUnexplained)
	best := unlikely(r, alone, 0)
	inner := func(rho float64) float64 {
		return least(func(u float64) float64 { return unlikely(r, u, rho) }, LeastUnexplained, mostUnexplained)
	}
	rho := least(func(rho float64) float64 { return unlikely(r, inner(rho), rho) }, leastRoom, mostRoom)
	if u := inner(rho); unlikely(r, u, rho) < best-2 {
		return u, rho
	}
	return alone, 0
}

// unlikely is −2·ln of the likelihood, but for a constant.
func unlikely(r []residue, u, rho float64) float64 {
	var sum float64
	for _, x := range r {
		v := x.noise + (u*u+1e-12)*x.response + rho*rho*x.level
		sum += 2 * (x.square/v + math.Log(v))
	}
	return sum
}

// least is where f is least between lo and hi, on a logarithmic scale, to 1 %: a
// coarse search, then golden sections.
func least(f func(float64) float64, lo, hi float64) float64 {
	const steps = 12
	a, b := math.Log(lo), math.Log(hi)
	at, best := a, math.Inf(1)
	for i := range steps + 1 {
		x := a + (b-a)*float64(i)/steps
		if v := f(math.Exp(x)); v < best {
			at, best = x, v
		}
	}
	left, right := math.Max(at-(b-a)/steps, a), math.Min(at+(b-a)/steps, b)
	const golden = 0.6180339887498949
	for right-left > 0.01 {
		x, y := right-golden*(right-left), left+golden*(right-left)
		if f(math.Exp(x)) < f(math.Exp(y)) {
			right = y
		} else {
			left = x
		}
	}
	if mid := 0.5 * (left + right); f(math.Exp(mid)) < best {
		return math.Exp(mid)
	}
	return math.Exp(at)
}
