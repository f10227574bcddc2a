package main

import (
	"errors"
	"fmt"
	"io/fs"
	"os"

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
	f, err := os.OpenFile(c.File, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if errors.Is(err, fs.ErrExist) {
		return cure(fmt.Errorf("%s is already there and stays as it is", c.File), "give another name: standoff new FILE")
	}
	if err != nil {
		return err
	}
	_, err = f.Write(rig.Starter())
	if err := errors.Join(err, f.Close()); err != nil {
		return err
	}
	e.print("%s written; set unit.tag, source.radius and distances, then: standoff run %s", c.File, c.File)
	return nil
}
