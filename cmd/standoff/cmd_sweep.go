package main

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"

	"standoff/measure/rig"
	"standoff/measure/wav"
	"standoff/report/number"
)

type sweepCmd struct {
	Rig string `arg:"" help:"The rig."`
	Out string `required:"" placeholder:"FILE.wav" help:"Where to write the sweep."`
}

func (sweepCmd) Help() string {
	return `Writes what the rig plays, its silences included, at its level: 32-bit float, one channel. Play it by anything, record the microphone meanwhile at each distance, and bring the recordings in with: standoff import.

Start with the loudspeaker turned down, and keep ears away from it.

Example:

  standoff sweep rig.yaml --out sweep.wav` + exits()
}

func (c *sweepCmd) Run(e *env) error {
	r, err := rig.Load(c.Rig)
	if err != nil {
		return err
	}
	exc, err := rigExcitation(r)
	if err != nil {
		return err
	}
	file := &wav.File{Format: wav.Format{SampleRate: exc.Rate, Channels: 1, Bits: 32, Float: true}, Samples: [][]float32{exc.Samples}}
	if err := createNew(c.Out, func(w io.Writer) error { return wav.Encode(w, file) }); err != nil {
		return err
	}
	e.print("%s: %.2f s, %s to %s, sample rate %d Hz, peak %s dBFS", c.Out, float64(len(exc.Samples))/float64(exc.Rate),
		number.Frequency(exc.From), number.Frequency(exc.To), exc.Rate, number.Fixed(dB(r.Sweep.Level), 1))
	e.say("caution: start with the loudspeaker turned down; a sweep is louder than it looks and reaches where small drivers and ears are hurt")
	return nil
}

// createNew writes a file that must not be there yet: it might be a recording. One
// that cannot be finished is taken away again.
func createNew(path string, write func(io.Writer) error) error {
	f, err := os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if errors.Is(err, fs.ErrExist) {
		return cure(fmt.Errorf("%s is already there and stays as it is", path), "give another name, or take it away first")
	}
	if err != nil {
		return err
	}
	if err := errors.Join(write(f), f.Sync(), f.Close()); err != nil {
		os.Remove(path)
		return fmt.Errorf("%s: %w", path, err)
	}
	return nil
}
