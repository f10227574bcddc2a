package bench

import (
	"context"
	"testing"

	"standoff/measure"
	"standoff/measure/audio"
)

// BenchmarkTake is one take of 3.4 s in a room: the first at a distance, which
// computes the path, and one more there.
func BenchmarkTake(b *testing.B) {
	x := make([]float32, 3.4*48000)
	x[4800] = 0.1
	for name, fresh := range map[string]bool{"first": true, "next": false} {
		b.Run(name, func(b *testing.B) {
			bench, err := New(good())
			if err != nil {
				b.Fatal(err)
			}
			req := audio.Request{Excitation: x, SampleRate: 48000, Distance: measure.Distance{Label: "30mm", Metres: 0.03}, Number: 1}
			for b.Loop() {
				if fresh {
					bench.paths = paths{}
				}
				if _, err := bench.Record(context.Background(), req); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
