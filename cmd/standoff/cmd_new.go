package main

import (
	"io"

	"standoff/measure/rig"
)

type newCmd struct {
	File string `arg:"" optional:"" default:"rig.yaml" help:"Where to write it."`
}

func (newCmd) Help() string {
	return `Writes a rig in which every key is explained, with its unit and its default. An existing file is never overwritten.

Example:

  standoff new locker.yaml` + exits()
}

func (c *newCmd) Run(e *env) error {
	err := createNew(c.File, func(w io.Writer) error {
		_, err := w.Write(rig.Starter())
		return err
	})
	if err != nil {
		return err
	}
	e.print("%s written; set unit.tag, source.radius and distances, then: standoff run %s", c.File, c.File)
	return nil
}
