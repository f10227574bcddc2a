//go:build cgo && !noaudio

package portaudio

import (
	"context"
	"fmt"
	"math"
	"sync/atomic"
	"time"

	"standoff/measure"
	"standoff/measure/audio"

	pa "github.com/gordonklaus/portaudio"
)

// warmUp is how many callbacks pass before playback starts: the first ones of a
// stream are late more often than not.
const warmUp = 4

// stallTime is how long the number of callbacks may stand still.
const stallTime = 3 * time.Second

// lookTime is how often the waiting goroutine looks.
const lookTime = 20 * time.Millisecond

// take is what the callback works with: everything is there before it runs, and it
// neither allocates nor locks.
type take struct {
	cfg       Config
	play      []float32
	mic, loop []float32

	calls  atomic.Int64 // callbacks so far
	at     atomic.Int64 // frames played and recorded
	hush   atomic.Bool  // play nothing any more
	over   atomic.Int64
	under  atomic.Int64
	peak   atomic.Uint32 // of the microphone since the last look, as bits of a float32
	broken atomic.Bool   // a buffer lacked a channel
}

func newTake(cfg Config, req audio.Request) *take {
	t := &take{cfg: cfg, play: append([]float32(nil), req.Excitation...), mic: make([]float32, len(req.Excitation))}
	if cfg.LoopbackChannel > 0 {
		t.loop = make([]float32, len(req.Excitation))
	}
	return t
}

// callback moves one buffer. in and out are memory of C, gone when it returns.
func (t *take) callback(in, out [][]float32, _ pa.StreamCallbackTimeInfo, flags pa.StreamCallbackFlags) {
	for _, channel := range out {
		clear(channel)
	}
	if t.calls.Add(1) <= warmUp || t.hush.Load() {
		return
	}
	if len(in) < t.cfg.inputs() || len(out) < t.cfg.OutputChannel {
		t.broken.Store(true)
		return
	}
	from := int(t.at.Load())
	if from >= len(t.play) {
		return
	}
	if flags&(pa.InputOverflow|pa.InputUnderflow) != 0 {
		t.over.Add(1)
	}
	if flags&(pa.OutputUnderflow|pa.OutputOverflow) != 0 {
		t.under.Add(1)
	}
	mic := in[t.cfg.InputChannel-1]
	n := copy(out[t.cfg.OutputChannel-1], t.play[from:])
	n = min(n, len(mic))
	copy(t.mic[from:from+n], mic)
	if t.loop != nil {
		copy(t.loop[from:from+n], in[t.cfg.LoopbackChannel-1])
	}
	t.notePeak(mic[:n])
	t.at.Store(int64(from + n))
}

func (t *take) notePeak(x []float32) {
	p := math.Float32frombits(t.peak.Load())
	for _, v := range x {
		p = max(p, v, -v)
	}
	t.peak.Store(math.Float32bits(p))
}

// watch waits for the end of the take, the end of the context, or the silence of
// the audio system.
func (t *take) watch(ctx context.Context, meter func(audio.Meter)) error {
	tick := time.NewTicker(lookTime)
	defer tick.Stop()
	calls, last := int64(-1), time.Now()
	for {
		if n := t.calls.Load(); n != calls {
			calls, last = n, time.Now()
		} else if time.Since(last) > stallTime {
			return fmt.Errorf("%w: no sound has moved for %v", ErrGone, stallTime)
		}
		if t.broken.Load() {
			return fmt.Errorf("audio: the device hands out fewer channels than it said")
		}
		at := int(t.at.Load())
		if meter != nil {
			meter(audio.Meter{Done: float64(at) / float64(len(t.play)), Peak: float64(math.Float32frombits(t.peak.Swap(0)))})
		}
		if err := ctx.Err(); err != nil {
			t.silence()
			return err
		}
		if at >= len(t.play) {
			return nil
		}
		select {
		case <-tick.C:
		case <-ctx.Done():
		}
	}
}

// silence stops playback and waits until the audio system has seen it.
func (t *take) silence() {
	t.hush.Store(true)
	seen := t.calls.Load()
	for begin := time.Now(); t.calls.Load() < seen+2 && time.Since(begin) < 300*time.Millisecond; {
		time.Sleep(2 * time.Millisecond)
	}
}

// recording is what came back, kept within full scale. Values that are no numbers
// are an error: no converter makes them.
func (t *take) recording(started time.Time) (*measure.Recording, error) {
	for _, x := range [][]float32{t.mic, t.loop} {
		for i, v := range x {
			if v-v != 0 {
				return nil, fmt.Errorf("audio: sample %d is no number", i)
			}
			x[i] = min(max(v, -1), 1)
		}
	}
	return &measure.Recording{SampleRate: t.cfg.SampleRate, Mic: t.mic, Loopback: t.loop,
		Overflows: int(t.over.Load()), Underflows: int(t.under.Load()), Started: started}, nil
}
