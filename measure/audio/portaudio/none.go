//go:build !cgo || noaudio

package portaudio

import (
	"context"
	"errors"

	"standoff/measure/audio"
)

// Available reports whether this build can use sound cards.
const Available = false

// ErrNoAudio is what this build answers.
var ErrNoAudio = noAudio{errors.New("this build has no audio")}

type noAudio struct{ error }

// Hint says how to get a build that has it.
func (noAudio) Hint() string {
	return "install PortAudio's development files (Debian: portaudio19-dev, gcc) and build again without -tags noaudio; virtual bench and import work without"
}

// Open fails: this build has no audio.
func Open(context.Context, Config) (audio.Recorder, error) { return nil, ErrNoAudio }

// Devices fails: this build has no audio.
func Devices(context.Context) ([]audio.Device, error) { return nil, ErrNoAudio }
