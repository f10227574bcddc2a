package audiotest

import (
	"context"
	"errors"
	"fmt"

	"standoff/measure/audio"
)

func checkBadRequests(rec audio.Recorder, s settings) error {
	bad := map[string]func(*audio.Request){
		"no excitation":           func(r *audio.Request) { r.Excitation = nil },
		"an empty excitation":     func(r *audio.Request) { r.Excitation = []float32{} },
		"no sample rate":          func(r *audio.Request) { r.SampleRate = 0 },
		"a negative sample rate":  func(r *audio.Request) { r.SampleRate = -48000 },
		"neither of what it asks": func(r *audio.Request) { *r = audio.Request{} },
	}
	var errs []error
	for what, spoil := range bad {
		req := s.good()
		spoil(&req)
		if got, err := rec.Record(context.Background(), req); err == nil {
			errs = append(errs, fmt.Errorf("a request with %s was accepted", what))
		} else if got != nil {
			errs = append(errs, fmt.Errorf("a request with %s brought a recording and an error", what))
		}
	}
	return errors.Join(errs...)
}

// checkAgain uses a recorder after each kind of error.
func checkAgain(rec audio.Recorder, s settings) error {
	if _, err := rec.Record(context.Background(), audio.Request{}); err == nil {
		return errors.New("an empty request was accepted")
	}
	if _, err := record(rec, s.good()); err != nil {
		return fmt.Errorf("after a bad request: %w", err)
	}
	if _, err := rec.Record(cancelled(), s.good()); err == nil {
		return errors.New("a cancelled context brought no error")
	}
	if _, err := record(rec, s.good()); err != nil {
		return fmt.Errorf("after a cancelled context: %w", err)
	}
	return nil
}

func checkClosed(rec audio.Recorder, s settings) error {
	for i := range 3 {
		if err := rec.Close(); err != nil {
			return fmt.Errorf("close number %d: %w", i+1, err)
		}
	}
	got, err := rec.Record(context.Background(), s.good())
	if !errors.Is(err, audio.ErrClosed) {
		return fmt.Errorf("a closed recorder answered with %v, not ErrClosed", err)
	}
	if got != nil {
		return errors.New("a closed recorder brought a recording")
	}
	if rec.Name() == "" {
		return errors.New("a closed recorder lost its name")
	}
	return nil
}

func cancelled() context.Context {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	return ctx
}
