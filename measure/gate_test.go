package measure

import (
	"math"
	"strings"
	"testing"

	"standoff/measure/dsp"
)

// The gate closes before the first reflection, wherever it is and however weak
// above −32 dB, by no more than the 2 ms that its foot is wide; and after 25 ms
// where there is none.
func TestChooseGate(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	none := scene{gain: 0.3, delay: 100.5, noise: 1e-4, seed: 2}.take(a).Impulse
	for _, p := range []struct {
		name         string
		level, delay float64 // of the reflection; s
		least, most  float64 // of the gate, s
	}{
		{"none", 0, 0.005, 0.025, 0.025},
		{"too weak", 0.01, 0.005, 0.025, 0.025},
		{"strong", 0.7, 0.0063, 0.0043, 0.0063},
		{"usual", 0.3, 0.0102, 0.0082, 0.0102},
		{"weak", 0.06, 0.008, 0.006, 0.008},
		{"reversed", -0.3, 0.0127, 0.0107, 0.0127},
		{"early", 0.5, 0.0018, 0.003, 0.003},
		{"late", 0.5, 0.040, 0.025, 0.025},
	} {
		ir := scene{gain: 0.3, delay: 250.5, noise: 1e-4, echo: p.level, echoDelay: p.delay * 48000, seed: 1}.take(a).Impulse
		g := ChooseGate([]*ImpulseResponse{&none, &ir}, 40, 20000, 80)
		if g.Length < p.least || g.Length > p.most || g.Fall >= g.Length || g.Reason == "" {
			t.Errorf("%s: a gate of %.2f ms, want %.2f to %.2f (%s)", p.name, 1e3*g.Length, 1e3*p.least, 1e3*p.most, g.Reason)
		}
		if p.name == "early" && !strings.Contains(g.Reason, "inside the shortest gate") {
			t.Errorf("early: %q", g.Reason)
		}
	}
}

// Without a reflection the gate closes when nothing is left to wait for.
func TestChooseGateByDecay(t *testing.T) {
	a := testAnalyser(t)
	ir := scene{gain: 0.3, delay: 250.5, noise: 1e-5, seed: 1}.take(a).Impulse
	g := ChooseGate([]*ImpulseResponse{&ir}, 40, 20000, 250)
	if g.Length != 0.008 || !strings.Contains(g.Reason, "died away") {
		t.Errorf("a gate of %.2f ms: %s", 1e3*g.Length, g.Reason)
	}
	rings := scene{gain: 0.3, delay: 250.5, noise: 1e-5, echo: 0.01, echoDelay: 0.011 * 48000, seed: 1}.take(a).Impulse
	if g := ChooseGate([]*ImpulseResponse{&rings}, 40, 20000, 250); g.Length < 0.011 || g.Length > 0.014 {
		t.Errorf("something weak at 11 ms: a gate of %.2f ms: %s", 1e3*g.Length, g.Reason)
	}
}

// A near-field rise is no reflection.
func TestChooseGateIgnoresTheRise(t *testing.T) {
	a := testAnalyser(t)
	ir := scene{gain: 0.05, delay: 250.5, noise: 1e-5, w: 6000, highPass: 70}.take(a).Impulse
	if g := ChooseGate([]*ImpulseResponse{&ir}, 40, 20000, 80); g.Length != longestGate {
		t.Errorf("a gate of %.2f ms: %s", 1e3*g.Length, g.Reason)
	}
}

// The effective duration is that of a rectangle with the window's energy.
func TestGateDuration(t *testing.T) {
	ir := &ImpulseResponse{Rate: 192000, Samples: make([]float64, 20000), Arrival: 2000.3}
	for _, length := range []float64{0.003, 0.008, 0.025} {
		g := FixedGate(length)
		_, w := g.window(ir)
		near(t, "duration", g.Duration(), dsp.SumSquares(w)/ir.Rate, 1e-3*length)
	}
}

// A response that ends inside the gate, or before it, is no reason to panic.
func TestGateBeyondTheResponse(t *testing.T) {
	for _, arrival := range []float64{-500, 0, 50, 99.5, 300} {
		ir := &ImpulseResponse{Rate: 48000, Samples: make([]float64, 100), Arrival: arrival}
		s := ir.Spectrum(FixedGate(0.01), nil, 0, []float64{100, 1000})
		for _, v := range s.Value {
			if math.IsNaN(real(v)) {
				t.Errorf("arrival %g: %v", arrival, v)
			}
		}
		ChooseGate([]*ImpulseResponse{ir}, 40, 20000, 80)
	}
}
