// Package portaudio records through the sound cards and audio servers that
// PortAudio knows. A build with the tag noaudio, or without cgo, has none: it
// says so where a recorder is asked for.
package portaudio

import (
	"errors"
	"fmt"
)

// Config says what to play to and to record from.
type Config struct {
	SampleRate      int    // Hz
	Input, Output   string // device names or parts of them; "" is the system's default
	InputChannel    int    // of the microphone, from 1
	OutputChannel   int    // of the loudspeaker, from 1
	LoopbackChannel int    // of the electrical loopback, from 1; 0 none
}

func (c Config) validate() error {
	switch {
	case c.SampleRate <= 0:
		return errors.New("audio: a sample rate is needed")
	case c.InputChannel < 1 || c.OutputChannel < 1:
		return errors.New("audio: channels are counted from 1")
	case c.LoopbackChannel < 0 || c.LoopbackChannel == c.InputChannel:
		return fmt.Errorf("audio: loopback channel %d cannot be told from the microphone's", c.LoopbackChannel)
	}
	return nil
}
