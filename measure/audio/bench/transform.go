package bench

import (
	"math/bits"

	"gonum.org/v1/gonum/dsp/fourier"
)

func inverse(fft *fourier.FFT, c []complex128) []float64 {
	x := fft.Sequence(nil, c)
	scale(x, 1/float64(len(x)))
	return x
}

// transformLength is the least even length ≥ n, n > 0, of few small factors.
func transformLength(n int) int {
	best := 2 << bits.Len(uint(n))
	for _, odd := range []int{1, 3, 5, 9, 15, 25, 27} {
		m := 2 * odd
		for m < n {
			m *= 2
		}
		best = min(best, m)
	}
	return best
}
