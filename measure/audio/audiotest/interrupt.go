package audiotest

import (
	"context"
	"errors"
	"fmt"
	"sync/atomic"
	"time"

	"standoff/measure"
	"standoff/measure/audio"
)

// checkOverBefore tries contexts that have ended before the take.
func checkOverBefore(rec audio.Recorder, s settings) error {
	if err := interrupted(rec, s, cancelled(), s.good()); err != nil {
		return fmt.Errorf("cancelled: %w", err)
	}
	ctx, cancel := context.WithDeadline(context.Background(), time.Unix(1, 0))
	defer cancel()
	if err := interrupted(rec, s, ctx, s.good()); err != nil {
		return fmt.Errorf("past the deadline: %w", err)
	}
	return nil
}

// checkOverDuring cancels at the first call of Meter that says that something
// is left to do. Done = 1 is the end and too late to be interrupted.
func checkOverDuring(rec audio.Recorder, s settings) error {
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	var under atomic.Bool
	req := s.good()
	req.Meter = func(m audio.Meter) {
		if m.Done < 1 {
			under.Store(true)
			cancel()
		}
	}
	err := interrupted(rec, s, ctx, req)
	if !under.Load() {
		return errors.New("the meter was never called under way, so nothing can be interrupted")
	}
	return err
}

// checkDeadlineDuring lets a deadline pass in the middle of a take.
func checkDeadlineDuring(rec audio.Recorder, s settings) error {
	ctx, cancel := context.WithTimeout(context.Background(), s.duration()/2)
	defer cancel()
	return interrupted(rec, s, ctx, s.good())
}

// checkPace wants a real-time take to last about as long as its excitation.
func checkPace(rec audio.Recorder, s settings) error {
	start := time.Now()
	if _, err := record(rec, s.good()); err != nil {
		return err
	}
	// A tenth less is granted: what is buffered need not be waited for.
	if took := time.Since(start); took < s.duration()*9/10 {
		return fmt.Errorf("a take of %v was over after %v", s.duration(), took)
	}
	return nil
}

type answer struct {
	rec *measure.Recording
	err error
}

// interrupted runs a take whose context ends and wants the error of the
// context, in time.
func interrupted(rec audio.Recorder, s settings, ctx context.Context, req audio.Request) error {
	answers := make(chan answer, 1)
	go func() {
		got, err := rec.Record(ctx, req)
		answers <- answer{got, err}
	}()
	var a answer
	select {
	case a = <-answers:
	case <-afterEnd(ctx, s.within, s.duration()):
		return fmt.Errorf("no return within %v of the end of the context", s.within)
	}
	if a.rec != nil {
		return errors.New("an interrupted take brought a recording")
	}
	if ctx.Err() == nil || !errors.Is(a.err, ctx.Err()) {
		return fmt.Errorf("error is %v, the context says %v", a.err, ctx.Err())
	}
	return nil
}

// afterEnd ticks once when the time allowed after the end of the context is
// over; a context that never ends is given up after a generous while.
func afterEnd(ctx context.Context, within, duration time.Duration) <-chan time.Time {
	out := make(chan time.Time, 1)
	go func() {
		select {
		case <-ctx.Done():
		case <-time.After(duration + 30*time.Second):
		}
		out <- <-time.After(within)
	}()
	return out
}
