package main

import (
	"context"
	"fmt"

	"standoff/measure/audio"
	"standoff/measure/audio/bench"
	"standoff/measure/audio/portaudio"
	"standoff/measure/rig"
)

// openRecorder opens what the rig records with.
func openRecorder(ctx context.Context, r *rig.Rig) (audio.Recorder, error) {
	switch r.Audio.Backend {
	case "virtual":
		return bench.New(benchConfig(r))
	case "portaudio":
		return portaudio.Open(ctx, portaudio.Config{
			SampleRate: r.Audio.SampleRate, Input: r.Audio.Input, Output: r.Audio.Output,
			InputChannel: r.Audio.InputChannel, OutputChannel: r.Audio.OutputChannel, LoopbackChannel: r.Audio.LoopbackChannel,
		})
	}
	return nil, usage(fmt.Errorf("%s: audio.backend: %s cannot record", r.Path, r.Audio.Backend),
		"recordings made elsewhere come in with: standoff import RIG --take DISTANCE=FILE.wav")
}

// benchConfig is the truth of the virtual bench as the rig states it.
func benchConfig(r *rig.Rig) bench.Config {
	v := r.Virtual
	c := bench.Config{
		Seed: v.Seed, RealTime: v.RealTime, SpeedOfSound: r.Air.SpeedOfSound(),
		Capsule: bench.Capsule(v.Capsule), Source: bench.Source(v.Source),
		Noise: v.Noise, Hum: v.Hum, HumFrequency: v.HumFrequency, Bits: v.Bits,
		Latency: v.Latency, ClockOffset: v.ClockOffset, Loopback: v.Loopback,
		TapeErrors: v.TapeErrors, TapeError: v.TapeError,
	}
	if v.Room != nil {
		c.Room = &bench.Room{Size: v.Room.Size, Reflection: v.Room.Reflection}
	}
	for _, f := range v.Faults {
		c.Faults = append(c.Faults, bench.Fault(f))
	}
	return c
}
