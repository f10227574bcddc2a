package measure

import (
	"fmt"
	"math"
	"slices"
	"testing"
)

// The direct sound is timed to a tenth of a sample wherever it falls between
// samples, in noise of 40 dB below the sweep too.
func TestArrivalBetweenSamples(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	for _, delay := range []float64{0, 100, 123.25, 200.5, 377.87, 1000.1, 9600.4} {
		for _, noise := range []float64{0, 0.005} {
			got := scene{gain: 0.4, delay: delay, noise: noise, seed: 1}.take(a)
			near(t, fmt.Sprintf("arrival in noise of %g", noise), got.Impulse.Arrival, delay, 0.1)
			near(t, "arrival in seconds", got.Quality.Arrival, delay/48000, 0.1/48000)
			wantFlags(t, "clean", got)
		}
	}
}

// A loopback shows the latency, which the arrival does not count.
func TestLoopbackTakesLatencyOff(t *testing.T) {
	a := testAnalyser(t)
	mic, loop := scene{gain: 0.3, delay: 612.3}, scene{gain: 0.9, delay: 512.8}
	rec := &Recording{SampleRate: 48000, Mic: mic.record(a.exc), Loopback: loop.record(a.exc)}
	got := a.Take(rec)
	near(t, "latency", got.Impulse.Latency, 512.8, 0.1)
	near(t, "arrival", got.Quality.Arrival*48000, 99.5, 0.1)
	rec.Loopback = make([]float32, len(rec.Mic))
	near(t, "latency of a dead loopback", a.Take(rec).Impulse.Latency, 0, 0)
}

// A recorder that starts late loses part of the silence before the sweep, and the
// arrival comes out negative; one that starts early puts more before it.
func TestLateAndEarlyStart(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	mic := scene{gain: 0.4, delay: 50.3, noise: 1e-4}.record(a.exc)
	for _, late := range []int{1, 49, 2000, 7000, 9000} {
		got := a.Take(&Recording{SampleRate: 48000, Mic: mic[late:]})
		near(t, fmt.Sprintf("arrival when %d samples late", late), got.Impulse.Arrival, 50.3-float64(late), 0.1)
		wantFlags(t, "late", got)
	}
	for _, early := range []int{500, 5000, 20000} {
		shifted := append(make([]float32, early), mic[:len(mic)-early]...)
		got := a.Take(&Recording{SampleRate: 48000, Mic: shifted})
		near(t, fmt.Sprintf("arrival when %d samples early", early), got.Impulse.Arrival, 50.3+float64(early), 0.1)
		wantFlags(t, "early", got)
	}
}

// The signal-to-noise ratio of a gated response at f is that of the gain g against
// the noise σ²·4f/(L·fs²·level²) (see dsp.Sweep.Spectrum) times the gate's energy:
// for its gate of 2 ms lead (half of it rising) and 18 ms (8 ms of it falling) that is
// 14.375 ms·fs. The median over a log grid is that of the middle frequency.
func TestSignalToNoise(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	for _, p := range []struct{ gain, noise float64 }{{0.5, 1e-3}, {0.1, 1e-3}, {0.5, 0.02}, {0.05, 1e-4}} {
		got := scene{gain: p.gain, delay: 300, noise: p.noise, seed: 3}.take(a)
		fs, middle := 48000.0, math.Sqrt(80.0*8000)
		density := p.noise * p.noise * 4 * middle / (testSweep.L() * fs * fs * testLevel * testLevel)
		want := p.gain * p.gain / (density * 0.014375 * fs)
		near(t, "SNR in dB", 10*math.Log10(got.Quality.SNR), 10*math.Log10(want), 1)
		near(t, "level", got.Quality.Level/p.gain, 1, 0.02)
		near(t, "peak", got.Quality.Peak, p.gain*testLevel, 5*p.noise+0.02*p.gain)
	}
}

func TestTakeFlags(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	good := scene{gain: 0.4, delay: 300, noise: 1e-4, seed: 1}
	take := func(mic []float32) *TakeAnalysis { return a.Take(&Recording{SampleRate: 48000, Mic: mic}) }

	wantFlags(t, "good", good.take(a))
	loud := good
	loud.gain = 2.5
	wantFlags(t, "clipped", loud.take(a), Clipped)
	wantFlags(t, "digital silence", take(make([]float32, len(a.exc.Samples))), Silent)
	wantFlags(t, "empty", take(nil), Silent)
	wantFlags(t, "noise only", scene{noise: 0.01, seed: 5}.take(a), Silent)
	wantRejected(t, "hum only", scene{hum: 0.1, noise: 1e-4, seed: 5}.take(a))
	noisy := good
	noisy.noise, noisy.gain = 0.03, 0.02
	if got := noisy.take(a); !slices.Contains(got.Flags, LowSNR) {
		t.Errorf("in much noise: flags %v, want %v", got.Flags, LowSNR)
	}
	bad := good
	bad.second = 0.5
	wantFlags(t, "distorted", bad.take(a), Distorted)

	lost := &Recording{SampleRate: 48000, Mic: good.record(a.exc), Overflows: 1, Underflows: 1}
	wantFlags(t, "overflow", a.Take(lost), Xrun)
	for _, f := range []Flag{Clipped, LowSNR, Dropout, Xrun, Silent} {
		if !f.Rejects() {
			t.Errorf("a take that is %s is used", f)
		}
	}
	if Distorted.Rejects() || Hum.Rejects() {
		t.Error("a take with a warning only is left out")
	}
}

