package bench

import (
	"context"
	"errors"
	"math"
	"slices"
	"testing"
	"time"

	"standoff/measure/audio"
	"standoff/measure/audio/audiotest"
)

// good is a plausible bench.
func good() Config {
	return Config{
		Seed: 1, SpeedOfSound: 344,
		Capsule: Capsule{Form: PhaseShift, Body: Sphere, Rear: Delay, GradientFraction: 0.5, PortSpacing: 0.027,
			Setback: 0.006, Sensitivity: 0.5, Resonance: 9000, ResonanceQ: 0.8, HighPass: 18},
		Source: Source{Radius: 0.017, HighPass: 90, RollOff: 16000, Second: 0.002, Third: 0.001},
		Room:   &Room{Size: [3]float64{5, 4, 2.7}, Reflection: 0.5},
		Noise:  2e-5, Bits: 24, Latency: 0.012, Loopback: true,
	}
}

func TestContract(t *testing.T) {
	t.Parallel() // most of it waits
	with := func(change func(*Config)) func(*testing.T) audio.Recorder {
		return func(t *testing.T) audio.Recorder {
			c := good()
			change(&c)
			return open(t, c)
		}
	}
	t.Run("fast", func(t *testing.T) { audiotest.Run(t, with(func(*Config) {})) })
	t.Run("real time", func(t *testing.T) {
		audiotest.Run(t, with(func(c *Config) { c.RealTime = true }), audiotest.RealTime())
	})
	t.Run("other clock", func(t *testing.T) {
		audiotest.Run(t, with(func(c *Config) { c.ClockOffset, c.Bits, c.Room = -200e-6, 0, nil }))
	})
}

// A sealed capsule 30 mm from a point gives the excitation back as it was, later by
// travel and latency, and the loopback does so later by the latency alone.
func TestLevelAndDelay(t *testing.T) {
	c := plain()
	c.SpeedOfSound, c.Latency, c.Loopback = 360, 0.01, true // 30 mm take 4 samples
	x := sweepLike(24000)
	for metres, delay := range map[float64]int{0.03: 4, 0.3: 40} {
		rec := record(t, open(t, c), request(x, metres))
		for i := range 20000 {
			// The microphone loses the excitation's mean, 2e−8.
			near(t, "microphone", float64(rec.Mic[i+480+delay]), float64(x[i])*0.03/metres, 5e-8)
			near(t, "loopback", float64(rec.Loopback[i+480]), float64(x[i]), 2e-8)
			if t.Failed() {
				t.Fatalf("sample %d", i)
			}
		}
	}
}

// sweepLike is 0.1 strong and smooth from silence to silence.
func sweepLike(n int) []float32 {
	x := make([]float32, n)
	for i := range x {
		u := float64(i) / float64(n)
		window := 0.5 - 0.5*math.Cos(2*math.Pi*u)
		x[i] = float32(0.1 * window * math.Sin(2*math.Pi*float64(n)*u*u/5))
	}
	return x
}

// A latency may be a part of a sample; 1 kHz shows it in the loopback.
func TestFractionalLatency(t *testing.T) {
	c := plain()
	c.Latency, c.Loopback = 1.3e-3+1/144000., true
	x := sine(48000, 1000, 0.5)
	rec := record(t, open(t, c), request(x, 0.03))
	for i := 5000; i < 40000; i += 7 {
		want := 0.5 * math.Sin(2*math.Pi*1000*(float64(i)/48000-c.Latency))
		near(t, "loopback", float64(rec.Loopback[i]), want, 1e-5)
	}
}

// What arrives after the end of a take is not in it, nor folded on to its beginning:
// 5 s of latency, or 900 m of travel on a bench that has made a take close by.
func TestWhatComesTooLate(t *testing.T) {
	x := sweepLike(24000)
	late := plain()
	late.Latency, late.Loopback = 5, true
	rec := record(t, open(t, late), request(x, 0.03))
	near(t, "microphone", rms(rec.Mic), 0, 1e-8)
	near(t, "loopback", rms(rec.Loopback), 0, 1e-8)
	b := open(t, plain())
	if rms(record(t, b, request(x, 0.03)).Mic) < 0.01 {
		t.Error("nothing arrived from 30 mm")
	}
	near(t, "from far away", rms(record(t, b, request(x, 900)).Mic), 0, 1e-8)
}

