package dsp

import (
	"errors"
	"math"
)

// Resampler reads a band-limited signal between its samples, at any ratio of
// rates, also one that is off by parts in a million:
//
//	y[i] = Σ x_k · s·sinc(s·(u−k))·w(s·(u−k)/64),  u = start + i·step,  s = min(1, 1/step)
//
// where step is how many samples of x one of y takes, and w a Kaiser window with
// β = 12 over 64 zero crossings on both sides. What lies below 0.47 of the lower of
// both rates comes through to 1e−5; what lies above 0.53 of it is gone to 1e−5 and does
// not fold back. Outside of x there is silence.
//
// Source: J. F. Kaiser, Proc. IEEE Int. Symp. Circuits and Systems, 20–23 (1974), for
// the window; J. O. Smith, Digital Audio Resampling (2002), for reading the kernel
// from a table, here linearly between 1024 values a zero crossing, right to 4e−7.
type Resampler struct {
	kernel []float64 // one side, resampleFine values a zero crossing
}

const (
	resampleHalf = 64   // zero crossings on each side
	resampleFine = 1024 // values of the kernel between two of them
	resampleBeta = 12.0
)

// NewResampler computes the kernel.
func NewResampler() *Resampler {
	r := &Resampler{make([]float64, resampleHalf*resampleFine+2)}
	for i := range r.kernel[:resampleHalf*resampleFine] {
		t := float64(i) / resampleFine
		u := t / resampleHalf
		r.kernel[i] = sinc(t) * bessel0(resampleBeta*math.Sqrt(1-u*u)) / bessel0(resampleBeta)
	}
	return r
}

// Read returns count samples of x, the first at start (in samples of x, of either
// sign and fractional), each step further. It fails on a step that is not between
// 1/64 and 64.
func (r *Resampler) Read(x []float32, start, step float64, count int) ([]float32, error) {
	if !(step >= 1.0/64 && step <= 64) || math.IsNaN(start) || math.IsInf(start, 0) || count < 0 {
		return nil, errors.New("rates that differ by more than a factor of 64 are no sample rates of one signal")
	}
	out := make([]float32, count)
	scale := math.Min(1, 1/step)
	for i := range out {
		out[i] = float32(r.at(x, start+float64(i)*step, scale))
	}
	return out, nil
}

// at is x at u, through the kernel stretched by 1/scale.
func (r *Resampler) at(x []float32, u, scale float64) (sum float64) {
	reach := resampleHalf / scale
	if u < -reach || u > float64(len(x))+reach {
		return 0
	}
	from, to := max(0, int(math.Ceil(u-reach))), min(len(x)-1, int(math.Floor(u+reach)))
	for k := from; k <= to; k++ {
		at := math.Abs(u-float64(k)) * scale * resampleFine
		j := int(at)
		t := at - float64(j)
		sum += float64(x[k]) * (r.kernel[j] + t*(r.kernel[j+1]-r.kernel[j]))
	}
	return sum * scale
}

func sinc(t float64) float64 {
	if t == 0 {
		return 1
	}
	return math.Sin(math.Pi*t) / (math.Pi * t)
}

// bessel0 is the modified Bessel function I₀ by its power series.
func bessel0(x float64) float64 {
	sum, term := 1.0, 1.0
	for k := 1.0; term > 1e-17*sum; k++ {
		term *= (x / (2 * k)) * (x / (2 * k))
		sum += term
	}
	return sum
}
