package main

import (
	"errors"
	"fmt"
	"io/fs"
	"os"

	"standoff/measure/rig"
	"standoff/measure/wav"

	"github.com/google/renameio/v2"
)

type sweepCmd struct {
	Rig string `arg:"" help:"The rig."`
	Out string `required:"" placeholder:"FILE.wav" help:"Where to write the sweep."`
}

func (sweepCmd) Help() string {
	return `Writes what the rig plays, its silences included, at its level: 32-bit float, one channel. Play it by anything, record the microphone meanwhile at each distance, and bring the recordings in with: standoff import.

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
	if err := refuseExisting(c.Out); err != nil {
		return err
	}
	f, err := renameio.NewPendingFile(c.Out, renameio.WithPermissions(0o644))
	if err != nil {
		return err
	}
	defer f.Cleanup()
	file := &wav.File{Format: wav.Format{SampleRate: exc.Rate, Channels: 1, Bits: 32, Float: true}, Samples: [][]float32{exc.Samples}}
	if err := wav.Encode(f, file); err != nil {
		return fmt.Errorf("%s: %w", c.Out, err)
	}
	if err := f.CloseAtomicallyReplace(); err != nil {
		return err
	}
	e.print("%s: %.2f s, %.0f Hz to %.0f Hz, %d Hz, peak %.1f dBFS", c.Out, float64(len(exc.Samples))/float64(exc.Rate),
		exc.From, exc.To, exc.Rate, dB(r.Sweep.Level))
	e.say("caution: start with the loudspeaker turned down; a sweep is louder than it looks and reaches where small drivers and ears are hurt")
	return nil
}

// refuseExisting keeps a file that is there: it might be a recording.
func refuseExisting(path string) error {
	_, err := os.Lstat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		return err
	}
	return cure(fmt.Errorf("%s is already there and stays as it is", path), "give another name, or take it away first")
}
