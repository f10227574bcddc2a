package bench

import (
	"testing"

	"standoff/measure/audio"
	"standoff/measure/audio/audiotest"
)

// good is a plausible bench.
func good() Config {
	return Config{
		Seed: 1, SpeedOfSound: 344,
		Capsule: Capsule{Form: PhaseShift, Body: Sphere, Rear: Delay, GradientFraction: 0.5, PortSpacing: 0.027,
			Setback: 0.006, Sensitivity: 0.5, Resonance: 9000, ResonanceQ: 0.8, HighPass: 18},
		Source: Source{Radius: 0.017, HighPass: 90, RollOff: 16000, Second: 0.002, Third: 0.001},
		Room:   &Room{Size: [3]float64{5, 4, 2.7}, Reflection: 0.5},
		Noise:  2e-5, Bits: 24, Latency: 0.012, Loopback: true,
	}
}

func TestContract(t *testing.T) {
	open := func(real bool) func(*testing.T) audio.Recorder {
		return func(t *testing.T) audio.Recorder {
			c := good()
			c.RealTime = real
			b, err := New(c)
			if err != nil {
				t.Fatal(err)
			}
			return b
		}
	}
	t.Run("fast", func(t *testing.T) { audiotest.Run(t, open(false)) })
	t.Run("real time", func(t *testing.T) { audiotest.Run(t, open(true), audiotest.RealTime()) })
}
