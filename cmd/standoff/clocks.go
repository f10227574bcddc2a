package main

import (
	"context"
	"fmt"
	"math"
	"slices"

	"standoff/measure"
)

// hear analyses take i.
func (a *analysed) hear(with *measure.Analyser, i int) error {
	return a.hearWith(i, with.Hear)
}

func (a *analysed) hearWith(i int, analyse func(*measure.Recording) (*measure.TakeAnalysis, error)) error {
	h := &a.takes[i]
	rec, err := a.folder.Load(h.take)
	if err != nil {
		return err
	}
	name := a.folder.Path(h.take.File)
	if err := rateServes(name, rec.SampleRate, a.rig.Fit.To); err != nil {
		return err
	}
	rec.Overflows, rec.Underflows = h.take.Overflows, h.take.Underflows
	if h.analysis, err = analyse(rec); err != nil {
		return fmt.Errorf("%s: %w", name, err)
	}
	h.flags = slices.Clone(h.analysis.Flags)
	h.reasons = slices.Clone(h.analysis.Reasons)
	h.accepted = !slices.ContainsFunc(h.flags, measure.Flag.Rejects)
	return nil
}

// rateServes refuses a recording that cannot hold the band of the fit.
func rateServes(name string, rate int, to float64) error {
	if least := measure.LowestRate(to); float64(rate) < least {
		return cure(fmt.Errorf("%s: recorded at %d Hz, which does not hold the fit's band up to %.0f Hz", name, rate, to),
			fmt.Sprintf("record at %.0f Hz or more, or lower fit.to", math.Ceil(least)))
	}
	return nil
}

// How often clocks are taken off and read again at most, and what need not be.
const (
	clockRounds = 3
	clockClose  = 0.2e-6
)

// settleClocks reads by how much the clocks of player and recorder differ and, where
// they certainly do, analyses the takes again with that taken off, until nothing is
// left of it.
func (a *analysed) settleClocks(ctx context.Context, base *measure.Analyser) error {
	for range clockRounds {
		at, clocks := a.readClocks()
		differ := measure.Differ(clocks)
		far := false
		for n, i := range at {
			h := &a.takes[i]
			h.clock = clocks[n]
			far = far || math.Abs(h.clock.Value-h.analysis.Timing.Clock) > clockClose
		}
		if !slices.Contains(differ, true) || !far {
			return nil
		}
		if err := a.each(ctx, base, a.correct); err != nil {
			return err
		}
	}
	at, clocks := a.readClocks()
	for n, i := range at {
		a.takes[i].clock = clocks[n]
	}
	return nil
}

// readClocks are the offsets of the accepted takes' clocks.
func (a *analysed) readClocks() (at []int, clocks []measure.ClockOffset) {
	at, placed := a.acceptedTakes()
	var phases []measure.Excess
	for _, p := range placed {
		phases = append(phases, p.Analysis.Excess)
	}
	clocks = measure.ReadClocks(phases, a.exc.SweepRate())
	if benchOf(a.rig).DecideClock(placed) == measure.ClockCommon {
		clocks = measure.OneClock(clocks)
	}
	return at, clocks
}

// correct analyses a take again by its clock.
func (a *analysed) correct(with *measure.Analyser, i int) error {
	h := &a.takes[i]
	if !h.accepted || math.IsInf(h.clock.Relative, 0) {
		return nil
	}
	t := h.analysis.Timing.Corrected(a.exc, h.clock.Value)
	return a.hearWith(i, func(rec *measure.Recording) (*measure.TakeAnalysis, error) { return with.HearAgain(rec, t) })
}

// clockLeft is the standard uncertainty of the clock's offset in the average of a
// group, against the other groups. One that could not be read may be anything that
// clocks are.
func (g *group) clockLeft() float64 {
	var sum float64
	for _, h := range g.takes {
		u := math.Min(h.clock.Relative, measure.BelievedClock)
		sum += u * u
	}
	return math.Sqrt(sum) / float64(len(g.takes))
}

// flagClocks says what was found of clocks. Nothing of it rejects a take.
func (a *analysed) flagClocks() {
	at, placed := a.acceptedTakes()
	free := benchOf(a.rig).DecideClock(placed) == measure.ClockFree
	var clocks []measure.ClockOffset
	for _, i := range at {
		clocks = append(clocks, a.takes[i].clock)
	}
	for n, differ := range measure.Differ(clocks) {
		h := &a.takes[at[n]]
		if free {
			h.note(measure.Unsynchronised, "its start is its own: its delay is fitted")
		}
		if differ {
			h.note(measure.ClockDrift, fmt.Sprintf("the recorder's clock was off the player's by %s, %s", ppm(h.clock), h.corrected()))
		}
	}
}

func (h *heard) note(f measure.Flag, reason string) {
	h.flags, h.reasons = append(h.flags, f), append(h.reasons, reason)
}

func (h *heard) corrected() string {
	if h.analysis.Timing.Clock == 0 {
		return "not corrected"
	}
	return "corrected"
}

// ppm is an offset with its expanded uncertainty.
func ppm(c measure.ClockOffset) string {
	return fmt.Sprintf("%+.1f ± %.1f ppm", 1e6*c.Value, 2e6*c.Uncertainty)
}
