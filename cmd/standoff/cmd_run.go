package main

import (
	"fmt"
	"slices"
	"strings"
	"time"

	"standoff/measure"
	"standoff/measure/rig"
	"standoff/measure/session"
)

type runCmd struct {
	Rig       string        `arg:"" help:"The rig."`
	Into      string        `placeholder:"DIR" help:"The session folder; without it one named after the tag."`
	Tag       string        `help:"The unit's tag, instead of the rig's."`
	Serial    string        `help:"The unit's serial, instead of the rig's."`
	Yes       bool          `short:"y" help:"Ask nothing: the microphone is where it should be."`
	Countdown time.Duration `placeholder:"8s" help:"Wait this long at each distance instead of for a key."`
	Only      []string      `placeholder:"50mm,…" help:"Measure these distances only."`
	JSON      bool          `help:"Print the result as JSON."`
}

func (runCmd) Help() string {
	return `Goes through the rig's distances: asks for the microphone to be put there, plays the sweep, records, judges and keeps the take; a bad one is repeated up to twice. Then it fits and writes the report. Started again on the same folder it goes on where it stopped.

At each prompt: Enter measures, s skips this distance, q stops here.

Start with the level down, and keep ears away from the loudspeaker.

Example:

  standoff run rig.yaml --tag RB-07 --serial 0193 --into sessions/RB-07` + exits(exitsLook)
}

func (c *runCmd) Run(e *env) error {
	r, err := rig.Load(c.Rig)
	if err != nil {
		return err
	}
	a, err := c.measure(e, r)
	if err != nil {
		return err
	}
	if err := e.show([]*analysed{a}, c.JSON); err != nil {
		return err
	}
	return look([]*analysed{a})
}

// measure takes what is missing, then analyses and publishes.
func (c *runCmd) measure(e *env, r *rig.Rig) (*analysed, error) {
	if c.Countdown < 0 {
		return nil, usage(fmt.Errorf("--countdown: %v is not a time to wait", c.Countdown), "such as 8s")
	}
	places, err := c.places(r)
	if err != nil {
		return nil, err
	}
	rec, err := openRecorder(e.ctx, r)
	if err != nil {
		return nil, err
	}
	defer rec.Close()
	f, err := session.OpenOrCreate(c.folder(r), r, session.Options{Version: version, Tag: c.Tag, Serial: c.Serial, Recorder: rec.Name()})
	if err != nil {
		return nil, err
	}
	defer f.Close()
	e.notices(f)
	e.caution(r)
	t, err := newTaker(e, f, rec)
	if err != nil {
		return nil, err
	}
	t.stand = standOf(e, c, r)
	if err := t.all(places); err != nil {
		return nil, err
	}
	e.say("analysing")
	a, err := analyse(e.ctx, f, version)
	if err != nil {
		return nil, err
	}
	return a, a.publish(version)
}

func (c *runCmd) folder(r *rig.Rig) string {
	switch {
	case c.Into != "":
		return c.Into
	case c.Tag != "":
		return c.Tag
	}
	return r.Unit.Tag
}

// places are the distances to measure, in the rig's order.
func (c *runCmd) places(r *rig.Rig) ([]measure.Distance, error) {
	if len(c.Only) == 0 {
		return r.Distances, nil
	}
	var out []measure.Distance
	for _, d := range r.Distances {
		if slices.Contains(c.Only, d.Label) {
			out = append(out, d)
		}
	}
	for _, label := range c.Only {
		if !slices.ContainsFunc(out, func(d measure.Distance) bool { return d.Label == label }) {
			return nil, usage(fmt.Errorf("--only: %s is not on the list of %s", label, r.Path), "the list: "+labels(r.Distances))
		}
	}
	return out, nil
}

func labels(list []measure.Distance) string {
	var out []string
	for _, d := range list {
		out = append(out, d.Label)
	}
	return strings.Join(out, " ")
}

// caution is said before the first sound.
func (e *env) caution(r *rig.Rig) {
	if r.Audio.Backend == "virtual" {
		return
	}
	e.say("caution: sweeps are louder than they look: start with the level down, keep ears away from the loudspeaker, and stay within what its maker allows, at its low end above all")
	switch r.Unit.Powering {
	case "phantom":
		e.say("caution: phantom power may harm a passive ribbon; connect and disconnect with the supply off and the channel down")
	case "none":
		e.say("caution: switch phantom power off on this channel before a passive ribbon is connected")
	case "external":
		e.say("caution: external supplies, those of tube microphones above all, hold dangerous voltage, also after they have been switched off: opening them is for qualified people under local rules")
	}
}
