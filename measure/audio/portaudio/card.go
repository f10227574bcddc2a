//go:build cgo && !noaudio

package portaudio

import (
	"context"
	"errors"
	"fmt"
	"sync"
	"time"

	"standoff/measure"
	"standoff/measure/audio"

	pa "github.com/gordonklaus/portaudio"
)

// Available reports whether this build can use sound cards.
const Available = true

// callTime is how long one call into PortAudio may take.
const callTime = 6 * time.Second

// ErrGone says that the audio system has stopped answering. Nothing more can be
// done with it in this process.
var ErrGone = gone{errors.New("the audio system has stopped answering")}

type gone struct{ error }

// Hint is the likely cure.
func (gone) Hint() string {
	return "is the device unplugged, or the audio server ended? what was recorded is kept: run again on the same folder"
}

// system is PortAudio, of which a process has one.
var system struct {
	sync.Mutex
	gone bool // it hung once: it is not called again
}

// Card is a recorder over sound cards.
type Card struct {
	cfg    Config
	mu     sync.Mutex
	closed bool
}

// Open looks for the devices, so that what is missing is said before the first
// take, and returns a recorder.
func Open(ctx context.Context, cfg Config) (audio.Recorder, error) {
	if err := cfg.validate(); err != nil {
		return nil, err
	}
	c := &Card{cfg: cfg}
	err := session(ctx, func() error {
		_, err := c.parameters()
		return err
	})
	if err != nil {
		return nil, err
	}
	return c, nil
}

// Devices lists what is there.
func Devices(ctx context.Context) ([]audio.Device, error) {
	var out []audio.Device
	err := session(ctx, func() error {
		list, _, err := devices()
		out = list
		return err
	})
	return out, err
}

