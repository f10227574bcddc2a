package main

import (
	"context"
	"fmt"
	"math"
	"sync"

	"standoff/fit"
	"standoff/measure"
	"standoff/measure/rig"
)

// fitAll gates, transforms and fits: first for the rise by which responses are made
// compact, then again without what does not belong, at last by every model.
func (a *analysed) fitAll(ctx context.Context) error {
	clock := benchOf(a.rig).DecideClock(a.placed())
	a.gate = a.chooseGate()
	from, to := max(a.rig.Fit.From, a.exc.From, a.gate.Lowest()), math.Min(a.rig.Fit.To, a.exc.To)
	hz := measure.Grid(from, to, a.gate.Duration())
	if len(hz) < 6 {
		return fmt.Errorf("%s: a gate of %.1f ms leaves %d frequencies between %.0f and %.0f Hz: widen fit.from and fit.to",
			a.folder.Dir(), 1e3*a.gate.Length, len(hz), from, to)
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	for i := range a.groups {
		a.groups[i].rise = firstRise(a.rig, a.groups[i].distance)
	}
	first, err := a.compacted(ctx, hz, clock)
	if err != nil {
		return err
	}
	if first, err = a.withoutOdd(ctx, hz, clock, first); err != nil {
		return err
	}
	a.fit, err = fit.Analyse(a.dataset(hz, clock), models(a.rig), a.rig.Unit.Claimed, first)
	return err
}

// withoutOdd looks for distances that do not belong and, where there are some, makes
// the first look again without their errors.
func (a *analysed) withoutOdd(ctx context.Context, hz []float64, clock string, first *fit.Analysis) (*fit.Analysis, error) {
	odd, err := fit.FindOdd(a.dataset(hz, clock), first)
	if err != nil || len(odd) == 0 {
		return first, err
	}
	for i := range a.groups {
		for _, o := range odd {
			if o.Label == a.groups[i].distance.Label {
				a.groups[i].odd = &o
			}
		}
	}
	return a.compacted(ctx, hz, clock)
}

// compacted finds the rise by which responses are divided before they are gated.
// What a gate cuts off a response that is not compact depends on the rise, and the
// rise on what was cut off: gate and fit follow each other until the fit stays
// where it is. All models are tried at first, then the one that fits best.
func (a *analysed) compacted(ctx context.Context, hz []float64, clock string) (*fit.Analysis, error) {
	var before *fit.Analysis
	tried := models(a.rig)
	for range mostRounds {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		a.spectra(hz, clock)
		now, err := fit.Guess(a.dataset(hz, clock), tried, before)
		if err != nil {
			return nil, err
		}
		best := now.Best()
		a.expect(best)
		still := before != nil && before.Best().Model == best.Model && best.Acoustics.Near(before.Best().Acoustics)
		before, tried = now, []fit.Model{best.Model}
		if still {
			break
		}
	}
	a.spectra(hz, clock)
	return before, nil
}

// expect gives every group the rise and the travel that a fit says. One that was left
// out stands where the rig has it.
func (a *analysed) expect(j *fit.Joint) {
	n := 0
	for i := range a.groups {
		g := &a.groups[i]
		r, delay := g.distance.Metres+j.Setback, 0.0
		if g.used() {
			r, delay = j.Distances[n], j.Delays[n]
			n++
		}
		g.rise = j.Model.RiseForGate(j.Acoustics, r)
		g.travel = j.Model.Travel(j.Acoustics, r) + delay
	}
}

// mostRounds is how often gate and fit follow each other at most.
const mostRounds = 8

// firstRise is the rise before anything is known: that of a cardioid.
func firstRise(r *rig.Rig, d measure.Distance) measure.Rise {
	return measure.FirstOrderRise(0.5 * r.Air.SpeedOfSound() / (d.Metres + r.Capsule.Setback))
}

func (a *analysed) chooseGate() measure.Gate {
	if a.rig.Fit.Gate > 0 {
		return measure.FixedGate(a.rig.Fit.Gate)
	}
	var all []*measure.ImpulseResponse
	for _, g := range a.groups {
		for _, h := range g.takes {
			all = append(all, &h.analysis.Impulse)
		}
	}
	return measure.ChooseGate(all, a.exc.From, a.exc.To, math.Max(a.rig.Fit.From, a.exc.From))
}

// spectra are the averages by which the fit goes.
func (a *analysed) spectra(hz []float64, clock string) {
	for i, s := range a.averages(hz, clock) {
		a.groups[i].average = s
	}
}

// averages gates, transforms and averages the takes of every group on a grid.
func (a *analysed) averages(hz []float64, clock string) []measure.Spectrum {
	out := make([]measure.Spectrum, len(a.groups))
	zero := a.zeros(clock)
	after := a.arrivalAfter(zero)
	var wg sync.WaitGroup
	for i, g := range a.groups {
		wg.Go(func() {
			var repeats []measure.Spectrum
			for n, h := range g.takes {
				ir := &h.analysis.Impulse
				if g.travel > 0 {
					ir = ir.ArrivingAt(zero[i][n] + g.travel*ir.Rate + after)
				}
				repeats = append(repeats, ir.Spectrum(a.gate, g.rise, zero[i][n], hz))
			}
			out[i] = measure.Average(repeats)
		})
	}
	wg.Wait()
	return out
}

// zeros are time zero of each take of each group, in samples: where the arrivals
// put the start of the sound, with a common clock the same for all takes, with a
// free one for each take by itself.
func (a *analysed) zeros(clock string) [][]float64 {
	common := a.commonStart()
	out := make([][]float64, len(a.groups))
	for i, g := range a.groups {
		for _, h := range g.takes {
			ir := &h.analysis.Impulse
			zero := ir.Latency + common
			if clock == measure.ClockFree {
				zero = ir.Arrival - a.travel(g.distance)
			}
			out[i] = append(out[i], zero)
		}
	}
	return out
}

// arrivalAfter is by how many samples the direct sound's maximum comes after the
// fitted travel, the median over all takes. The maximum itself is no place to hang
// a gate on: the rise moves it by some millimetres of sound near the source, and a
// gate that stands differently on the tail of a loudspeaker's high-pass makes a
// difference between distances where there is none.
func (a *analysed) arrivalAfter(zero [][]float64) float64 {
	var after []float64
	for i, g := range a.groups {
		for n, h := range g.takes {
			ir := &h.analysis.Impulse
			after = append(after, ir.Arrival-zero[i][n]-g.travel*ir.Rate)
		}
	}
	return measure.Median(after)
}

// travel is the time of sound to a distance in samples.
func (a *analysed) travel(d measure.Distance) float64 {
	return (d.Metres + a.rig.Capsule.Setback) / a.rig.Air.SpeedOfSound() * float64(a.exc.Rate)
}

// commonStart is the median over all takes of arrival less travel, in samples.
func (a *analysed) commonStart() float64 {
	var starts []float64
	for _, g := range a.groups {
		for _, h := range g.takes {
			starts = append(starts, h.analysis.Impulse.Arrival-h.analysis.Impulse.Latency-a.travel(g.distance))
		}
	}
	return measure.Median(starts)
}
