package measure

import (
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"testing"
)

// inside lays a take into so many seconds of noise at the given rms, from the second
// on at which it is to begin, with silence around.
func inside(take []float32, rate int, begin, total, rms float64) []float32 {
	rng := rand.New(rand.NewPCG(uint64(total), 5))
	out := make([]float32, int(total*float64(rate)))
	for i := range out {
		out[i] = float32(rms * rng.NormFloat64())
	}
	from := int(math.Round(begin * float64(rate)))
	for i := range take {
		if from+i >= 0 && from+i < len(out) {
			out[from+i] = take[i]
		}
	}
	return out
}

func hear(t *testing.T, a *Analyser, rec *Recording) *TakeAnalysis {
	t.Helper()
	got, err := a.Hear(rec)
	if err != nil {
		t.Fatal(err)
	}
	return got
}

// The sweep is found anywhere, in noise 30 dB louder than it too, and what comes out
// is what comes out of the take alone.
func TestSweepIsFoundAnywhere(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	take := scene{gain: 0.05, delay: 300.4, noise: 1e-5, seed: 2}.record(a.exc)
	alone := hear(t, a, &Recording{SampleRate: 48000, Mic: take})
	for _, c := range []struct{ begin, total, rms float64 }{{0, 20, 0.3}, {3.21, 20, 0.01}, {17.9, 20, 0.3}, {11.1, 12.7, 0.1}, {40.5, 70, 0.5}} {
		got := hear(t, a, &Recording{SampleRate: 48000, Mic: inside(take, 48000, c.begin, c.total, c.rms)})
		what := fmt.Sprintf("at %g s of %g", c.begin, c.total)
		wantFlags(t, what, got)
		near(t, what+": arrival", got.Quality.Arrival, c.begin+300.4/48000, 0.2/48000)
		near(t, what+": level", got.Quality.Level, alone.Quality.Level, 1e-3*alone.Quality.Level)
	}
}

// A recording at another rate is what it is at the sweep's own.
func TestOtherSampleRates(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	alone := hear(t, a, scene{gain: 0.3, delay: 300.4, noise: 1e-5, seed: 2}.at(t, 48000))
	for _, rate := range []int{44100, 96000, 32000} {
		rec := scene{gain: 0.3, delay: 300.4 * float64(rate) / 48000, noise: 1e-5, seed: 2}.at(t, rate)
		got := hear(t, a, rec)
		what := fmt.Sprintf("%d Hz", rate)
		wantFlags(t, what, got)
		// A sweep begins at a whole sample.
		near(t, what+": arrival", got.Quality.Arrival, alone.Quality.Arrival, 1.0/float64(min(rate, 48000)))
		near(t, what+": level", got.Quality.Level, alone.Quality.Level, 2e-3*alone.Quality.Level)
		if !got.Timing.Resampled(a.exc) {
			t.Errorf("%s: not said to be resampled", what)
		}
	}
}

// at plays the test's sweep, sampled at another rate, through the scene.
func (s scene) at(t *testing.T, rate int) *Recording {
	t.Helper()
	sweep := testSweep
	sweep.SampleRate = rate
	sweep.To = math.Min(sweep.To, 0.45*float64(rate))
	// The same rate L, whatever its end.
	sweep.Duration = testSweep.L() * math.Log(sweep.To/sweep.From)
	e, err := SweepExcitation(sweep, testLevel)
	if err != nil {
		t.Fatal(err)
	}
	return &Recording{SampleRate: rate, Mic: s.record(e)}
}

// A sweep that is cut at either end is refused with the time that is missing; one that
// has lost silence only is not.
func TestCutSweeps(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	take := scene{gain: 0.4, delay: 50.3, noise: 1e-4, seed: 1}.record(a.exc)
	cut := func(first, last int) *TakeAnalysis {
		return hear(t, a, &Recording{SampleRate: 48000, Mic: take[first : len(take)-last]})
	}
	silence := len(a.exc.Samples) - a.exc.End
	wantFlags(t, "silence before cut", cut(9500, 0))
	wantFlags(t, "silence after cut", cut(0, silence-200))
	for _, more := range []int{150, 2400, 10000, 20000} {
		got := cut(9600+more, 0)
		wantFlags(t, fmt.Sprintf("%d samples of the beginning cut", more), got, Incomplete)
		got = cut(0, silence+more)
		wantFlags(t, fmt.Sprintf("%d samples of the end cut", more), got, Incomplete)
	}
	long := inside(take, 48000, -0.6, 30, 1e-4) // the sweep begins at 0.2 s
	wantFlags(t, "the beginning of a long file cut", hear(t, a, &Recording{SampleRate: 48000, Mic: long}), Incomplete)
	long = inside(take, 48000, 29.5, 30, 1e-4)
	got := hear(t, a, &Recording{SampleRate: 48000, Mic: long})
	wantFlags(t, "the end of a long file cut", got, Incomplete)
	if !Incomplete.Rejects() || ClockDrift.Rejects() || Unsynchronised.Rejects() {
		t.Error("a cut take is used, or one is left out for its clock")
	}
}

