package measure

import (
	"math"
	"slices"
)

// Median of x, which is not changed; NaN when x is empty.
func Median(x []float64) float64 {
	if len(x) == 0 {
		return math.NaN()
	}
	s := slices.Sorted(slices.Values(x))
	n := len(s)
	return 0.5 * (s[(n-1)/2] + s[n/2])
}

// MAD is the median absolute deviation from the median, times 1/Φ⁻¹(3/4) so
// that it estimates the standard deviation of normal values.
func MAD(x []float64) float64 {
	m := Median(x)
	dev := make([]float64, len(x))
	for i, v := range x {
		dev[i] = math.Abs(v - m)
	}
	return 1.482602218505602 * Median(dev)
}
