package measure

import (
	"fmt"
	"math"

	"standoff/measure/dsp"
)

// Gate is the time window by which the direct sound is kept and the room left
// out, relative to the arrival of the direct sound.
type Gate struct {
	Lead   float64 // s it opens before the arrival; it rises over the first half of that
	Length float64 // s after the arrival at which it has closed
	Fall   float64 // s of its closing, part of Length
	Reason string  // why this length
}

// Duration is the effective length in s: of a rectangle with the same energy.
func (g Gate) Duration() float64 { return g.Lead*0.6875 + g.Length - g.Fall*0.625 }

// Lowest is the frequency in Hz below which a gated response is no measurement:
// less than 0.6 of a period fits into the gate, and what stands there is spilt over
// from above and from the loudspeaker's own tail. On virtual benches points at 0.4
// of a period moved a mix by 0.001, from 0.6 on by less than 0.0001 (5.7 ms gate, a
// loudspeaker with a second-order high-pass at 90 Hz).
func (g Gate) Lowest() float64 { return 0.6 / g.Duration() }

// The limits of a gate that is chosen by itself, s, and the part of it that
// closes.
const (
	shortestGate = 0.003
	longestGate  = 0.025
	gateLead     = 0.0015
	gateFall     = 0.4
)

// FixedGate is a gate of the given length, asked for by the rig.
func FixedGate(length float64) Gate {
	return Gate{Lead: gateLead, Length: length, Fall: gateFall * length, Reason: "set by the rig"}
}

// ChooseGate closes the gate before the first reflection that any response shows.
// Without one it closes when the last response has died away, or sunk into its noise,
// but not before two periods of the lowest frequency wanted fit in; at the latest
// after 25 ms. When a reflection comes earlier than 3 ms the gate stays at 3 ms and
// says so. from and to are the excitation's band, Hz.
func ChooseGate(responses []*ImpulseResponse, from, to, lowest float64) Gate {
	first, faded := math.Inf(1), 0.0
	for _, ir := range responses {
		reflection, end := lookAfter(ir, from, to)
		first, faded = math.Min(first, reflection), math.Max(faded, end)
	}
	first = math.Floor(first*1e4) / 1e4
	length, reason := longestGate, "no reflection within 25 ms"
	enough := math.Ceil(math.Max(faded, 2/lowest)*1e3) / 1e3
	switch {
	case first < shortestGate:
		length, reason = shortestGate, fmt.Sprintf("a reflection %.1f ms after the direct sound is inside the shortest gate", first*1e3)
	case first < math.Min(enough, longestGate):
		length, reason = first, fmt.Sprintf("first reflection %.1f ms after the direct sound", first*1e3)
	case enough < longestGate:
		length = math.Max(enough, shortestGate)
		reason = fmt.Sprintf("no reflection up to there; the sound has died away after %.1f ms, two periods of %.0f Hz fit in", faded*1e3, lowest)
	}
	g := FixedGate(length)
	g.Reason = reason
	return g
}

// reflectionLevel is the level from which something after the direct sound
// counts as a reflection, relative to it, −32 dB.
const reflectionLevel = 0.025

// fadedLevel is the level at which a direct sound has died away, relative to it, −54 dB.
const fadedLevel = 0.002

// lookAfter is the time in s from the direct sound to the foot of the first later
// maximum of the envelope that stands clear: above reflectionLevel, above the noise,
// and at least 6 dB over the lowest point since the direct sound; +Inf when there is
// none. And to where the envelope is last above fadedLevel and the noise.
func lookAfter(ir *ImpulseResponse, from, to float64) (reflection, faded float64) {
	lo, hi := math.Max(arrivalBand[0], from), math.Min(1.5*arrivalBand[1], to)
	env := dsp.Envelope(ir.Samples, ir.Rate, lo, hi)
	at := int(ir.Arrival) - ir.First
	if at < 0 || at >= len(env) {
		return math.Inf(1), 0
	}
	main, noise := env[at], noisePeak(ir, lo, hi)
	lowest, foot := env[at], at
	reflection = math.Inf(1)
	for i := at + int(0.001*ir.Rate); i < min(at+int(longestGate*1.2*ir.Rate), len(env)-1); i++ {
		if env[i] > math.Max(fadedLevel*main, noise) {
			faded = float64(i-at) / ir.Rate
		}
		if env[i] < lowest {
			lowest, foot = env[i], i
		}
		peak := env[i] >= env[i-1] && env[i] > env[i+1]
		if peak && env[i] > math.Max(reflectionLevel*main, noise) && env[i] > 2*lowest {
			return float64(footBefore(env, i, foot)-at) / ir.Rate, faded
		}
	}
	return reflection, faded
}

// footBefore is where the envelope on the way down from its maximum at i to the
// lowest point has fallen to a tenth.
func footBefore(env []float64, i, lowest int) int {
	level := math.Max(0.1*env[i], 1.2*env[lowest])
	for i > lowest && env[i] > level {
		i--
	}
	return i
}

// noisePeak is what the envelope's noise seldom exceeds: four times its rms.
func noisePeak(ir *ImpulseResponse, lo, hi float64) float64 {
	var power float64
	const steps = 50
	for i := range steps {
		f := lo + (hi-lo)*(float64(i)+0.5)/steps
		power += ir.Noise.At(f) * (hi - lo) / steps / ir.Rate
	}
	return 4 * math.Sqrt(4*power) // analytic signal: twice the amplitude, one side
}

// earliestReflection is the first of what lookAfter finds.
func earliestReflection(ir *ImpulseResponse, from, to float64) float64 {
	reflection, _ := lookAfter(ir, from, to)
	return reflection
}
