package main

import (
	"math"

	"standoff/configs"
	"standoff/measure/rig"
	"standoff/report/number"
)

type demoCmd struct {
	Into string `default:"standoff-demo" placeholder:"DIR" help:"The session folder."`
	JSON bool   `help:"Print the result as JSON."`
}

func (demoCmd) Help() string {
	return `Measures a cardioid that does not exist: SC-12 of the rental house Harrow Lane, on a virtual bench whose truth is known, so that what is found can be held against it. No hardware is needed and nothing is played.

Example:

  standoff demo --into /tmp/SC-12` + exits(exitsLook)
}

func (c *demoCmd) Run(e *env) error {
	r, err := rig.Parse("virtual-cardioid.yaml", configs.VirtualCardioid)
	if err != nil {
		return err
	}
	e.say("a virtual bench: a room of 5 m by 4 m, a loudspeaker, noise, a tape that is a little off")
	a, err := (&runCmd{Into: c.Into}).measure(e, r)
	if err != nil {
		return err
	}
	if err := e.show([]*analysed{a}, c.JSON); err != nil {
		return err
	}
	if !c.JSON {
		e.truth(a)
	}
	return look([]*analysed{a})
}

// truth holds what was found against what the bench was made of.
func (e *env) truth(a *analysed) {
	t := a.rig.Virtual.Capsule
	c := a.result.Capsule
	if v := c.GradientFraction; v.Resolved {
		e.print("  truth         mix %s: off by %s", number.Fixed(t.GradientFraction, 3), number.Fixed(math.Abs(*v.Value-t.GradientFraction), 4))
	}
	if v := c.PortSpacing; v.Resolved {
		e.print("                port spacing %s mm: off by %s mm", number.Fixed(1e3*t.PortSpacing, 1), number.Fixed(1e3*math.Abs(*v.Value-t.PortSpacing), 2))
	}
}