// What the package comment says of the level: a sweep at −20 dBFS leaves a figure-8
// at 30 mm (36 mm to its centre) some 7 dB below full scale.
func TestHeadroomOfAFigureEight(t *testing.T) {
	c := good()
	c.Capsule.GradientFraction = 1
	c.Room, c.Noise = nil, 0
	h := transfer(t, c, 0.036)
	var most float64
	for f := 20; f < 20000; f++ {
		most = math.Max(most, decibels(h[f]))
	}
	near(t, "peak in dBFS", most-20, -7, 0.5)
}

// The same seed makes the same takes in whatever order, on a bench of its own or
// not; another seed or take has other noise.
func TestDeterminism(t *testing.T) {
	x := sweepLike(12000)
	c := good()
	c.TapeError, c.Hum, c.HumFrequency = 0.0005, 1e-4, 50
	take := func(b *Bench, metres float64, number int) []float32 {
		req := request(x, metres)
		req.Number = number
		return record(t, b, req).Mic
	}
	b := open(t, c)
	first, second, other := take(b, 0.03, 1), take(b, 0.03, 2), take(b, 0.1, 1)
	again := open(t, c)
	if !slices.Equal(take(again, 0.1, 1), other) || !slices.Equal(take(again, 0.03, 2), second) || !slices.Equal(take(again, 0.03, 1), first) {
		t.Error("another order makes other takes")
	}
	if slices.Equal(first, second) {
		t.Error("two takes have the same noise")
	}
	c.Seed = 2
	if slices.Equal(take(open(t, c), 0.03, 1), first) {
		t.Error("two seeds make the same take")
	}
}

// The bench keeps a copy of its configuration.
func TestConfigIsCopied(t *testing.T) {
	c := good()
	c.TapeErrors = map[string]float64{"30mm": 0.001}
	c.Faults = []Fault{{Kind: Gain, Amount: 2}}
	b := open(t, c)
	c.TapeErrors["30mm"], c.Faults[0].Kind, c.Room.Reflection = 0.5, Dead, 0.9
	if got := b.TapeErrorAt("30mm"); got != 0.001 {
		t.Errorf("tape error is now %g", got)
	}
	if b.cfg.Faults[0].Kind != Gain || b.cfg.Room.Reflection != 0.5 {
		t.Error("faults or room changed")
	}
}

func TestStartedByTheGivenClock(t *testing.T) {
	c := plain()
	moment := time.Date(2031, 2, 3, 4, 5, 6, 0, time.UTC)
	c.Now = func() time.Time { return moment }
	if got := record(t, open(t, c), request([]float32{1}, 0.03)).Started; !got.Equal(moment) {
		t.Errorf("started %v", got)
	}
}

func TestBadExcitation(t *testing.T) {
	b := open(t, plain())
	for _, v := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		if _, err := b.Record(context.Background(), request([]float32{0, float32(v)}, 0.03)); err == nil {
			t.Errorf("an excitation of %g was accepted", v)
		}
	}
	c := plain()
	c.Loopback = true
	for _, v := range record(t, open(t, c), request([]float32{0, 3, -3, 0}, 0.03)).Loopback {
		if v > 1 || v < -1 {
			t.Errorf("an output gave out %g", v)
		}
	}
}

// In real time an interrupted take ends at once, whatever it is at: a quarter of a
// second is for a loaded machine.
func TestInterruptedInRealTime(t *testing.T) {
	c := good()
	c.RealTime = true
	for _, after := range []time.Duration{20 * time.Millisecond, time.Second} { // in computation, in delivery
		ctx, cancel := context.WithCancel(context.Background())
		var cancelled time.Time
		time.AfterFunc(after, func() { cancelled = time.Now(); cancel() })
		_, err := open(t, c).Record(ctx, request(make([]float32, 10*48000), 0.03))
		if took := time.Since(cancelled); !errors.Is(err, context.Canceled) || took > 250*time.Millisecond {
			t.Errorf("after %v: %v, %v later", after, err, took)
		}
	}
}
