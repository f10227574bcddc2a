// Package replay is a recorder that makes no sound: it answers each request with
// a WAV file. What was recorded elsewhere goes through the same chain as the
// takes of a sound card.
package replay

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"os"

	"standoff/measure"
	"standoff/measure/audio"
)

// Key says which take a file is.
type Key struct {
	Distance string // label
	Number   int    // from 1
}

// Recorder answers each request with the file of its distance and number.
//
// The contract wants as many samples as were played: a longer file is cut, a
// shorter one is filled up with zeros at its end. It wants full scale at most: a
// float file that goes beyond is refused, since limiting it would distort what
// was recorded cleanly. Load gives a whole file as it is.
type Recorder struct {
	rate          int
	files         map[Key]string
	mic, loopback int
	closed        bool
}

// New makes a recorder of one sample rate in Hz over files. The microphone and
// the loopback are channels of the files, counted from 1; loopback 0 means that
// there is none. Files are opened when they are asked for.
func New(sampleRate int, files map[Key]string, mic, loopback int) *Recorder {
	return &Recorder{rate: sampleRate, files: maps.Clone(files), mic: mic, loopback: loopback}
}

// Name is "WAV files".
func (r *Recorder) Name() string { return "WAV files" }

// Close makes every later request fail.
func (r *Recorder) Close() error {
	r.closed = true
	return nil
}

// RateMismatchError says that a file was not recorded at the sample rate wanted.
type RateMismatchError struct {
	Path       string
	File, Want int // Hz
}

func (e *RateMismatchError) Error() string {
	return fmt.Sprintf("%s: recorded at %d Hz, but %d Hz are wanted", e.Path, e.File, e.Want)
}

// Record hands out the file for the request, and calls the meter once. It fails
// where there is no such file, with *RateMismatchError where it has another
// sample rate, and for everything that Load fails for. Started of the recording
// is zero: a file does not say when its take began.
func (r *Recorder) Record(ctx context.Context, req audio.Request) (*measure.Recording, error) {
	path, err := r.find(ctx, req)
	if err != nil {
		return nil, err
	}
	rec, err := load(ctx, path, r.mic, r.loopback)
	if err != nil {
		return nil, err
	}
	if rec.SampleRate != r.rate {
		return nil, &RateMismatchError{path, rec.SampleRate, r.rate}
	}
	if rec.Mic, err = fit(rec.Mic, len(req.Excitation)); err != nil {
		return nil, fmt.Errorf("%s: microphone: %w", path, err)
	}
	if rec.Loopback, err = fit(rec.Loopback, len(req.Excitation)); err != nil {
		return nil, fmt.Errorf("%s: loopback: %w", path, err)
	}
	if req.Meter != nil {
		req.Meter(audio.Meter{Done: 1, Peak: peak(rec.Mic)})
	}
	return rec, nil
}

// find checks a request and says which file answers it.
func (r *Recorder) find(ctx context.Context, req audio.Request) (string, error) {
	switch {
	case r.closed:
		return "", audio.ErrClosed
	case len(req.Excitation) == 0:
		return "", errors.New("a take needs an excitation")
	case req.SampleRate <= 0:
		return "", errors.New("a take needs a sample rate")
	case req.SampleRate != r.rate:
		return "", fmt.Errorf("a take at %d Hz is asked for, but the files were opened for %d Hz", req.SampleRate, r.rate)
	}
	path, ok := r.files[Key{req.Distance.Label, req.Number}]
	if !ok {
		return "", fmt.Errorf("there is no file for take %d at %s", req.Number, req.Distance.Label)
	}
	// A pipe could keep Record waiting beyond the end of its context.
	if info, err := os.Stat(path); err == nil && !info.Mode().IsRegular() {
		return "", fmt.Errorf("%s: not a regular file", path)
	}
	return path, ctx.Err()
}

// fit brings a channel to n samples. No channel stays none.
func fit(x []float32, n int) ([]float32, error) {
	if x == nil {
		return nil, nil
	}
	out := make([]float32, n)
	copy(out, x)
	for i, v := range out {
		if v > 1 || v < -1 {
			return nil, fmt.Errorf("sample %d is %v, beyond full scale; lower the level of the file", i, v)
		}
	}
	return out, nil
}

func peak(x []float32) float64 {
	var p float32
	for _, v := range x {
		p = max(p, v, -v)
	}
	return float64(p)
}
