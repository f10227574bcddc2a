package fit

import (
	"math"
	"math/cmplx"
)

// The polarities of a microphone: whether a positive pressure makes a positive
// signal.
const (
	PolarityNormal   = "normal"
	PolarityReversed = "reversed"
	PolarityUnknown  = "unknown"
)

// Polarity tells the sign of the far response S, given that of the source
// (normal, reversed or anything else for unknown). S is a delay, a sign, and what
// loudspeaker and capsule add: whatever the delay, the phase of S goes to 0 or π
// where it is extrapolated along its slope from the middle of the band to
// frequency 0. Within 50° of neither it stays unknown. A free clock hides the
// delay only, not the sign.
func (a *Analysis) Polarity(source string) string {
	if source != PolarityNormal && source != PolarityReversed {
		return PolarityUnknown
	}
	phase, ok := a.interceptPhase()
	if !ok {
		return PolarityUnknown
	}
	positive := math.Cos(phase) > 0
	if math.Abs(math.Cos(phase)) < math.Cos(50*math.Pi/180) {
		return PolarityUnknown
	}
	if positive == (source == PolarityNormal) {
		return PolarityNormal
	}
	return PolarityReversed
}

// interceptPhase is the phase of S at f = 0 by a straight line through
// 400 Hz to 3 kHz.
func (a *Analysis) interceptPhase() (float64, bool) {
	var hz []float64
	var z []complex128
	for j, f := range a.Data.Hz {
		if f >= 400 && f <= 3000 {
			hz, z = append(hz, f), append(z, a.Best().far[j])
		}
	}
	if len(hz) < 5 {
		return 0, false
	}
	// The delay is common to all neighbours: the one that lines them up best.
	delay := coarseDelay(z, hz)
	var sum complex128
	for j, v := range z {
		sum += v / complex(math.Max(cmplx.Abs(v), 1e-300), 0) * cmplx.Rect(1, 2*math.Pi*hz[j]*delay)
	}
	return cmplx.Phase(sum), cmplx.Abs(sum) > 0.8*float64(len(z))
}

// coarseDelay is the delay that makes the phases of z most alike, within 1.5 ms:
// the dataset's time zero is where the arrivals put it.
func coarseDelay(z []complex128, hz []float64) float64 {
	best, at := 0.0, 0.0
	step := 0.05 / hz[len(hz)-1]
	for t := -0.0015; t <= 0.0015; t += step {
		var sum complex128
		for j, v := range z {
			sum += v / complex(math.Max(cmplx.Abs(v), 1e-300), 0) * cmplx.Rect(1, 2*math.Pi*hz[j]*t)
		}
		if s := cmplx.Abs(sum); s > best {
			best, at = s, t
		}
	}
	return at
}
