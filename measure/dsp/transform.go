package dsp

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/dsp/fourier"
)

// DTFT is the discrete-time Fourier transform of x at the frequencies hz,
//
//	X(f) = Σ x[n]·e^{−j2πf(n−origin)/rate},
//
// where origin is the (fractional) sample at which time is zero.
func DTFT(x []float64, rate, origin float64, hz []float64) []complex128 {
	out := make([]complex128, len(hz))
	for i, f := range hz {
		w := 2 * math.Pi * f / rate
		// A rotating phasor, set afresh every 64 samples so that rounding stays below 1e−14.
		step := cmplx.Rect(1, -w)
		var sum complex128
		for n := 0; n < len(x); n += 64 {
			z := cmplx.Rect(1, -w*(float64(n)-origin))
			for _, v := range x[n:min(n+64, len(x))] {
				sum += complex(v*real(z), v*imag(z))
				z *= step
			}
		}
		out[i] = sum
	}
	return out
}

// PowerDensity estimates the two-sided power spectral density of x at the
// frequencies hz by averaging windowed, overlapping segments of the given
// length (Welch 1967): white noise of variance σ² has density σ² at every
// frequency (per sample, not per Hz). The mean is removed first. It returns nil
// for an x shorter than one segment.
func PowerDensity(x []float64, rate float64, segment int, hz []float64) []float64 {
	if segment < 8 || len(x) < segment {
		return nil
	}
	w := Hann(segment)
	norm := 1 / SumSquares(w)
	fft := fourier.NewFFT(segment)
	sum := make([]float64, segment/2+1)
	buf, coef := make([]float64, segment), make([]complex128, segment/2+1)
	mean, count := meanOf(x), 0
	for at := 0; at+segment <= len(x); at += segment / 2 {
		for i := range buf {
			buf[i] = (x[at+i] - mean) * w[i]
		}
		for i, c := range fft.Coefficients(coef, buf) {
			sum[i] += sqAbs(c) * norm
		}
		count++
	}
	return interpolateDensity(sum, float64(count), rate/float64(segment), hz)
}

func interpolateDensity(sum []float64, count, spacing float64, hz []float64) []float64 {
	out := make([]float64, len(hz))
	for i, f := range hz {
		at := math.Min(math.Max(f/spacing, 1), float64(len(sum)-1))
		lo := min(int(at), len(sum)-2)
		t := at - float64(lo)
		out[i] = ((1-t)*sum[lo] + t*sum[lo+1]) / count
	}
	return out
}

func meanOf(x []float64) float64 {
	var s float64
	for _, v := range x {
		s += v
	}
	return s / float64(len(x))
}

// Envelope returns the magnitude of the analytic signal of x after a smooth
// band-pass from..to Hz (edges a third of an octave wide), same length as x.
func Envelope(x []float64, rate, from, to float64) []float64 {
	n := FastLen(2 * len(x))
	fft := fourier.NewCmplxFFT(n)
	z := make([]complex128, n)
	for i, v := range x {
		z[i] = complex(v, 0)
	}
	fft.Coefficients(z, z)
	edge := math.Exp2(1.0 / 3)
	for i := range z {
		f := float64(i) * rate / float64(n)
		if i == 0 || 2*i >= n {
			z[i] = 0
			continue
		}
		z[i] *= complex(2*SmoothStep(f, from/edge, from)*SmoothStep(f, to*edge, to), 0)
	}
	fft.Sequence(z, z)
	out := make([]float64, len(x))
	for i := range out {
		out[i] = cmplx.Abs(z[i]) / float64(n)
	}
	return out
}

// PeakAt refines the position of the local maximum of y at index i by the
// parabola through it and its neighbours; the result is within half a sample.
func PeakAt(y []float64, i int) float64 {
	if i <= 0 || i >= len(y)-1 {
		return float64(i)
	}
	a, b, c := y[i-1], y[i], y[i+1]
	den := a - 2*b + c
	if den == 0 {
		return float64(i)
	}
	return float64(i) + math.Max(-0.5, math.Min(0.5, 0.5*(a-c)/den))
}
