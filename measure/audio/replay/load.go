package replay

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"os"

	"standoff/measure"
	"standoff/measure/wav"
)

// Load reads a whole file as one recording: the microphone from one channel and,
// unless it is 0, the electrical loopback from another, both counted from 1. A
// float file may go beyond full scale. Errors name the file: one that cannot be
// read (wav.ErrFormat), a channel that it does not have, no samples, or a sample
// that is NaN or infinite. Started is zero: a file does not say when.
func Load(path string, channel, loopback int) (*measure.Recording, error) {
	return load(context.Background(), path, channel, loopback)
}

func load(ctx context.Context, path string, mic, loopback int) (*measure.Recording, error) {
	f, err := read(ctx, path)
	if err != nil {
		return nil, err
	}
	rec := &measure.Recording{SampleRate: f.SampleRate}
	if rec.Mic, err = pick(f, mic); err != nil {
		return nil, fmt.Errorf("%s: microphone: %w", path, err)
	}
	switch loopback {
	case 0:
		return rec, nil
	case mic:
		return nil, fmt.Errorf("%s: channel %d cannot be both microphone and loopback", path, mic)
	}
	if rec.Loopback, err = pick(f, loopback); err != nil {
		return nil, fmt.Errorf("%s: loopback: %w", path, err)
	}
	return rec, nil
}

// read is wav.ReadFile, but stops when the context ends.
func read(ctx context.Context, path string) (*wav.File, error) {
	in, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer in.Close()
	f, err := wav.Decode(&interruptible{ctx, in})
	var named *os.PathError
	if err == nil || errors.As(err, &named) {
		return f, err
	}
	return nil, fmt.Errorf("%s: %w", path, err)
}

// interruptible reads until its context ends.
type interruptible struct {
	ctx context.Context
	in  io.Reader
}

func (r *interruptible) Read(b []byte) (int, error) {
	if err := r.ctx.Err(); err != nil {
		return 0, err
	}
	return r.in.Read(b)
}

// pick takes one channel, counted from 1, if a measurement can be made with it.
func pick(f *wav.File, n int) ([]float32, error) {
	if n < 1 || n > f.Channels {
		return nil, fmt.Errorf("channel %d is asked for, the file has %d", n, f.Channels)
	}
	x := f.Samples[n-1]
	if len(x) == 0 {
		return nil, errors.New("the file has no samples")
	}
	for i, v := range x {
		if math.IsNaN(float64(v)) || math.IsInf(float64(v), 0) {
			return nil, fmt.Errorf("sample %d is %v, which no recording has", i, v)
		}
	}
	return x, nil
}
