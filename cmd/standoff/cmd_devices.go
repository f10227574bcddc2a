package main

import (
	"standoff/measure/audio"
	"standoff/measure/audio/portaudio"
)

type devicesCmd struct {
	JSON bool `help:"Print them as JSON."`
}

func (devicesCmd) Help() string {
	return `Lists what audio.input and audio.output of a rig may name: the whole name or a part of it that no other device has.

Example:

  standoff devices --json` + exits()
}

func (c *devicesCmd) Run(e *env) error {
	list, err := portaudio.Devices(e.ctx)
	if err != nil {
		return err
	}
	if list == nil {
		list = []audio.Device{}
	}
	if c.JSON {
		return e.json(list)
	}
	if len(list) == 0 {
		e.print("no audio device found")
		e.say("hint: is the interface plugged in, and is no other program holding it?")
		return nil
	}
	e.print("%-3s %-3s %-8s %-8s %s", "in", "out", "rate Hz", "default", "name")
	for _, d := range list {
		e.print("%-3d %-3d %-8.0f %-8s %s", d.Inputs, d.Outputs, d.SampleRate, defaultOf(d), d.Name)
	}
	return nil
}

func defaultOf(d audio.Device) string {
	switch {
	case d.DefaultInput && d.DefaultOutput:
		return "in, out"
	case d.DefaultInput:
		return "in"
	case d.DefaultOutput:
		return "out"
	}
	return ""
}
