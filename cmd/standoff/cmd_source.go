package main

import (
	"context"
	"fmt"
	"io"
	"math"
	"strings"

	"standoff/fit"
	"standoff/measure"
	"standoff/measure/session"
	"standoff/report/number"
)

type sourceCmd struct {
	Dir      string `arg:"" help:"Session folder, made with a pressure microphone."`
	Out      string `placeholder:"FILE" help:"Where to write the block for source.from; source-TAG.yaml when left out."`
	Polarity string `default:"unknown" enum:"unknown,normal,reversed" help:"Polarity of the microphone where it is known: unknown, normal or reversed. It gives that of the source."`
	JSON     bool   `help:"Print the result as JSON."`
}

func (sourceCmd) Help() string {
	return `Finds from a session made with a pressure microphone (an omni, best a small one) how large the loudspeaker sounds and where its sound comes from: the effective radius and the acoustic centre, with their ±, and whether one piston describes it at all. It writes them as a file that any rig takes in with

  source: {from: FILE}

and from then on they, and not a guess, enter every fit. The file is never overwritten. The nearest distance should be about twice the cone's radius or less.

Example:

  standoff source SMALL-OMNI --out small-driver.yaml` + exits("  3    done, but something needs a look: a value is not resolved, or one piston does not describe the source\n")
}

func (c *sourceCmd) Run(e *env) error {
	f, err := session.Open(c.Dir)
	if err != nil {
		return err
	}
	defer f.Close()
	e.notices(f)
	e.say("%s: analysing %s", c.Dir, takesText(len(f.Takes())))
	a, r, err := radiate(e.ctx, f, c.Polarity)
	if err != nil {
		return cure(fmt.Errorf("%s: %w", c.Dir, err), "make a session with an omni at the distances of your rig, then: standoff source FOLDER")
	}
	out := c.Out
	if out == "" {
		out = "source-" + f.Manifest().Tag + ".yaml"
	}
	if r.Radius.Resolved {
		block := sourceBlock(a, r)
		if err := createNew(out, func(w io.Writer) error { _, err := io.WriteString(w, block); return err }); err != nil {
			return err
		}
	} else {
		out = ""
	}
	if c.JSON {
		if err := e.json(r); err != nil {
			return err
		}
	} else {
		e.source(a, r, out)
	}
	if len(r.Warnings) > 0 {
		return errLook
	}
	return nil
}

// radiate is the chain from a folder's recordings to what they say of the source.
func radiate(ctx context.Context, f *session.Folder, polarity string) (*analysed, *fit.Radiator, error) {
	a := &analysed{folder: f, rig: f.Rig()}
	var err error
	if a.exc, err = excitationOf(f); err != nil {
		return nil, nil, err
	}
	if err := a.listen(ctx); err != nil {
		return nil, nil, err
	}
	a.compare()
	if err := a.group(); err != nil {
		return nil, nil, err
	}
	a.gate = a.chooseGate()
	clock := benchOf(a.rig).DecideClock(a.placed())
	from, to := max(a.rig.Fit.From, a.exc.From, a.gate.Lowest()), math.Min(a.rig.Fit.To, a.exc.To)
	hz := measure.Grid(from, to, a.gate.Duration())
	// A pressure microphone has no rise that a gate could cut. Where the gate stands
	// follows from the first fit.
	var r *fit.Radiator
	for range 2 {
		a.spectra(hz, clock)
		d := a.dataset(hz, clock)
		d.Setback, d.SetbackUncertainty = a.rig.Capsule.Setback, a.rig.Capsule.SetbackUncertainty
		if r, err = fit.FitRadiator(d, polarity); err != nil {
			return nil, nil, err
		}
		for i := range a.groups {
			a.groups[i].travel = r.Travel(i)
		}
	}
	r.Fit.Gate, r.Fit.GateReason, r.Fit.Clock = a.gate.Length, a.gate.Reason, clock
	return a, r, nil
}

// source prints what was found, for a person.
func (e *env) source(a *analysed, r *fit.Radiator, out string) {
	e.print("%s  the source as a pressure microphone hears it", e.strong(a.folder.Manifest().Tag))
	e.print("  radius        %s", found(r.Radius, 1e3, "mm"))
	e.print("  centre        %s behind the plane that distances start from", found(r.Centre, 1e3, "mm"))
	verdict := "one piston describes it"
	if !r.OnePiston {
		verdict = "one piston does not describe it"
	}
	e.print("  one piston    %s: it leaves %s over; by octave %s", verdict, number.Percent(r.Unexplained), octavesLine(r))
	e.print("  microphone    mix %s: a pressure microphone", found(r.Mix, 1, ""))
	e.print("  fitted        %s to %s, gate %s, clock %s, polarity of the source %s", number.Frequency(r.Fit.From), number.Frequency(r.Fit.To),
		number.Time(r.Fit.Gate), r.Fit.Clock, r.Polarity)
	for _, w := range r.Warnings {
		e.warn(measure.Warning(w))
	}
	if out != "" {
		e.print("  written       %s, for a rig's  source: {from: %s}", out, out)
	} else {
		e.print("  written       nothing: without a radius there is nothing to include")
	}
}

func octavesLine(r *fit.Radiator) string {
	var out []string
	for _, o := range r.Octaves {
		out = append(out, fmt.Sprintf("%s %s", number.Frequency(math.Sqrt(o.From*o.To)), number.Percent(o.Unexplained)))
	}
	return strings.Join(out, ", ")
}

// sourceBlock is the file for source.from.
func sourceBlock(a *analysed, r *fit.Radiator) string {
	var b strings.Builder
	m := a.folder.Manifest()
	line := func(format string, args ...any) { fmt.Fprintf(&b, format+"\n", args...) }
	line("# The source, as a pressure microphone heard it: written by standoff source %s", version)
	line("# from unit %s, session %s, begun %s.", m.Tag, a.folder.ID(), m.Created.Format("2006-01-02"))
	line("# One piston leaves %s over, %s to %s. A ± is one standard", number.Percent(r.Unexplained), number.Frequency(r.Fit.From), number.Frequency(r.Fit.To))
	line("# uncertainty; that of the centre contains the setback of that microphone.")
	line("kind: piston")
	quantity := func(key string, v fit.Value) {
		u := *v.Expanded / v.CoverageFactor
		digits := number.Digits(1e3*u) + 1
		line("%s: %smm", key, strings.ReplaceAll(number.Fixed(1e3**v.Value, digits), "−", "-"))
		line("%s_uncertainty: %smm", key, number.Fixed(1e3*math.Max(u, 1e-5), digits))
	}
	quantity("radius", r.Radius)
	if r.Centre.Resolved {
		quantity("centre", r.Centre)
	}
	if r.Polarity != fit.PolarityUnknown {
		line("polarity: %s", r.Polarity)
	}
	return b.String()
}
