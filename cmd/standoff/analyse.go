package main

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"slices"

	"standoff/fit"
	"standoff/measure"
	"standoff/measure/dsp"
	"standoff/measure/rig"
	"standoff/measure/session"

	"golang.org/x/sync/errgroup"
)

// analysed is all that the analysis of a session has to say.
type analysed struct {
	folder *session.Folder
	rig    *rig.Rig
	exc    *measure.Excitation
	takes  []heard
	groups []group // in the order of the rig, those with accepted takes only
	gate   measure.Gate
	fit    *fit.Analysis
	result *fit.Result
}

// heard is a take with what it says.
type heard struct {
	take     session.Take
	distance measure.Distance
	analysis *measure.TakeAnalysis
	flags    []measure.Flag
	reasons  []string
	accepted bool
	clock    measure.ClockOffset // of its recorder
}

// group are the accepted takes at one distance.
type group struct {
	distance measure.Distance
	takes    []heard
	rise     measure.Rise // by which it is made compact for the gate
	travel   float64      // of the direct sound to it after time zero as fitted, s; 0 before
	average  measure.Spectrum
	odd      *fit.Odd // when it does not belong to the others
}

// used reports whether a group takes part in the fit: one whose place is odd does,
// with its place free.
func (g group) used() bool { return g.odd == nil || g.odd.Moved }

// analyse is the chain from a folder's recordings to the result; it writes the
// verdicts on the takes back to the manifest.
func analyse(ctx context.Context, f *session.Folder, version string) (*analysed, error) {
	a := &analysed{folder: f, rig: f.Rig()}
	var err error
	if a.exc, err = excitationOf(f); err != nil {
		return nil, err
	}
	if err := a.listen(ctx); err != nil {
		return nil, err
	}
	a.compare()
	a.flagClocks()
	if err := a.judge(); err != nil {
		return nil, err
	}
	if err := a.group(); err != nil {
		return nil, err
	}
	if err := a.fitAll(ctx); err != nil {
		return nil, err
	}
	a.complete(version)
	return a, nil
}

// excitationOf is what was played: the rig's sweep, or one kept in the folder.
func excitationOf(f *session.Folder) (*measure.Excitation, error) {
	x, rate, ok, err := f.Excitation()
	switch {
	case err != nil:
		return nil, err
	case ok:
		return measure.SampledExcitation(x, rate)
	}
	return rigExcitation(f.Rig())
}

func rigExcitation(r *rig.Rig) (*measure.Excitation, error) {
	s := dsp.Sweep{From: r.Sweep.From, To: r.Sweep.To, Duration: r.Sweep.Duration,
		SampleRate: r.Audio.SampleRate, Before: r.Sweep.Before, After: r.Sweep.After}
	exc, err := measure.SweepExcitation(s, r.Sweep.Level)
	if err != nil {
		return nil, fmt.Errorf("%s: sweep: %w", r.Path, err)
	}
	return exc, nil
}

// listen loads and analyses every take, as many at a time as there are cores.
func (a *analysed) listen(ctx context.Context) error {
	places := map[string]measure.Distance{}
	for _, d := range a.rig.Distances {
		places[d.Label] = d
	}
	for _, t := range a.folder.Takes() {
		if d, ok := places[t.Distance]; ok {
			a.takes = append(a.takes, heard{take: t, distance: d})
		}
	}
	if len(a.takes) == 0 {
		return fmt.Errorf("%s: no take to analyse", a.folder.Dir())
	}
	return a.inParallel(ctx)
}

// workers bounds the memory as well as the load: each carries some 10 MB a
// second of sweep.
func workers() int { return min(runtime.GOMAXPROCS(0), 8) }

func (a *analysed) inParallel(ctx context.Context) error {
	first, err := a.folder.Load(a.takes[0].take)
	if err != nil {
		return err
	}
	// In what is longer the excitation is looked for.
	longest := min(len(first.Mic), len(a.exc.Samples)+a.exc.Rate)
	base, err := measure.NewAnalyser(a.exc, longest, a.rig.Fit.From, a.rig.Fit.To)
	if err != nil {
		return err
	}
	if err := a.each(ctx, base, a.hear); err != nil {
		return err
	}
	return a.settleClocks(ctx, base)
}

// each does something with every take, with an analyser for each worker.
func (a *analysed) each(ctx context.Context, base *measure.Analyser, do func(*measure.Analyser, int) error) error {
	jobs := make(chan int)
	g, ctx := errgroup.WithContext(ctx)
	g.Go(func() error {
		defer close(jobs)
		for i := range a.takes {
			select {
			case jobs <- i:
			case <-ctx.Done():
				return ctx.Err()
			}
		}
		return nil
	})
	for range workers() {
		g.Go(func() error {
			mine := base.Clone()
			for i := range jobs {
				if err := do(mine, i); err != nil {
					return err
				}
			}
			return nil
		})
	}
	return g.Wait()
}

// bench is what the comparison of distances needs to know.
func benchOf(r *rig.Rig) measure.Bench {
	b := measure.Bench{SpeedOfSound: r.Air.SpeedOfSound(), Tape: r.DistanceUncertainty, Setback: r.Capsule.Setback, Clock: r.Audio.Clock}
	if r.Source.Kind == fit.PistonSource {
		b.SourceRadius = r.Source.Radius
	}
	return b
}