// session does something between Initialize and Terminate, each bounded in time.
func session(ctx context.Context, do func() error) error {
	system.Lock()
	defer system.Unlock()
	if system.gone {
		return ErrGone
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	quiet()
	if err := bounded("initialize", pa.Initialize); err != nil {
		return err
	}
	err := bounded("look for devices", do)
	if system.gone {
		return err
	}
	return errors.Join(err, bounded("terminate", pa.Terminate))
}

// bounded makes a call in a goroutine of its own. A call that does not come back
// in time stays behind, and the system counts as gone. The caller holds its lock.
func bounded(what string, call func() error) error {
	if system.gone {
		return ErrGone
	}
	done := make(chan error, 1)
	go func() { done <- call() }()
	t := time.NewTimer(callTime)
	defer t.Stop()
	select {
	case err := <-done:
		if err != nil && !isOurs(err) {
			return fmt.Errorf("audio: %s: %w", what, err)
		}
		return err
	case <-t.C:
		system.gone = true
		return fmt.Errorf("%w (while trying to %s)", ErrGone, what)
	}
}

// isOurs reports whether an error needs no more explanation.
func isOurs(err error) bool {
	var none *NoDeviceError
	var own *problem
	return errors.As(err, &none) || errors.As(err, &own) || errors.Is(err, ErrGone)
}

// problem is an error with its cure.
type problem struct {
	text, hint string
}

func (p *problem) Error() string { return p.text }

// Hint is the likely cure.
func (p *problem) Hint() string { return p.hint }

// devices lists devices in PortAudio's order, beside its own records.
func devices() ([]audio.Device, []*pa.DeviceInfo, error) {
	infos, err := pa.Devices()
	if err != nil {
		return nil, nil, err
	}
	in, _ := pa.DefaultInputDevice()
	out, _ := pa.DefaultOutputDevice()
	list := make([]audio.Device, len(infos))
	for i, d := range infos {
		list[i] = audio.Device{Name: d.Name, Inputs: d.MaxInputChannels, Outputs: d.MaxOutputChannels,
			SampleRate: d.DefaultSampleRate, DefaultInput: d == in, DefaultOutput: d == out}
		if d.HostApi != nil {
			list[i].Host = d.HostApi.Name
		}
	}
	return list, infos, nil
}

// parameters chooses the devices.
func (c *Card) parameters() (pa.StreamParameters, error) {
	var p pa.StreamParameters
	list, infos, err := devices()
	if err != nil {
		return p, err
	}
	in, err := choose(list, infos, "input", c.cfg.Input, func(d audio.Device) int { return d.Inputs }, func(d audio.Device) bool { return d.DefaultInput })
	if err != nil {
		return p, err
	}
	out, err := choose(list, infos, "output", c.cfg.Output, func(d audio.Device) int { return d.Outputs }, func(d audio.Device) bool { return d.DefaultOutput })
	if err != nil {
		return p, err
	}
	if n := c.cfg.inputs(); in.MaxInputChannels < n {
		return p, &problem{fmt.Sprintf("audio.input: %s has %d input channels, channel %d is asked for", in.Name, in.MaxInputChannels, n),
			"set audio.input_channel and audio.loopback_channel to what it has"}
	}
	if out.MaxOutputChannels < c.cfg.OutputChannel {
		return p, &problem{fmt.Sprintf("audio.output: %s has %d output channels, channel %d is asked for", out.Name, out.MaxOutputChannels, c.cfg.OutputChannel),
			"set audio.output_channel to what it has"}
	}
	p = pa.HighLatencyParameters(in, out)
	p.Input.Channels, p.Output.Channels = c.cfg.inputs(), c.cfg.OutputChannel
	p.SampleRate = float64(c.cfg.SampleRate)
	p.FramesPerBuffer = pa.FramesPerBufferUnspecified
	return p, nil
}

func choose(list []audio.Device, infos []*pa.DeviceInfo, direction, name string, channels func(audio.Device) int, isDefault func(audio.Device) bool) (*pa.DeviceInfo, error) {
	if name == "" {
		for i, d := range list {
			if isDefault(d) && channels(d) > 0 {
				return infos[i], nil
			}
		}
		return nil, &problem{fmt.Sprintf("audio.%s: there is no default %s device", direction, direction), "name one: standoff devices lists them"}
	}
	i, err := pick(list, direction, name, channels)
	if err != nil {
		return nil, err
	}
	return infos[i], nil
}

// Name says what records.
func (c *Card) Name() string {
	if c.cfg.Input == "" {
		return "PortAudio, default input"
	}
	return "PortAudio, " + c.cfg.Input
}

// Close makes every later request fail.
func (c *Card) Close() error {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.closed = true
	return nil
}

func (c *Card) isClosed() bool {
	c.mu.Lock()
	defer c.mu.Unlock()
	return c.closed
}

// Record plays and records one take.
func (c *Card) Record(ctx context.Context, req audio.Request) (*measure.Recording, error) {
	switch {
	case c.isClosed():
		return nil, audio.ErrClosed
	case len(req.Excitation) == 0:
		return nil, errors.New("a take needs something to play")
	case req.SampleRate != c.cfg.SampleRate:
		return nil, fmt.Errorf("a take at %d Hz is asked of a recorder opened for %d Hz", req.SampleRate, c.cfg.SampleRate)
	}
	system.Lock()
	defer system.Unlock()
	if system.gone {
		return nil, ErrGone
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	quiet()
	if err := bounded("initialize", pa.Initialize); err != nil {
		return nil, err
	}
	rec, err := c.take(ctx, req)
	if system.gone {
		return nil, err
	}
	if end := bounded("terminate", pa.Terminate); err == nil && end != nil {
		err = end
	}
	if err != nil {
		return nil, err
	}
	return rec, nil
}

// take opens a stream, lets it run, and closes it.
func (c *Card) take(ctx context.Context, req audio.Request) (*measure.Recording, error) {
	t := newTake(c.cfg, req)
	var stream *pa.Stream
	err := bounded("open", func() error {
		p, err := c.parameters()
		if err != nil {
			return err
		}
		stream, err = pa.OpenStream(p, t.callback)
		return err
	})
	if err != nil {
		return nil, err
	}
	started := time.Now()
	if err := bounded("start", stream.Start); err != nil {
		return nil, errors.Join(err, bounded("close", stream.Close))
	}
	if err := t.watch(ctx, req.Meter); err != nil && errors.Is(err, ErrGone) {
		system.gone = true
		return nil, err
	} else if err != nil {
		return nil, errors.Join(err, bounded("stop", stream.Abort), bounded("close", stream.Close))
	}
	if err := errors.Join(bounded("stop", stream.Stop), bounded("close", stream.Close)); err != nil {
		return nil, err
	}
	return t.recording(started)
}
