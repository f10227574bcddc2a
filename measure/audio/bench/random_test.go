package bench

import (
	"context"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"standoff/measure"
	"standoff/measure/audio"
)

// Whatever New accepts makes a recording of numbers within full scale, or says that
// the place is impossible.
func TestNeverAnythingButNumbers(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := anyConfig(t)
		b, err := New(c)
		if err != nil {
			t.Fatal(err)
		}
		n := rapid.IntRange(1, 3000).Draw(t, "samples")
		x := make([]float32, n)
		for i := range x {
			x[i] = float32(math.Sin(0.001 * float64(i) * float64(i)))
		}
		req := audio.Request{
			Excitation: x, SampleRate: rapid.SampledFrom([]int{8000, 11025, 22050}).Draw(t, "rate"),
			Distance: measure.Distance{Label: "a", Metres: rapid.Float64Range(0.001, 2).Draw(t, "distance")},
			Number:   rapid.IntRange(1, 3).Draw(t, "number"),
		}
		rec, err := b.Record(context.Background(), req)
		if err != nil {
			if !strings.Contains(err.Error(), "stands in the loudspeaker") && !strings.Contains(err.Error(), "fit into the room") {
				t.Fatal(err)
			}
			return
		}
		if len(rec.Mic) != n || c.Loopback && len(rec.Loopback) != n {
			t.Fatalf("%d and %d samples for %d", len(rec.Mic), len(rec.Loopback), n)
		}
		for i, v := range append(rec.Mic, rec.Loopback...) {
			if !(math.Abs(float64(v)) <= 1) {
				t.Fatalf("sample %d is %g", i, v)
			}
		}
	})
}

func anyConfig(t *rapid.T) Config {
	number := func(name string, from, to float64) float64 { return rapid.Float64Range(from, to).Draw(t, name) }
	orNone := func(name string, from, to float64) float64 {
		if rapid.Bool().Draw(t, name+" at all") {
			return number(name, from, to)
		}
		return 0
	}
	word := func(name string, words ...string) string { return rapid.SampledFrom(words).Draw(t, name) }
	c := Config{
		Seed: rapid.Uint64().Draw(t, "seed"), SpeedOfSound: number("speed", 300, 370),
		Noise: orNone("noise", 0, 1), Hum: orNone("hum", 0, 1), HumFrequency: 50,
		Bits: rapid.SampledFrom([]int{0, 16, 24}).Draw(t, "bits"), Latency: orNone("latency", 0, 0.5),
		ClockOffset: orNone("clock", -1e-3, 1e-3), Loopback: rapid.Bool().Draw(t, "loopback"),
		TapeError: orNone("tape", 0, 0.01),
		Capsule: Capsule{
			Form: word("form", PhaseShift, Summed), Body: word("body", Open, Sphere), Rear: word("rear", Delay, LowPass),
			GradientFraction: number("fraction", leastPhaseShift, 1), PortSpacing: number("spacing", 1e-4, 0.3),
			Setback: orNone("setback", 0, 0.2), Sensitivity: number("sensitivity", 0.001, 1000),
			Resonance: orNone("resonance", 1, 90e3), ResonanceQ: number("q", 0.05, 100), HighPass: orNone("high-pass", 0.1, 20e3),
		},
		Source: Source{
			Radius: orNone("radius", 0, 0.2), HighPass: orNone("source high-pass", 0.1, 20e3), RollOff: orNone("roll-off", 100, 90e3),
			Second: orNone("second", -0.3, 0.3), Third: orNone("third", -0.3, 0.3),
		},
	}
	if c.Capsule.Form == Summed {
		c.Capsule.GradientFrom = orNone("gradient from", 0.1, 20e3)
	}
	if rapid.Bool().Draw(t, "room") {
		c.Room = &Room{Size: [3]float64{number("length", 0.5, 20), number("width", 0.5, 20), number("height", 0.5, 5)}, Reflection: number("reflection", 0, 0.99)}
	}
	if kind := word("fault", "", Clip, Dropout, Dead, WrongDistance, Reversed, Gain); kind != "" {
		c.Faults = []Fault{{Kind: kind, Take: rapid.IntRange(0, 2).Draw(t, "take"), Amount: number("amount", 0.01, 1)}}
	}
	return c
}