// A single clean pass at full scale is no clipping.
func TestTwoFullSamplesAreNoClipping(t *testing.T) {
	a := testAnalyser(t)
	mic := scene{gain: 0.4, delay: 300, noise: 1e-4}.record(a.exc)
	mic[3000], mic[3001] = 1, -1
	if got := a.Take(&Recording{SampleRate: 48000, Mic: mic}); len(got.Flags) > 0 && got.Flags[0] == Clipped {
		t.Errorf("%v: %q", got.Flags, got.Reasons)
	}
}

// What goes wrong with a buffer: zeros in its place, the one before again, or it is
// missing and all that follows comes early.
var losses = map[string]func(mic []float32, at, n int) []float32{
	"zeros": func(mic []float32, at, n int) []float32 {
		clear(mic[at : at+n])
		return mic
	},
	"repeated": func(mic []float32, at, n int) []float32 {
		copy(mic[at:at+n], mic[at-n:at])
		return mic
	},
	"missing": func(mic []float32, at, n int) []float32 {
		return append(append(append([]float32(nil), mic[:at]...), mic[at+n:]...), make([]float32, n)...)
	},
}

// The sweep is of the default length: in a shorter one lost data hide more easily
// among what a room may do.
func TestDropouts(t *testing.T) {
	t.Parallel()
	sweep := testSweep
	sweep.From, sweep.Duration = 20, 5
	e, err := SweepExcitation(sweep, testLevel)
	if err != nil {
		t.Fatal(err)
	}
	a, err := NewAnalyser(e, len(e.Samples), 80, 8000)
	if err != nil {
		t.Fatal(err)
	}
	clean := scene{gain: 0.4, delay: 300.3, noise: 3e-4, second: 0.01, third: 0.01, highPass: 70, seed: 2}.record(a.exc)
	wantFlags(t, "nothing lost", a.Take(&Recording{SampleRate: 48000, Mic: clean}))
	for name, lose := range losses {
		for _, n := range []int{64, 1024, 3000} {
			for _, part := range []float64{0.35, 0.75} {
				at := a.exc.Begin + int(part*float64(a.exc.End-a.exc.Begin))
				got := a.Take(&Recording{SampleRate: 48000, Mic: lose(slices.Clone(clean), at, n)})
				if !slices.Contains(got.Flags, Dropout) {
					t.Errorf("%d samples %s after %.0f %%: flags %v", n, name, 100*part, got.Flags)
				}
			}
		}
	}
}

// Zeros in place of sound are found however short the sweep and loud the noise.
func TestZerosAreDropouts(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	for _, n := range []int{64, 500, 2048, 8000} {
		mic := scene{gain: 0.4, delay: 300.3, noise: 0.01, second: 0.05, seed: 2}.record(a.exc)
		got := a.Take(&Recording{SampleRate: 48000, Mic: losses["zeros"](mic, a.exc.Begin+20000, n)})
		wantFlags(t, fmt.Sprintf("%d zeros", n), got, Dropout)
	}
}

// Noise, distortion, hum, a room and the near-field rise are no dropouts.
func TestNoFalseDropouts(t *testing.T) {
	t.Parallel()
	a := testAnalyser(t)
	for name, s := range map[string]scene{
		"clean":            {gain: 0.4, delay: 300.3},
		"quiet":            {gain: 0.01, delay: 300.3, noise: 1e-6},
		"noisy":            {gain: 0.4, delay: 300.3, noise: 0.01},
		"distorted":        {gain: 0.4, delay: 300.3, noise: 1e-4, second: 0.02, third: 0.02},
		"humming":          {gain: 0.4, delay: 300.3, noise: 1e-4, hum: 0.005},
		"with an echo":     {gain: 0.4, delay: 300.3, noise: 1e-4, echo: 0.5, echoDelay: 700},
		"near":             {gain: 0.02, delay: 300.3, noise: 1e-5, w: 5000, highPass: 70},
		"near, all of it":  {gain: 0.02, delay: 300.3, noise: 1e-4, w: 3000, highPass: 70, hum: 1e-3, second: 0.02, third: 0.02, echo: 0.1, echoDelay: 400},
		"sixteen bits":     {gain: 0.003, delay: 300.3, noise: 1e-5},
		"distorted, clean": {gain: 0.4, delay: 300.3, second: 0.02},
	} {
		for seed := range uint64(2) {
			s.seed = seed
			mic := s.record(a.exc)
			if name == "sixteen bits" {
				for i, v := range mic {
					mic[i] = float32(math.Round(float64(v)*32768) / 32768)
				}
			}
			wantFlags(t, name, a.Take(&Recording{SampleRate: 48000, Mic: mic}))
		}
	}
}

// For x + a·x² the second harmonic is a/2 of the fundamental; its pulse stands 90°
// away, which takes up to 3 dB off its peak.
func TestSecondHarmonic(t *testing.T) {
	a := testAnalyser(t)
	for _, second := range []float64{0.02, 0.1} {
		got := scene{gain: 0.4, delay: 300.3, noise: 1e-5, second: second}.take(a).Quality.Second / (second / 2)
		if got < 0.65 || got > 1.1 {
			t.Errorf("second harmonic of %g %%: %.2f of what it is", 50*second, got)
		}
	}
	if got := (scene{gain: 0.4, delay: 300.3, noise: 1e-5}).take(a).Quality.Second; got > 0.001 {
		t.Errorf("second harmonic of an undistorted take: %g", got)
	}
}

func wantRejected(t *testing.T, what string, got *TakeAnalysis) {
	t.Helper()
	if !slices.ContainsFunc(got.Flags, Flag.Rejects) {
		t.Errorf("%s: flags %v, none of which rejects it", what, got.Flags)
	}
}