// accepted are the indices of takes that nothing speaks against.
func (a *analysed) acceptedTakes() (at []int, placed []measure.Placed) {
	for i, h := range a.takes {
		if h.accepted {
			at, placed = append(at, i), append(placed, measure.Placed{Distance: h.distance, Analysis: h.analysis})
		}
	}
	return at, placed
}

// compare flags takes that do not fit the others.
func (a *analysed) compare() {
	at, placed := a.acceptedTakes()
	for n, findings := range benchOf(a.rig).Compare(placed) {
		h := &a.takes[at[n]]
		for _, f := range findings {
			h.flags = append(h.flags, f.Flag)
			h.reasons = append(h.reasons, f.Reason)
			h.accepted = false
		}
	}
}

// judge writes the verdicts to the manifest.
func (a *analysed) judge() error {
	for _, h := range a.takes {
		q := h.analysis.Quality
		v := session.Verdict{Accepted: h.accepted, Flags: h.flags, Reason: joinReasons(h.reasons),
			Quality: session.Quality{PeakDBFS: dB(q.Peak), SNRDB: snrDB(q), ArrivalS: q.Arrival}}
		if err := a.folder.Judge(h.take.File, v); err != nil {
			return err
		}
	}
	return nil
}

// dB of an amplitude ratio, never below −200.
func dB(x float64) float64 { return math.Max(20*math.Log10(x), -200) }

// group sorts accepted takes by distance.
func (a *analysed) group() error {
	for _, d := range a.rig.Distances {
		g := group{distance: d}
		for _, h := range a.takes {
			if h.accepted && h.distance.Label == d.Label {
				g.takes = append(g.takes, h)
			}
		}
		if len(g.takes) > 0 {
			a.groups = append(a.groups, g)
		}
	}
	if len(a.groups) < 2 {
		return a.tooFew()
	}
	slices.SortStableFunc(a.groups, func(x, y group) int {
		switch {
		case x.distance.Metres < y.distance.Metres:
			return -1
		case x.distance.Metres > y.distance.Metres:
			return 1
		}
		return 0
	})
	return nil
}

func (a *analysed) tooFew() error {
	for _, h := range a.takes {
		if len(h.reasons) > 0 {
			return fmt.Errorf("%s: fewer than two distances are fit to use; %s: %s", a.folder.Dir(), h.take.File, h.reasons[0])
		}
	}
	return fmt.Errorf("%s: fewer than two distances have been measured; a fit needs two", a.folder.Dir())
}

func (a *analysed) placed() []measure.Placed {
	_, placed := a.acceptedTakes()
	return placed
}

func (a *analysed) dataset(hz []float64, clock string) *fit.Dataset {
	r := a.rig
	d := &fit.Dataset{
		Hz: hz, FreeClock: clock == measure.ClockFree, SweepRate: a.exc.SweepRate(),
		Setback: r.Capsule.Setback + r.Source.Centre, SetbackUncertainty: math.Hypot(r.Capsule.SetbackUncertainty, r.Source.CentreUncertainty),
		Radius: r.Source.Radius, RadiusUncertainty: r.Source.RadiusUncertainty,
		Speed: r.Air.SpeedOfSound(), SpeedUncertainty: r.Air.SpeedUncertainty(),
		MethodMix: methodMix, MethodSpacing: methodSpacing,
	}
	if r.Source.Kind == fit.PointSource {
		d.Radius, d.RadiusUncertainty = 0, 1e-3
	}
	for _, g := range a.groups {
		if !g.used() {
			continue
		}
		p := fit.Point{Label: g.distance.Label, Nominal: g.distance.Metres, Tape: r.DistanceUncertainty,
			Value: g.average.Value, Variance: g.average.Variance, Clock: g.clockLeft()}
		if g.odd != nil {
			p.Tape = freePlace
		}
		d.Points = append(d.Points, p)
	}
	return d
}

// What deconvolution and gate are right to where nothing else is left to doubt, as
// standard uncertainties: found on virtual benches whose truth is known (fit/STUDY.md),
// where they left up to 0.0003 in the mix and 0.3 % in the spacing, and doubled at
// least, since real benches are less tidy.
const (
	methodMix     = 0.001
	methodSpacing = 0.004 // relative
)

// freePlace is the uncertainty in m of a place that the rig has wrong.
const freePlace = 0.3

// models are those that the rig allows.
func models(r *rig.Rig) []fit.Model {
	forms, bodies := []string{fit.PhaseShift, fit.Summed}, []string{fit.Sphere, fit.Open}
	if r.Capsule.Model != "auto" {
		forms = []string{r.Capsule.Model}
	}
	if r.Capsule.Body != "auto" {
		bodies = []string{r.Capsule.Body}
	}
	var out []fit.Model
	for _, form := range forms {
		for _, body := range bodies {
			out = append(out, fit.Model{Form: form, Body: body, Source: r.Source.Kind})
			if form == fit.PhaseShift {
				out = append(out, fit.Model{Form: form, Body: body, Source: r.Source.Kind, Rear: fit.LowPass})
			}
		}
	}
	return out
}
