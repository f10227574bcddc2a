package fit

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/mat"
)

// jacobian is Kaufman's, with differences of the model only: forward ones, but for
// the mix, whose are central since they cost next to nothing.
func (p *separable) jacobian(dst *mat.Dense, x []float64) {
	p.evaluate(x)
	byMix := p.byMix(x)
	byPlace, bySpacing := p.derivative(x, p.at.setback, 2e-8), p.derivative(x, p.at.spacing, 2e-8)
	var byRadius [][]complex128
	if p.model.Source == PistonSource {
		byRadius = p.derivative(x, p.at.radius, 2e-8)
		p.project(dst, p.at.radius, byRadius, -1)
	}
	p.project(dst, p.at.beta, byMix, -1)
	p.project(dst, p.at.spacing, bySpacing, -1)
	p.project(dst, p.at.setback, byPlace, -1)
	for i := range p.data.Points {
		p.project(dst, p.at.tape+i, byPlace, i)
	}
	p.project(dst, p.at.speed, p.bySpeed(x, byPlace, bySpacing, byRadius), -1)
	if p.data.FreeClock {
		p.delays(dst)
	}
	p.driftColumns(dst)
	if p.at.gain >= 0 {
		g, i := p.grid(), p.data.louder-1
		for j, v := range p.h[i] {
			g[i][j] = scaled(v, 1/x[p.at.gain])
		}
		p.project(dst, p.at.gain, g, i)
	}
	at, d := p.observations(), p.data
	dst.Set(at, p.at.setback, 1/d.SetbackUncertainty)
	dst.Set(at+1, p.at.radius, 1/d.RadiusUncertainty)
	dst.Set(at+2, p.at.speed, 1/d.SpeedUncertainty)
	for i, pt := range d.Points {
		dst.Set(at+3+i, p.at.tape+i, 1/pt.Tape)
	}
}

// derivative of h, which is that of x, by one parameter.
func (p *separable) derivative(x []float64, param int, step float64) [][]complex128 {
	plus := p.grid()
	y := append([]float64(nil), x...)
	y[param] += step
	p.fill(plus, nil, y)
	for i := range plus {
		for j := range plus[i] {
			plus[i][j] = scaled(plus[i][j]-p.h[i][j], 1/step)
		}
	}
	return plus
}

// byMix is the derivative by the mix.
func (p *separable) byMix(x []float64) [][]complex128 {
	const step = 1e-5
	plus, minus := p.grid(), p.grid()
	y := append([]float64(nil), x...)
	y[p.at.beta] += step
	p.remix(plus, y)
	y[p.at.beta] -= 2 * step
	p.remix(minus, y)
	for i := range plus {
		for j := range plus[i] {
			plus[i][j] = scaled(plus[i][j]-minus[i][j], 0.5/step)
		}
	}
	return plus
}

// bySpeed is the derivative by the speed of sound c, from those by the lengths. A
// response is one over a length times a function of lengths over wavelengths, so that
// by Euler's theorem, with k = ω/c,
//
//	r·∂H/∂r + d·∂H/∂d + b·∂H/∂b − k·∂H/∂k = −H,   c·∂H/∂c = −k·∂H/∂k.
func (p *separable) bySpeed(x []float64, byPlace, bySpacing, byRadius [][]complex128) [][]complex128 {
	out := p.grid()
	ac := p.acoustics(x)
	for i := range out {
		r := p.distance(x, i)
		for j := range out[i] {
			v := p.h[i][j] + scaled(byPlace[i][j], r) + scaled(bySpacing[i][j], ac.Spacing)
			if byRadius != nil {
				v += scaled(byRadius[i][j], ac.Radius)
			}
			out[i][j] = scaled(v, -1/ac.Speed)
		}
	}
	return out
}

// delays are the columns of the free delays: ∂h/∂t = −jω·h.
func (p *separable) delays(dst *mat.Dense) {
	for i := 1; i < len(p.data.Points); i++ {
		g := p.grid()
		for j, f := range p.data.Hz {
			g[i][j] = complex(0, -2*math.Pi*f) * p.h[i][j]
		}
		p.project(dst, p.at.delay+i-1, g, i)
	}
}

// project writes −(I − hh⁺)·∂h·S as one column; only is the one point that the
// parameter moves, or −1 for all.
func (p *separable) project(dst *mat.Dense, column int, dh [][]complex128, only int) {
	n := len(p.data.Hz)
	for j := range p.data.Hz {
		var along complex128
		for i := range dh {
			if only < 0 || only == i {
				along += cmplx.Conj(p.h[i][j]) * dh[i][j]
			}
		}
		along *= p.s[j] / complex(p.power[j], 0)
		for i := range dh {
			var v complex128
			if only < 0 || only == i {
				v = dh[i][j] * p.s[j]
			}
			v -= p.h[i][j] * along
			row := 2 * (i*n + j)
			dst.Set(row, column, -real(v))
			dst.Set(row+1, column, -imag(v))
		}
	}
}
