package dsp

import "gonum.org/v1/gonum/dsp/fourier"

// MinimumPhase is the phase in rad of the causal, stable system without excess delay
// whose magnitude has the given natural logarithm on the bins 0 … n/2 of a transform
// of even length n: the logarithm's cepstrum, folded on to positive times, transformed
// back. Time aliasing is that of the cepstrum: choose n some times larger than what
// the magnitude's detail asks for.
//
// Source: A. V. Oppenheim, R. W. Schafer, Discrete-Time Signal Processing, 3rd ed.
// (2010), section 13.5.
func MinimumPhase(logs []float64) []float64 {
	n := 2 * (len(logs) - 1)
	fft := fourier.NewFFT(n)
	coef := make([]complex128, len(logs))
	for i, v := range logs {
		coef[i] = complex(v/float64(n), 0)
	}
	cepstrum := fft.Sequence(nil, coef)
	for i := 1; i < n/2; i++ {
		cepstrum[i] *= 2
		cepstrum[n-i] = 0
	}
	out := make([]float64, len(logs))
	for i, v := range fft.Coefficients(coef, cepstrum) {
		out[i] = imag(v)
	}
	return out
}
