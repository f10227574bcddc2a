// Package replay is a recorder that hands out WAV files: what was recorded
// elsewhere goes through the same chain as a sound card's takes.
package replay

import (
	"context"
	"errors"
	"fmt"
	"time"

	"standoff/measure"
	"standoff/measure/audio"
	"standoff/measure/wav"
)

// Key says which take a file is.
type Key struct {
	Distance string // label
	Number   int    // from 1
}

// Recorder answers each request with the file of its distance and number. A file
// that is shorter than the excitation is filled up with silence, a longer one
// cut: the contract wants as many samples as were played. Load gives the whole.
type Recorder struct {
	files         map[Key]string
	mic, loopback int
	closed        bool
}

// New makes a recorder over files; channels are counted from 1, loopback 0 means
// that there is none.
func New(files map[Key]string, mic, loopback int) *Recorder {
	return &Recorder{files: files, mic: mic, loopback: loopback}
}

// Name is "WAV files".
func (r *Recorder) Name() string { return "WAV files" }

// Close makes every later request fail.
func (r *Recorder) Close() error {
	r.closed = true
	return nil
}

// RateMismatchError says that a file does not have the sample rate asked for.
type RateMismatchError struct {
	Path      string
	Has, Want int // Hz
}

func (e *RateMismatchError) Error() string {
	return fmt.Sprintf("%s: recorded at %d Hz, asked for are %d Hz", e.Path, e.Has, e.Want)
}

// Record hands out the file for the request.
func (r *Recorder) Record(ctx context.Context, req audio.Request) (*measure.Recording, error) {
	switch {
	case r.closed:
		return nil, audio.ErrClosed
	case len(req.Excitation) == 0:
		return nil, errors.New("a take needs something to play")
	case req.SampleRate <= 0:
		return nil, errors.New("a take needs a sample rate")
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	path, ok := r.files[Key{req.Distance.Label, req.Number}]
	if !ok {
		return nil, fmt.Errorf("no file for take %d at %s", req.Number, req.Distance.Label)
	}
	rec, err := Load(path, r.mic, r.loopback)
	if err != nil {
		return nil, err
	}
	if rec.SampleRate != req.SampleRate {
		return nil, &RateMismatchError{path, rec.SampleRate, req.SampleRate}
	}
	rec.Mic = fit(rec.Mic, len(req.Excitation))
	if rec.Loopback != nil {
		rec.Loopback = fit(rec.Loopback, len(req.Excitation))
	}
	if req.Meter != nil {
		req.Meter(audio.Meter{Done: 1, Peak: peak(rec.Mic)})
	}
	return rec, ctx.Err()
}

// fit cuts or fills up with silence, and keeps within full scale.
func fit(x []float32, n int) []float32 {
	out := make([]float32, n)
	copy(out, x)
	for i, v := range out {
		out[i] = min(max(v, -1), 1)
	}
	return out
}

func peak(x []float32) float64 {
	var p float32
	for _, v := range x {
		p = max(p, v, -v)
	}
	return float64(p)
}

// Load reads a whole file: the microphone from one channel and, unless it is 0,
// the electrical loopback from another, both counted from 1. A file without the
// channel, without samples, or with values that are no numbers is an error.
func Load(path string, mic, loopback int) (*measure.Recording, error) {
	f, err := wav.ReadFile(path)
	if err != nil {
		return nil, err
	}
	rec := &measure.Recording{SampleRate: f.SampleRate, Started: time.Time{}}
	if rec.Mic, err = channel(f, mic); err != nil {
		return nil, fmt.Errorf("%s: microphone: %w", path, err)
	}
	if loopback == 0 {
		return rec, nil
	}
	if rec.Loopback, err = channel(f, loopback); err != nil {
		return nil, fmt.Errorf("%s: loopback: %w", path, err)
	}
	return rec, nil
}

func channel(f *wav.File, n int) ([]float32, error) {
	if n < 1 || n > f.Channels {
		return nil, fmt.Errorf("channel %d is asked for, the file has %d", n, f.Channels)
	}
	x := f.Samples[n-1]
	if len(x) == 0 {
		return nil, errors.New("the file has no samples")
	}
	for i, v := range x {
		if v-v != 0 {
			return nil, fmt.Errorf("sample %d is no number", i)
		}
	}
	return x, nil
}
