package bench

import "math"

// sincHalf is how many samples on each side a sample between them is made of.
const sincHalf = 32

// resample reads x with a clock that runs faster by offset: sample i is what is at
// i/(1+offset). Interpolation by a sinc under a Blackman window,
//
//	y = Σ x_k · sin π(u−k)/(π(u−k)) · (0.34 + 0.5 C + 0.16 C²),  C = cos π(u−k)/half
//
// right to 5e−5 up to 0.4 of the sample rate and to 3e−4 up to 0.45.
func resample(x []float64, offset float64, count int) []float64 {
	if offset == 0 {
		return x[:count]
	}
	var cos, sin [2 * sincHalf]float64
	for j := range cos {
		sin[j], cos[j] = math.Sincos(math.Pi * float64(j-sincHalf+1) / sincHalf)
	}
	out := make([]float64, count)
	for i := range out {
		at := float64(i) / (1 + offset)
		base := int(at)
		u := at - float64(base)
		if u == 0 {
			out[i] = x[base]
			continue
		}
		s, c := math.Sincos(math.Pi * u / sincHalf)
		from, to := max(0, sincHalf-1-base), min(2*sincHalf, len(x)-base+sincHalf-1)
		var sum float64
		for j := from; j < to; j++ {
			k := j - sincHalf + 1
			// cos(a−b), and sin π(u−k) = ± sin πu, so that the sines are few.
			window := c*cos[j] + s*sin[j]
			term := x[base+k] * (0.34 + window*(0.5+0.16*window)) / (u - float64(k))
			if k&1 != 0 {
				term = -term
			}
			sum += term
		}
		out[i] = sum * math.Sin(math.Pi*u) / math.Pi
	}
	return out
}
