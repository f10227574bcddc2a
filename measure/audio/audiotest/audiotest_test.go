package audiotest

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"standoff/measure"
	"standoff/measure/audio"
)

// wire is an honest recorder: it records what it plays, half as loud, 20
// samples late. Its fields break it, one promise each.
type wire struct {
	closed bool
	takes  int

	short, nan, hot, otherRate, scribble     bool // in the recording
	drift, onceOnly, acceptsAll, ignoresCtx  bool // over several takes
	noMeter, backwards, strayMeter, loudOver bool // in the meter
	hang, closeFails, worksClosed            bool // at the end
}

func (w *wire) Name() string { return "a wire" }

func (w *wire) Close() error {
	if w.closed && w.closeFails {
		return errors.New("closed twice")
	}
	w.closed = true
	return nil
}

func (w *wire) Record(ctx context.Context, req audio.Request) (*measure.Recording, error) {
	if w.closed && !w.worksClosed {
		return nil, audio.ErrClosed
	}
	if (len(req.Excitation) == 0 || req.SampleRate <= 0) && !w.acceptsAll {
		return nil, errors.New("nothing to play")
	}
	w.takes++
	if w.onceOnly && w.takes > 1 {
		return nil, errors.New("worn out")
	}
	if err := w.play(ctx, req); err != nil {
		return nil, err
	}
	return w.result(req), nil
}

func (w *wire) play(ctx context.Context, req audio.Request) error {
	for i := range 5 {
		if w.hang && ctx.Err() != nil {
			time.Sleep(time.Second)
		}
		if ctx.Err() != nil && !w.ignoresCtx {
			return ctx.Err()
		}
		m := audio.Meter{Done: float64(i) / 4, Peak: 0.5}
		if w.backwards {
			m.Done = 1 - m.Done
		}
		if w.loudOver {
			m.Peak = math.Inf(1)
		}
		if req.Meter != nil && !w.noMeter {
			req.Meter(m)
		}
	}
	if req.Meter != nil && w.strayMeter {
		time.AfterFunc(20*time.Millisecond, func() { req.Meter(audio.Meter{Done: 1}) })
	}
	return nil
}

func (w *wire) result(req audio.Request) *measure.Recording {
	delay := 20
	if w.drift {
		delay += w.takes
	}
	x := make([]float32, len(req.Excitation))
	for i := delay; i < len(x); i++ {
		x[i] = req.Excitation[i-delay] / 2
	}
	rate := req.SampleRate
	switch {
	case w.short:
		x = x[:len(x)-1]
	case w.nan:
		x[7] = float32(math.NaN())
	case w.hot:
		x[7] = -1.00001
	case w.otherRate:
		rate = 44100
	case w.scribble:
		req.Excitation[0] = 0.1
	}
	return &measure.Recording{SampleRate: rate, Mic: x}
}

func TestHonestRecorderPasses(t *testing.T) {
	Run(t, func(*testing.T) audio.Recorder { return &wire{} })
}

func TestEveryBrokenPromiseIsFound(t *testing.T) {
	for want, recorders := range map[string][]*wire{
		"recording":            {{short: true}, {nan: true}, {hot: true}, {otherRate: true}},
		"full scale":           {{hot: true}},
		"excitation unchanged": {{scribble: true}},
		"meter":                {{noMeter: true}, {backwards: true}, {strayMeter: true}, {loudOver: true}},
		"same delay":           {{drift: true}},
		"bad requests":         {{acceptsAll: true}},
		"context over before":  {{ignoresCtx: true}, {hang: true}},
		"context over during":  {{ignoresCtx: true}, {noMeter: true}, {hang: true}},
		"deadline during":      {{}}, // the wire is over long before
		"pace":                 {{}},
		"again after an error": {{onceOnly: true}, {acceptsAll: true}, {ignoresCtx: true}},
		"closed":               {{closeFails: true}, {worksClosed: true}},
	} {
		s := newSettings([]Option{Within(100 * time.Millisecond)})
		for _, rec := range recorders {
			if err := find(t, want).run(rec, s); err == nil {
				t.Errorf("%s passed %+v", want, *rec)
			}
		}
	}
}

func TestOptionsSkipInTheOpen(t *testing.T) {
	plain, instant := newSettings(nil), newSettings([]Option{Instant()})
	real, free := newSettings([]Option{RealTime()}), newSettings([]Option{FreeClock()})
	for _, c := range []struct {
		check   string
		skipped settings
		run     settings
	}{
		{"context over during", instant, plain},
		{"full scale", instant, plain},
		{"same delay", free, plain},
		{"deadline during", plain, real},
		{"pace", plain, real},
	} {
		skip := find(t, c.check).skip
		if skip(c.skipped) == "" || skip(c.run) != "" {
			t.Errorf("%s: reason %q where it is left out, %q where it is run", c.check, skip(c.skipped), skip(c.run))
		}
	}
}

func TestInstantNeedsNoMeter(t *testing.T) {
	s := newSettings([]Option{Instant()})
	if err := checkMeter(&wire{noMeter: true}, s); err != nil {
		t.Error(err)
	}
}

func find(t *testing.T, name string) check {
	t.Helper()
	var names []string
	for _, c := range checks() {
		if c.name == name {
			return c
		}
		names = append(names, c.name)
	}
	t.Fatalf("no check %q among %s", name, strings.Join(names, ", "))
	return check{}
}
