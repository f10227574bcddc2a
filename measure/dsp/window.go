package dsp

import "math"

// Gate is a time window over samples [From, From+len): it rises over Rise
// samples from 0 to 1, is 1, and falls over Fall samples to 0, both as half a
// cosine period. Rise+Fall must not exceed n.
func Gate(n, rise, fall int) []float64 {
	w := make([]float64, n)
	for i := range w {
		w[i] = 1
	}
	for i := 0; i < rise && i < n; i++ {
		w[i] *= halfCosine(float64(i)+0.5, float64(rise))
	}
	for i := 0; i < fall && i < n; i++ {
		w[n-1-i] *= halfCosine(float64(i)+0.5, float64(fall))
	}
	return w
}

func halfCosine(i, n float64) float64 { return 0.5 * (1 - math.Cos(math.Pi*i/n)) }

// Hann is the periodic Hann window of n samples.
func Hann(n int) []float64 {
	w := make([]float64, n)
	for i := range w {
		w[i] = 0.5 * (1 - math.Cos(2*math.Pi*float64(i)/float64(n)))
	}
	return w
}

// SumSquares is Σ w².
func SumSquares(w []float64) float64 {
	var s float64
	for _, v := range w {
		s += v * v
	}
	return s
}
