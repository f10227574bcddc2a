package audiotest

import (
	"context"
	"errors"
	"fmt"
	"sync"
	"time"

	"standoff/measure/audio"
)

// meterLog keeps what a recorder tells its meter, from whatever goroutine.
type meterLog struct {
	mu    sync.Mutex
	calls []audio.Meter
	over  bool // Record has returned
	late  int  // calls after that
}

func (l *meterLog) take(m audio.Meter) {
	l.mu.Lock()
	defer l.mu.Unlock()
	if l.over {
		l.late++
		return
	}
	l.calls = append(l.calls, m)
}

func (l *meterLog) end() {
	l.mu.Lock()
	defer l.mu.Unlock()
	l.over = true
}

func checkMeter(rec audio.Recorder, s settings) error {
	var log meterLog
	req := s.good()
	req.Meter = log.take
	_, err := rec.Record(context.Background(), req)
	log.end()
	if err != nil {
		return fmt.Errorf("a good request failed: %w", err)
	}
	time.Sleep(100 * time.Millisecond) // long enough for a stray call of a live display
	return log.judge(s.instant)
}

func (l *meterLog) judge(instant bool) error {
	l.mu.Lock()
	defer l.mu.Unlock()
	if l.late > 0 {
		return fmt.Errorf("%d calls of the meter after the take had returned", l.late)
	}
	if len(l.calls) == 0 && !instant {
		return errors.New("the meter was never called")
	}
	before := 0.0
	for i, m := range l.calls {
		if !(m.Done >= 0 && m.Done <= 1) {
			return fmt.Errorf("call %d says that %v of the take is done", i, m.Done)
		}
		if m.Done < before {
			return fmt.Errorf("call %d goes back from %v to %v", i, before, m.Done)
		}
		if !(m.Peak >= 0 && m.Peak <= 1) {
			return fmt.Errorf("call %d has a peak of %v", i, m.Peak)
		}
		before = m.Done
	}
	return nil
}