// Full scale is looked for in what was recorded: interpolation hides it.
func TestClippingBeforeResampling(t *testing.T) {
	a := testAnalyser(t)
	rec := scene{gain: 2.5, delay: 300, noise: 1e-4, seed: 1}.at(t, 44100)
	if got := hear(t, a, rec); !slices.Contains(got.Flags, Clipped) {
		t.Errorf("flags %v", got.Flags)
	}
	if got := hear(t, a, rec); got.Quality.Peak != 1 {
		t.Errorf("peak %g", got.Quality.Peak)
	}
}

// Five minutes without a sweep are silent, and take no more memory than half a minute.
func TestMemoryDoesNotGrowWithTheFile(t *testing.T) {
	a := testAnalyser(t)
	use := func(seconds float64) uint64 {
		rec := &Recording{SampleRate: 48000, Mic: inside(nil, 48000, 0, seconds, 0.1)}
		live := peakMemory(func() { wantFlags(t, "noise", hear(t, a, rec), Silent) })
		runtime.KeepAlive(rec)
		return live
	}
	short, long := use(30), use(300)
	t.Logf("30 s: %d MB, 300 s: %d MB on top of the recording", short>>20, long>>20)
	if long > short+64<<20 || long > 200<<20 {
		t.Errorf("300 s take %d MB, 30 s %d MB", long>>20, short>>20)
	}
}

// peakMemory is by how much the heap grew at most while do ran, seen every 2 ms.
func peakMemory(do func()) uint64 {
	var m runtime.MemStats
	runtime.GC()
	runtime.ReadMemStats(&m)
	before, most := m.HeapAlloc, m.HeapAlloc
	done := make(chan bool)
	go func() { do(); close(done) }()
	for {
		select {
		case <-done:
			return most - before
		default:
			runtime.ReadMemStats(&m)
			most = max(most, m.HeapAlloc)
			runtime.Gosched()
		}
	}
}

// Whatever a file holds, it is judged and nothing breaks.
func FuzzHear(f *testing.F) {
	f.Add(uint16(44100), uint32(100000), int32(-5), uint8(3))
	f.Add(uint16(48000), uint32(0), int32(0), uint8(0))
	f.Add(uint16(8000), uint32(500000), int32(40000), uint8(1))
	a := testAnalyser(f)
	take := scene{gain: 0.4, delay: 50.3, noise: 1e-4, seed: 1}.record(a.exc)
	f.Fuzz(func(t *testing.T, rate uint16, samples uint32, begin int32, kind uint8) {
		if rate < 2000 || samples > 1<<20 {
			return
		}
		mic := make([]float32, samples)
		for i := range mic {
			if at := i - int(begin); at >= 0 && at < len(take) && kind&1 != 0 {
				mic[i] = take[at]
			}
			if kind&2 != 0 {
				mic[i] += float32(i%100)/100 - 0.5
			}
		}
		rec := &Recording{SampleRate: int(rate), Mic: mic}
		if kind&4 != 0 {
			rec.Loopback = mic
		}
		got, err := a.Clone().Hear(rec)
		if err != nil {
			t.Fatal(err)
		}
		if len(got.Flags) != len(got.Reasons) || math.IsNaN(got.Quality.Arrival) {
			t.Errorf("flags %v, %q, arrival %g", got.Flags, got.Reasons, got.Quality.Arrival)
		}
		if len(got.Excess.Hz) > 0 {
			ReadClocks([]Excess{got.Excess, got.Excess}, a.exc.L)
		}
	})
}
