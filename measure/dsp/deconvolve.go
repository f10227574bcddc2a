package dsp

import (
	"errors"
	"fmt"
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Deconvolver turns recordings of one excitation into impulse responses. It
// divides spectra,
//
//	H(f) = Y(f)·conj X(f)·W(f) / (|X(f)|² + ε)
//
// where X is the excitation's own transform (so that a wire gives exactly W),
// W is 1 in the band and falls smoothly to 0 outside, where there is nothing to
// divide by, and ε keeps the division finite at the band's far edges.
//
// The transform is circular: what precedes the linear response (harmonics)
// stands at the end of the result. A Deconvolver carries scratch space and is
// used by one goroutine at a time; Clone gives another goroutine its own.
type Deconvolver struct {
	n       int
	rate    float64
	forward []complex128 // X, bins 0..n/2
	inverse []complex128 // conj(X)·W/(|X|²+ε), likewise
	fft     *fourier.FFT
	coef    []complex128
	buf     []float64
}

// regularisation is ε relative to the largest |X|² in the band: far below the
// 1/f slope's 60 dB, far above rounding.
const regularisation = 1e-9

// NewDeconvolver prepares for recordings of up to n samples of the given
// excitation (with its silences, as played). The band goes from flat at
// [from, to] to zero at [low, high], all in Hz. It fails on an excitation with
// no energy in the band.
func NewDeconvolver(excitation []float64, rate int, low, from, to, high float64, n int) (*Deconvolver, error) {
	if len(excitation) == 0 || rate <= 0 || !(low < from && from < to && to < high) {
		return nil, errors.New("a deconvolver needs an excitation, a sample rate and a band")
	}
	d := &Deconvolver{n: FastLen(max(n, len(excitation))), rate: float64(rate)}
	d.fft = fourier.NewFFT(d.n)
	d.buf = make([]float64, d.n)
	copy(d.buf, excitation)
	d.forward = d.fft.Coefficients(nil, d.buf)
	d.inverse = append([]complex128(nil), d.forward...)
	d.coef = make([]complex128, len(d.inverse))
	return d, d.invert(low, from, to, high)
}

func (d *Deconvolver) invert(low, from, to, high float64) error {
	var largest float64
	for i, x := range d.inverse {
		if f := d.frequency(i); f >= from && f <= to {
			largest = math.Max(largest, sqAbs(x))
		}
	}
	if !(largest > 0) || math.IsInf(largest, 0) {
		return fmt.Errorf("the excitation has nothing between %g and %g Hz", from, to)
	}
	for i, x := range d.inverse {
		f := d.frequency(i)
		w := SmoothStep(f, low, from) * SmoothStep(f, high, to)
		if i == 0 || w == 0 {
			d.inverse[i] = 0
			continue
		}
		d.inverse[i] = cmplx.Conj(x) * complex(w/(sqAbs(x)+regularisation*largest), 0)
	}
	return nil
}

// Clone returns a Deconvolver with the same inverse and its own scratch.
func (d *Deconvolver) Clone() *Deconvolver {
	return &Deconvolver{n: d.n, rate: d.rate, forward: d.forward, inverse: d.inverse, fft: fourier.NewFFT(d.n),
		coef: make([]complex128, len(d.inverse)), buf: make([]float64, d.n)}
}

// Len is the length of the results.
func (d *Deconvolver) Len() int { return d.n }

func (d *Deconvolver) frequency(i int) float64 { return float64(i) * d.rate / float64(d.n) }

// Impulse returns the impulse response (Len samples, index 0 is no delay) that
// turns the excitation into the recording. The recording must not be longer
// than Len.
func (d *Deconvolver) Impulse(recording []float32) []float64 {
	d.load(recording)
	d.fft.Coefficients(d.coef, d.buf)
	return d.times(d.inverse)
}

// Forward returns the excitation as a response of Len samples passes it on: the
// circular convolution of both.
func (d *Deconvolver) Forward(response []float64) []float64 {
	d.fft.Coefficients(d.coef, response)
	return d.times(d.forward)
}

// times multiplies what was transformed by a spectrum and goes back to time.
func (d *Deconvolver) times(spectrum []complex128) []float64 {
	for i, v := range spectrum {
		d.coef[i] *= v
	}
	out := d.fft.Sequence(nil, d.coef)
	scale := 1 / float64(d.n)
	for i := range out {
		out[i] *= scale
	}
	return out
}

func (d *Deconvolver) load(recording []float32) {
	n := min(len(recording), d.n)
	for i, x := range recording[:n] {
		d.buf[i] = float64(x)
	}
	clear(d.buf[n:])
}

// NoiseGain is |conj(X)·W/(|X|²+ε)|² near f: by how much the power density of a
// noise in the recording is multiplied in the impulse response. It is averaged
// over a twelfth of an octave.
func (d *Deconvolver) NoiseGain(f float64) float64 {
	lo := int(f * math.Exp2(-1.0/24) / d.rate * float64(d.n))
	hi := int(math.Ceil(f * math.Exp2(1.0/24) / d.rate * float64(d.n)))
	last := len(d.inverse) - 1
	lo, hi = min(max(lo, 1), last), min(max(hi, 1), last)
	var sum float64
	for _, v := range d.inverse[lo : hi+1] {
		sum += sqAbs(v)
	}
	return sum / float64(hi-lo+1)
}

func sqAbs(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// FastLen is the smallest n' ≥ n whose only prime factors are 2, 3 and 5 and
// that is even, for which transforms are fast.
func FastLen(n int) int {
	best := 2
	for best < n {
		best *= 2
	}
	for five := 1; five < best; five *= 5 {
		for three := five; three < best; three *= 3 {
			m := 2 * three
			for m < n {
				m *= 2
			}
			best = min(best, m)
		}
	}
	return best
}
