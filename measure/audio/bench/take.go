package bench

import (
	"context"
	"math"

	"standoff/measure/audio"
)

// decayRoom is how much longer than excitation and travel the transform is, s:
// what still sounds after that is folded on to the beginning. With the high-pass
// of any real loudspeaker it is far below the noise.
const decayRoom = 1.0

// take computes both channels of one take.
func (b *Bench) take(ctx context.Context, req audio.Request) (mic, loopback []float32, err error) {
	b.work.Lock()
	defer b.work.Unlock()
	sound, wire, err := b.sound(ctx, req)
	if err != nil {
		return nil, nil, err
	}
	label, number := req.Distance.Label, req.Number
	b.addHum(sound, float64(req.SampleRate), label, number)
	b.addNoise(sound, label, number)
	b.spoil(sound, label, number)
	mic = b.convert(sound, "mic", label, number)
	if wire != nil {
		loopback = b.convert(wire, "loopback", label, number)
	}
	b.loseSamples(label, number, mic, loopback)
	return mic, loopback, ctx.Err()
}

// sound is what the microphone makes of it, by the recording's clock, and what
// comes back by wire.
func (b *Bench) sound(ctx context.Context, req audio.Request) (mic, wire []float64, err error) {
	r := b.TrueDistance(req.Distance, req.Number)
	if err := b.fits(r); err != nil {
		return nil, nil, err
	}
	count := len(req.Excitation)
	after := decayRoom + b.cfg.Latency + r/b.cfg.SpeedOfSound
	p := b.play(req.Excitation, req.SampleRate, transformLength(count+int(math.Ceil(after*float64(req.SampleRate)))))
	if err := ctx.Err(); err != nil {
		return nil, nil, err
	}
	path, err := b.path(ctx, p, r)
	if err != nil {
		return nil, nil, err
	}
	spectrum := make([]complex128, len(path))
	for i, h := range path {
		spectrum[i] = h * p.spectrum[i]
	}
	mic = resample(inverse(p.fft, spectrum), b.cfg.ClockOffset, count)
	if p.wire != nil {
		wire = resample(p.wire, b.cfg.ClockOffset, count)
	}
	return mic, wire, ctx.Err()
}
