package measure

import (
	"math"

	"standoff/measure/dsp"
)

// ImpulseResponse is the stretch of a deconvolved response around its direct
// sound.
type ImpulseResponse struct {
	Rate    float64   // Hz
	Samples []float64 // response; a wire of gain 1 gives a unit pulse (in band)
	First   int       // time of Samples[0], in samples after the start of the excitation
	Arrival float64   // time of the direct sound, likewise, fractional; latency included
	Latency float64   // of the electrical path where a loopback shows it, else 0, in samples
	Noise   Density   // of what is noise in Samples
}

// ArrivingAt is the same response with its direct sound taken to be at t samples
// after the start of the excitation.
func (ir *ImpulseResponse) ArrivingAt(t float64) *ImpulseResponse {
	out := *ir
	out.Arrival = t
	return &out
}

// Density is a two-sided power density per sample on a rising frequency grid.
type Density struct {
	Hz, Power []float64
}

// At is the density at f, interpolated in log f and log power; at the ends it
// stays what it is there.
func (d Density) At(f float64) float64 {
	n := len(d.Hz)
	if n == 0 {
		return 0
	}
	if f <= d.Hz[0] {
		return d.Power[0]
	}
	for i := 1; i < n; i++ {
		if f <= d.Hz[i] {
			t := math.Log(f/d.Hz[i-1]) / math.Log(d.Hz[i]/d.Hz[i-1])
			return math.Pow(d.Power[i-1], 1-t) * math.Pow(d.Power[i], t)
		}
	}
	return d.Power[n-1]
}

// How much of a response is kept before and after its direct sound, s.
const (
	keepBefore = 0.06
	keepAfter  = 0.35
)

// arrivalBand is where the direct sound is timed: above the rise, below the
// null of the ports and the top of small loudspeakers, in Hz.
var arrivalBand = [2]float64{1000, 6000}

// cutOut takes the stretch around the direct sound out of a circular response.
func cutOut(full []float64, rate float64, peak int) ImpulseResponse {
	before, after := int(keepBefore*rate), int(keepAfter*rate)
	if before+after > len(full) {
		before, after = len(full)/8, len(full)/2
	}
	out := ImpulseResponse{Rate: rate, First: peak - before, Samples: make([]float64, before+after)}
	for i := range out.Samples {
		out.Samples[i] = full[((out.First+i)%len(full)+len(full))%len(full)]
	}
	return out
}

// directSound finds the strongest arrival: the largest value of the envelope
// between the frequencies of arrivalBand, as far as the excitation fills them. How
// far it stands over the median of the envelope is its clarity.
func directSound(x []float64, rate, from, to float64) (at, clarity float64) {
	lo, hi := arrivalLimits(from, to)
	env := dsp.Envelope(x, rate, lo, hi)
	best := 0
	for i, v := range env {
		if v > env[best] {
			best = i
		}
	}
	return dsp.PeakAt(env, best), env[best] / math.Max(Median(env), 1e-300)
}

// arrivalLimits is arrivalBand as far as an excitation from..to fills it.
func arrivalLimits(from, to float64) (lo, hi float64) {
	lo, hi = math.Max(arrivalBand[0], from), math.Min(arrivalBand[1], to)
	if hi < 2*lo {
		return from, to
	}
	return lo, hi
}

// steepest is where a response changes most from one sample to the next: near
// its direct sound, however long the tail of its low frequencies.
func steepest(x []float64) int {
	best, at := 0.0, 0
	for i := 1; i < len(x); i++ {
		if d := math.Abs(x[i] - x[i-1]); d > best {
			best, at = d, i
		}
	}
	return at
}
