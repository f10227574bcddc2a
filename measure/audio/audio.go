// Package audio is the contract between the measurement and whatever makes
// sound and records it. Three recorders keep it: bench (virtual), portaudio
// (sound cards and audio servers) and replay (WAV files). The test suite of
// the contract is in audiotest; every recorder passes it.
package audio

import (
	"context"
	"errors"

	"standoff/measure"
)

// Request asks for one take.
type Request struct {
	Excitation []float32        // what to play, one channel, full scale ±1, with its silences; never changed
	SampleRate int              // Hz, of the excitation and of the recording
	Distance   measure.Distance // where the microphone stands; a sound card does not need to know
	Number     int              // number of the take at this distance, from 1
	Meter      func(Meter)      // called now and then while recording, never after Record returned; may be nil
}

// Meter is what a live display needs.
type Meter struct {
	Done float64 // part of the take that is over, 0 to 1
	Peak float64 // largest |sample| of the microphone since the last call, full scale 1
}

// Device describes one audio device the way a rig would name it.
type Device struct {
	Name          string  `json:"name"`
	Host          string  `json:"host"`
	Inputs        int     `json:"inputs"`
	Outputs       int     `json:"outputs"`
	SampleRate    float64 `json:"sample_rate_hz"`
	DefaultInput  bool    `json:"default_input,omitempty"`
	DefaultOutput bool    `json:"default_output,omitempty"`
}

// Recorder plays an excitation and records the microphone meanwhile.
//
// Contract:
//   - the recording has exactly len(Excitation) samples, starting when the first
//     sample of the excitation is handed to the output (so the latency shows as
//     a delay, the same for all takes of an open recorder with a common clock);
//   - NaN, infinities and values beyond ±1 do not occur in the recording;
//   - Record returns within a bounded time after the context ends, with an error
//     for which errors.Is(err, ctx.Err()) holds;
//   - a request with no excitation or no sample rate is refused with an error;
//   - Record may be called again after an error; it is not called concurrently;
//   - Close may be called more than once and afterwards Record fails with ErrClosed.
type Recorder interface {
	Record(ctx context.Context, req Request) (*measure.Recording, error)
	// Name says in a few words what records, for the manifest and the pages.
	Name() string
	Close() error
}

// ErrClosed is what a closed recorder answers.
var ErrClosed = errors.New("the recorder is closed")
