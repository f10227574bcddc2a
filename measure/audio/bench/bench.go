package bench

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"math"
	"slices"
	"sync"
	"time"

	"standoff/measure"
	"standoff/measure/audio"
)

// Bench is a recorder that computes what would have been recorded.
type Bench struct {
	cfg Config

	mu     sync.Mutex // of closed
	closed bool

	work   sync.Mutex // of what is kept between takes
	paths  paths
	played *played
}

// New makes a bench; the error joins everything that is impossible in its
// configuration.
func New(cfg Config) (*Bench, error) {
	if err := cfg.validate(); err != nil {
		return nil, fmt.Errorf("virtual bench: %w", err)
	}
	cfg.TapeErrors = maps.Clone(cfg.TapeErrors)
	cfg.Faults = slices.Clone(cfg.Faults)
	if cfg.Room != nil {
		room := *cfg.Room
		cfg.Room = &room
	}
	if cfg.Now == nil {
		cfg.Now = time.Now
	}
	return &Bench{cfg: cfg}, nil
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
// in real time where the configuration asks for it. Beyond full scale the
// excitation is clipped, as an output would. A place at which the capsule would
// stand in the loudspeaker or in a wall is an error.
func (b *Bench) Record(ctx context.Context, req audio.Request) (*measure.Recording, error) {
	if b.isClosed() {
		return nil, audio.ErrClosed
	}
	if err := check(req); err != nil {
		return nil, fmt.Errorf("virtual bench: %w", err)
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	started, begin := b.cfg.Now(), time.Now()
	mic, loopback, err := b.takeOrLeave(ctx, req)
	if err != nil {
		return nil, err
	}
	if err := b.deliver(ctx, req, mic, begin); err != nil {
		return nil, err
	}
	return &measure.Recording{SampleRate: req.SampleRate, Mic: mic, Loopback: loopback, Started: started}, nil
}

func check(req audio.Request) error {
	switch {
	case len(req.Excitation) == 0:
		return errors.New("a take needs something to play")
	case req.SampleRate <= 0:
		return errors.New("a take needs a sample rate")
	}
	for i, v := range req.Excitation {
		if v-v != 0 { // NaN and infinities
			return fmt.Errorf("sample %d of the excitation is %v", i, v)
		}
	}
	return nil
}

// takeOrLeave computes a take, and leaves the computation to itself when the context
// ends: it is over within a moment, and the next take waits for it.
func (b *Bench) takeOrLeave(ctx context.Context, req audio.Request) (mic, loopback []float32, err error) {
	// The caller may do what it likes with its own once it has been answered.
	req.Excitation = slices.Clone(req.Excitation)
	done := make(chan struct{})
	var m, l []float32
	var failed error
	go func() {
		defer close(done)
		m, l, failed = b.take(ctx, req)
	}()
	select {
	case <-done:
		return m, l, failed
	case <-ctx.Done():
		return nil, nil, ctx.Err()
	}
}

// meterEvery is how often the meter is called, in time of the recording.
const meterEvery = 50 * time.Millisecond

// deliver lets the take pass by: the meter sees every part of it, and in real time
// each part waits for its moment.
func (b *Bench) deliver(ctx context.Context, req audio.Request, mic []float32, begin time.Time) error {
	n := len(mic)
	duration := time.Duration(float64(n) / float64(req.SampleRate) * float64(time.Second))
	parts := int(duration/meterEvery) + 1
	for i := range parts {
		if b.cfg.RealTime {
			due := time.Duration(float64(duration) * float64(i+1) / float64(parts))
			wait(ctx, due-time.Since(begin))
		}
		if err := ctx.Err(); err != nil {
			return err
		}
		if req.Meter != nil {
			done := float64(i+1) / float64(parts)
			req.Meter(audio.Meter{Done: done, Peak: peak(mic[i*n/parts : (i+1)*n/parts])})
		}
	}
	return ctx.Err()
}

// wait until d is over or the context is.
func wait(ctx context.Context, d time.Duration) {
	if d <= 0 {
		return
	}
	t := time.NewTimer(d)
	defer t.Stop()
	select {
	case <-t.C:
	case <-ctx.Done():
	}
}

func peak(x []float32) float64 {
	var p float64
	for _, v := range x {
		p = math.Max(p, math.Abs(float64(v)))
	}
	return p
}
