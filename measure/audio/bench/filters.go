package bench

import (
	"math"
	"math/cmplx"
)

// electric is everything that is the same at every distance: sensitivity, latency
// and the filters of loudspeaker, capsule and preamplifier.
func (b *Bench) electric(f float64) complex128 {
	c, s := b.cfg.Capsule, b.cfg.Source
	h := complex(c.Sensitivity, 0) * cmplx.Rect(1, -2*math.Pi*f*b.cfg.Latency)
	h *= butterworthHigh(f, s.HighPass) * butterworthLow(f, s.RollOff)
	return h * resonance(f, c.Resonance, c.ResonanceQ) * firstHigh(f, c.HighPass)
}

// butterworthHigh is s²/(s² + √2·s + 1), s = jf/f0; a corner of 0 is no filter.
func butterworthHigh(f, f0 float64) complex128 {
	if f0 == 0 {
		return 1
	}
	s := complex(0, f/f0)
	return s * s / (s*s + math.Sqrt2*s + 1)
}

// butterworthLow is 1/(s² + √2·s + 1).
func butterworthLow(f, f0 float64) complex128 { return resonance(f, f0, math.Sqrt2/2) }

// resonance is a second-order low-pass of quality q, 1/(s² + s/q + 1).
func resonance(f, f0, q float64) complex128 {
	if f0 == 0 {
		return 1
	}
	s := complex(0, f/f0)
	return 1 / (s*s + s/complex(q, 0) + 1)
}

// firstHigh is s/(s + 1).
func firstHigh(f, f0 float64) complex128 {
	if f0 == 0 {
		return 1
	}
	s := complex(0, f/f0)
	return s / (s + 1)
}
