// Package portaudio records through the sound cards and audio servers that
// PortAudio knows. A build with the tag noaudio, or without cgo, has none: it says
// so where a recorder is asked for.
//
// What the package guards against, each seen on real systems: a server that dies
// makes no error, its callbacks just stop, and every later call may hang; so each
// call has a limit of time, a watchdog looks at the number of callbacks, and after
// a death nothing is called any more. Names of devices are read at Initialize only;
// so it is called for every take. The flags of lost data are hints: whether data
// are whole is judged by the data, elsewhere.
package portaudio

import (
	"errors"
	"fmt"
	"slices"
	"strings"

	"standoff/measure/audio"
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

// inputs is how many input channels have to be opened.
func (c Config) inputs() int { return max(c.InputChannel, c.LoopbackChannel) }

// NoDeviceError says that a name fits no device, or more than one.
type NoDeviceError struct {
	Direction string   // input, output
	Name      string   // as asked for
	Fitting   []string // the names that it fits; empty for none
	All       []string // all names in that direction
}

func (e *NoDeviceError) Error() string {
	if len(e.Fitting) > 0 {
		return fmt.Sprintf("audio.%s: %q fits more than one device: %s", e.Direction, e.Name, strings.Join(e.Fitting, ", "))
	}
	if len(e.All) == 0 {
		return fmt.Sprintf("audio.%s: no %s device is there", e.Direction, e.Direction)
	}
	return fmt.Sprintf("audio.%s: no device is called %q; there are: %s", e.Direction, e.Name, strings.Join(e.All, ", "))
}

// Hint is the likely cure.
func (e *NoDeviceError) Hint() string {
	if len(e.All) == 0 {
		return "is the interface plugged in, and is no other program holding it?"
	}
	return "standoff devices lists them all"
}

// pick finds the device that a name means: the whole name, else a part of it in
// either case. channels tells how many it has in the direction.
func pick(list []audio.Device, direction, name string, channels func(audio.Device) int) (int, error) {
	var exact, part []int
	miss := &NoDeviceError{Direction: direction, Name: name}
	for i, d := range list {
		if channels(d) == 0 {
			continue
		}
		miss.All = append(miss.All, d.Name)
		if d.Name == name {
			exact = append(exact, i)
		}
		if strings.Contains(strings.ToLower(d.Name), strings.ToLower(name)) {
			part = append(part, i)
		}
	}
	fit := exact
	if len(fit) == 0 {
		fit = part
	}
	// One device shown by several host systems: the one that is a default wins.
	if len(fit) > 1 {
		if i := slices.IndexFunc(fit, func(i int) bool { return list[i].DefaultInput || list[i].DefaultOutput }); i >= 0 && len(exact) > 1 {
			fit = fit[i : i+1]
		}
	}
	if len(fit) == 1 {
		return fit[0], nil
	}
	for _, i := range fit {
		miss.Fitting = append(miss.Fitting, list[i].Name)
	}
	return -1, miss
}
