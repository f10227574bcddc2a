package bench

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/dsp/fourier"
)

// played is an excitation on its way to the loudspeaker's cone. All takes of a
// session play the same one, so that it is kept.
type played struct {
	excitation []float32
	rate       int
	fft        *fourier.FFT
	spectrum   []complex128 // after distortion
	wire       []float64    // the electrical loopback: the excitation, later by the latency
}

// play brings an excitation to the cone, for transforms of length n.
func (b *Bench) play(excitation []float32, rate, n int) *played {
	if p := b.played; p != nil && p.rate == rate && p.fft.Len() == n && slices.Equal(p.excitation, excitation) {
		return p
	}
	x := make([]float64, n)
	for i, v := range excitation {
		x[i] = math.Max(-1, math.Min(1, float64(v)))
	}
	p := &played{excitation: slices.Clone(excitation), rate: rate, fft: fourier.NewFFT(n)}
	clean := p.fft.Coefficients(nil, x)
	p.spectrum = b.distort(clean)
	if b.cfg.Loopback {
		delayed(len(clean), float64(rate)/float64(n), b.cfg.Latency, func(i int, turn complex128) { clean[i] *= turn })
		p.wire = inverse(p.fft, clean)
	}
	b.played = p
	return p
}

// distort passes the excitation through the loudspeaker's motor, which has no
// memory:
//
//	y = x + (2h₂·x² − 4h₃·x³)/(1 + 3h₃)
//
// A sine of full scale, sin φ, becomes (sin φ − h₂ cos 2φ + h₃ sin 3φ)/(1 + 3h₃) and
// a level: its harmonics stand at h₂ and h₃ of its fundamental. At a small amplitude
// A the gain is 1, the second harmonic is at A·h₂ and the third at A²·h₃, each over
// 1 + 3h₃. It is done at twice the sample rate: no motor folds back what it makes
// above half of it.
func (b *Bench) distort(clean []complex128) []complex128 {
	second, third := b.cfg.Source.Second, b.cfg.Source.Third
	if second == 0 && third == 0 {
		return slices.Clone(clean)
	}
	n := 2 * (len(clean) - 1)
	double := fourier.NewFFT(2 * n)
	wide := make([]complex128, n+1)
	copy(wide, clean)
	x := double.Sequence(nil, wide)
	c2, c3 := 2*second/(1+3*third), -4*third/(1+3*third)
	for i, v := range x {
		v /= float64(n)
		x[i] = v * (1 + v*(c2+v*c3))
	}
	out := double.Coefficients(wide, x)[:n/2+1]
	for i := range out {
		out[i] /= 2
	}
	return out
}
