package bench

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"slices"
	"sync"
	"time"

	"standoff/measure"
	"standoff/measure/audio"
)

// Bench is a recorder that computes what would have been recorded.
type Bench struct {
	cfg Config

	mu     sync.Mutex
	closed bool
	paths  map[pathKey][]complex128
	order  []pathKey // oldest first
}

// pathKey says what a transfer function depends on, besides the configuration.
type pathKey struct {
	distance float64
	rate, n  int
}

// pathsKept bounds the memory: each takes some 2 MB.
const pathsKept = 16

// New makes a bench; the error joins everything that is impossible in its
// configuration.
func New(cfg Config) (*Bench, error) {
	if err := cfg.validate(); err != nil {
		return nil, fmt.Errorf("virtual bench: %w", err)
	}
	cfg.TapeErrors = maps.Clone(cfg.TapeErrors)
	cfg.Faults = slices.Clone(cfg.Faults)
	if cfg.Now == nil {
		cfg.Now = time.Now
	}
	return &Bench{cfg: cfg, paths: map[pathKey][]complex128{}}, nil
}

// Name is "virtual bench".
func (b *Bench) Name() string { return "virtual bench" }

// Close makes every later request fail.
func (b *Bench) Close() error {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.closed = true
	return nil
}

func (b *Bench) isClosed() bool {
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.closed
}

// Record computes one take and delivers it as a sound card would: bit by bit, and
// in real time where the configuration asks for it.
func (b *Bench) Record(ctx context.Context, req audio.Request) (*measure.Recording, error) {
	switch {
	case b.isClosed():
		return nil, audio.ErrClosed
	case len(req.Excitation) == 0:
		return nil, errors.New("a take needs something to play")
	case req.SampleRate <= 0:
		return nil, errors.New("a take needs a sample rate")
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	started := b.cfg.Now()
	begin := time.Now()
	mic, loopback, err := b.take(req)
	if err != nil {
		return nil, err
	}
	rec := &measure.Recording{SampleRate: req.SampleRate, Mic: mic, Loopback: loopback, Started: started}
	if err := b.deliver(ctx, req, rec, begin); err != nil {
		return nil, err
	}
	return rec, nil
}

// steps is into how many parts a take is delivered.
const steps = 64

// deliver lets the take pass by: the meter sees every part of it, and in real time
// each part waits for its moment.
func (b *Bench) deliver(ctx context.Context, req audio.Request, rec *measure.Recording, begin time.Time) error {
	n := len(rec.Mic)
	for i := range steps {
		if b.cfg.RealTime {
			due := time.Duration(float64(n) / float64(req.SampleRate) * float64(i+1) / steps * float64(time.Second))
			if err := wait(ctx, due-time.Since(begin)); err != nil {
				return err
			}
		}
		if err := ctx.Err(); err != nil {
			return err
		}
		if req.Meter != nil {
			req.Meter(audio.Meter{Done: float64(i+1) / steps, Peak: peak(rec.Mic[i*n/steps : (i+1)*n/steps])})
		}
	}
	return ctx.Err()
}

func wait(ctx context.Context, d time.Duration) error {
	if d <= 0 {
		return nil
	}
	t := time.NewTimer(d)
	defer t.Stop()
	select {
	case <-t.C:
		return nil
	case <-ctx.Done():
		return ctx.Err()
	}
}

func peak(x []float32) float64 {
	var p float32
	for _, v := range x {
		p = max(p, v, -v)
	}
	return float64(p)
}
