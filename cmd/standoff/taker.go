package main

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"time"

	"standoff/measure"
	"standoff/measure/audio"
	"standoff/measure/session"
	"standoff/report/number"
)

// tries is how often a bad take is made anew before the next distance's turn.
const tries = 3

// taker makes the takes of a session.
type taker struct {
	e        *env
	f        *session.Folder
	rec      audio.Recorder
	exc      *measure.Excitation
	analyser *measure.Analyser
	stand    stand
	repeats  int
}

func newTaker(e *env, f *session.Folder, rec audio.Recorder) (*taker, error) {
	r := f.Rig()
	exc, err := rigExcitation(r)
	if err != nil {
		return nil, err
	}
	an, err := measure.NewAnalyser(exc, len(exc.Samples), r.Fit.From, r.Fit.To)
	if err != nil {
		return nil, fmt.Errorf("%s: sweep: %w", r.Path, err)
	}
	return &taker{e: e, f: f, rec: rec, exc: exc, analyser: an, repeats: r.Sweep.Repeats}, nil
}

// all goes through the places that still lack takes.
func (t *taker) all(places []measure.Distance) error {
	for i, d := range places {
		missing := t.repeats - t.accepted(d.Label)
		if missing <= 0 {
			t.e.say("%s (%d of %d): already there", d.Label, i+1, len(places))
			continue
		}
		skip, err := t.stand.place(t.e.ctx, d, i+1, len(places))
		if errors.Is(err, errStopped) {
			return t.stopped()
		}
		if err != nil {
			return err
		}
		if skip {
			t.e.say("%s: skipped", d.Label)
			continue
		}
		for n := range missing {
			if err := t.one(d, t.repeats-missing+n+1); err != nil {
				return err
			}
		}
	}
	return nil
}

func (t *taker) stopped() error {
	t.e.say("stopped here; go on with the same command")
	if len(t.f.Takes()) == 0 {
		return errLook
	}
	return nil
}

// accepted counts the good takes at a distance. One that was never judged, since
// the program was cut off, counts: the analysis will judge it.
func (t *taker) accepted(label string) int {
	n := 0
	for _, take := range t.f.Takes() {
		if take.Distance == label && (take.Accepted || !take.Judged) {
			n++
		}
	}
	return n
}

// one makes one good take, or gives up after some tries.
func (t *taker) one(d measure.Distance, repeat int) error {
	for try := 1; ; try++ {
		ok, err := t.try(d, repeat, try)
		if err != nil || ok {
			return err
		}
		if try == tries {
			t.e.say("%s: %d tries were no good; going on without this take", d.Label, tries)
			return nil
		}
	}
}

func (t *taker) try(d measure.Distance, repeat, try int) (ok bool, err error) {
	where := fmt.Sprintf("%s take %d of %d", d.Label, repeat, t.repeats)
	if try > 1 {
		where += fmt.Sprintf(", try %d of %d", try, tries)
	}
	peak := 0.0
	rec, err := t.rec.Record(t.e.ctx, audio.Request{
		Excitation: t.exc.Samples, SampleRate: t.exc.Rate, Distance: d, Number: t.f.NextNumber(d.Label),
		Meter: func(m audio.Meter) {
			peak = math.Max(peak, m.Peak)
			t.e.redraw(fmt.Sprintf("%s  %s  %6.1f dBFS, peak %6.1f", where, bar(m.Done, 24), dB(m.Peak), dB(peak)))
		},
	})
	if err != nil {
		return false, fmt.Errorf("%s: %w", where, err)
	}
	if rec.Started.IsZero() {
		rec.Started = time.Now()
	}
	take, err := t.f.AddTake(d, t.rec.Name(), rec)
	if err != nil {
		return false, err
	}
	return t.judge(where, take, rec)
}

// judge says a take's verdict in words and notes it.
func (t *taker) judge(where string, take session.Take, rec *measure.Recording) (ok bool, err error) {
	a := t.analyser.Take(rec)
	ok = !slices.ContainsFunc(a.Flags, measure.Flag.Rejects)
	verdict := "good"
	if !ok {
		verdict = "rejected: " + joinReasons(a.Reasons)
	} else if len(a.Reasons) > 0 {
		verdict = "kept, but " + joinReasons(a.Reasons)
	}
	t.e.say("%s: %s (peak %s dBFS, %s dB over the noise)", where, verdict, number.Fixed(dB(a.Quality.Peak), 1), number.Fixed(snrDB(a.Quality), 0))
	return ok, t.f.Judge(take.File, session.Verdict{Accepted: ok, Flags: a.Flags, Reason: joinReasons(a.Reasons),
		Quality: session.Quality{PeakDBFS: dB(a.Quality.Peak), SNRDB: snrDB(a.Quality), ArrivalS: a.Quality.Arrival}})
}

// bar shows how much of something is done.
func bar(done float64, width int) string {
	n := int(math.Round(math.Min(math.Max(done, 0), 1) * float64(width)))
	return "[" + strings.Repeat("=", n) + strings.Repeat(" ", width-n) + "]"
}
