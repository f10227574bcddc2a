package dsp

import (
	"math"
	"math/cmplx"
	"testing"
)

// sweeps are those of the tests: every sample rate, long and short, wide and
// narrow.
var sweeps = []Sweep{
	{From: 50, To: 3600, Duration: 1.5, SampleRate: 8000, Before: 0.1, After: 0.5},
	{From: 20, To: 20000, Duration: 2, SampleRate: 44100, Before: 0.2, After: 0.5},
	{From: 20, To: 20000, Duration: 10, SampleRate: 48000, Before: 0.3, After: 1},
	{From: 40, To: 16000, Duration: 1, SampleRate: 48000, After: 0.4},
	{From: 100, To: 10000, Duration: 5, SampleRate: 48000, Before: 0.05, After: 0.2},
	{From: 30, To: 20000, Duration: 3, SampleRate: 96000, Before: 0.1, After: 0.5},
	{From: 20, To: 40000, Duration: 2, SampleRate: 192000, Before: 0.1, After: 0.3},
}

// A. Farina, AES 122nd Convention, paper 7121 (2007): L = T/ln(f2/f1) and the
// n-th harmonic leads by L·ln n; numbers computed apart from the program for 20 Hz
// to 20 kHz in 10 s, and in the time that makes L 1.45 s (|X| from the sampled
// sweep's transform, of which the analytic one is within 1 %).
func TestSweepNumbers(t *testing.T) {
	s := Sweep{From: 20, To: 20000, Duration: 10, SampleRate: 48000}
	near(t, "L", s.L(), 1.4476482730, 1e-10)
	for n, want := range map[int]float64{1: 0, 2: 1.003433, 3: 1.590404, 4: 2.006867, 5: 2.329900} {
		near(t, "lead of a harmonic", s.HarmonicLead(n), want, 1e-6)
	}
	s.Duration = 10.016245154524
	near(t, "L", s.L(), 1.45, 1e-12)
	for n, want := range map[int]float64{2: 1.005063, 3: 1.592988, 4: 2.010127, 5: 2.333685} {
		near(t, "lead of a harmonic", s.HarmonicLead(n), want, 1e-6)
	}
	near(t, "|X(1 kHz)|", cmplx.Abs(s.Spectrum(1000)), 0.0190396, 0.01*0.0190396)
}

func near(t *testing.T, what string, got, want, within float64) {
	t.Helper()
	if !(math.Abs(got-want) <= within) {
		t.Errorf("%s: %.9g, want %.9g ± %.2g", what, got, want, within)
	}
}

// The sampled sweep's transform is the analytic one (Novak, Lotton & Simon, J.
// Audio Eng. Soc. 63, 786 (2015), eq. (43)), time zero where the frequency is f1.
// The stationary phase that it comes from needs some cycles per e-fold of the
// frequency, fL ≫ 1, and distance from the band's ends: 1 % from 1.5·f1 and 15/L
// to f2/1.2.
func TestSweepSpectrum(t *testing.T) {
	for _, s := range sweeps {
		x, fs := s.Samples(), float64(s.SampleRate)
		origin := float64(s.Start()) + s.lead()
		var hz []float64
		for f := math.Max(1.5*s.From, 15/s.L()); f < s.To/1.2; f *= 1.31 {
			hz = append(hz, f)
		}
		worst := 0.0
		for i, v := range DTFT(x, fs, origin, hz) {
			ratio := v / complex(fs, 0) / s.Spectrum(hz[i])
			worst = math.Max(worst, cmplx.Abs(ratio-1))
		}
		t.Logf("%d Hz, %g s: analytic spectrum within %.3f %%", s.SampleRate, s.Duration, 100*worst)
		if worst > 0.01 {
			t.Errorf("%+v: the spectrum is %.2f %% from the analytic one", s, 100*worst)
		}
	}
}

// Between f1 and f2 the amplitude is constant: √f·|X(f)| is flat to 0.1 dB from
// 1.2·f1 to 0.9·f2, for a sweep with 25 cycles per e-fold at least; below, the
// spectrum ripples, and deconvolution undoes it (see TestWire).
func TestSweepIsPink(t *testing.T) {
	for _, s := range sweeps {
		x, fs := s.Samples(), float64(s.SampleRate)
		var hz []float64
		for f := math.Max(1.2*s.From, 25/s.L()); f < 0.9*s.To; f *= 1.07 {
			hz = append(hz, f)
		}
		reference := 0.5 * math.Sqrt(s.L()) * fs
		for i, v := range DTFT(x, fs, 0, hz) {
			if dB := 20 * math.Log10(cmplx.Abs(v)*math.Sqrt(hz[i])/reference); math.Abs(dB) > 0.1 {
				t.Errorf("%d Hz, %g s: %+.3f dB at %.1f Hz", s.SampleRate, s.Duration, dB, hz[i])
			}
		}
	}
}

// The silences are silent, the sweep lasts as long as it should and stays within
// ±1, and it is sin(2πL·f(t)) with f(t) = f1·e^{t/L} (Novak et al. 2015): it passes
// zero where 2L·f is a whole number, upwards where that is even.
func TestSweepInTime(t *testing.T) {
	for _, s := range sweeps {
		x, fs := s.Samples(), float64(s.SampleRate)
		if len(x) != s.Len() {
			t.Errorf("%d samples, Len says %d", len(x), s.Len())
		}
		low, high := s.Edges()
		duration := (s.L()*math.Log(high/low) + s.Before + s.After) * fs
		near(t, "samples", float64(len(x)), duration, 4)
		end := len(x) - int(math.Round(s.After*fs))
		for i, v := range x {
			if silent := i < s.Start() || i >= end; silent && v != 0 || math.Abs(v) > 1 {
				t.Fatalf("%d Hz: sample %d is %g", s.SampleRate, i, v)
			}
		}
		zero := float64(s.Start()) + s.lead()
		for _, f := range []float64{2 * s.From, math.Sqrt(s.From * s.To), s.To / 10} {
			k := 2 * math.Round(s.L()*f)
			at := zero + s.L()*math.Log(k/(2*s.L()*s.From))*fs
			i := int(at)
			slope := 2 * math.Pi * k / (2 * s.L()) / fs
			here := x[i] + (x[i+1]-x[i])*(at-float64(i))
			near(t, "value where the phase is a whole turn", here, 0, slope*slope/8+1e-9)
			near(t, "slope there", (x[i+1]-x[i])/slope, 1, slope)
		}
	}
}

func TestSweepValidate(t *testing.T) {
	good := sweeps[2]
	if err := good.Validate(); err != nil {
		t.Error(err)
	}
	for name, spoil := range map[string]func(*Sweep){
		"low rate":       func(s *Sweep) { s.SampleRate = 7999 },
		"high rate":      func(s *Sweep) { s.SampleRate = 192001 },
		"from nothing":   func(s *Sweep) { s.From = 0 },
		"backwards":      func(s *Sweep) { s.To = 10 },
		"too high":       func(s *Sweep) { s.To = 0.47 * 48000 },
		"no time":        func(s *Sweep) { s.Duration = 0 },
		"too long":       func(s *Sweep) { s.Duration = 601 },
		"negative":       func(s *Sweep) { s.Before = -1 },
		"not a number":   func(s *Sweep) { s.From = math.NaN() },
		"long silence":   func(s *Sweep) { s.After = 601 },
		"nan duration":   func(s *Sweep) { s.Duration = math.NaN() },
		"infinite To":    func(s *Sweep) { s.To = math.Inf(1) },
		"nan silence":    func(s *Sweep) { s.After = math.NaN() },
		"infinite after": func(s *Sweep) { s.After = math.Inf(1) },
	} {
		s := good
		spoil(&s)
		if s.Validate() == nil {
			t.Errorf("%s: %+v is taken", name, s)
		}
	}
}

// 0 and 1 at the ends, ½ in the middle of the octaves, point symmetric in log f, monotone,
// and flat at both ends.
func TestSmoothStep(t *testing.T) {
	for _, ends := range [][2]float64{{14, 20}, {22000, 20000}} {
		zero, one := ends[0], ends[1]
		at := func(u float64) float64 { return SmoothStep(zero*math.Pow(one/zero, u), zero, one) }
		for _, u := range []float64{-3, -1e-9, 0} {
			near(t, "below", at(u), 0, 0)
			near(t, "above", at(1-u), 1, 1e-12)
		}
		near(t, "middle", at(0.5), 0.5, 1e-12)
		last := 0.0
		for u := 0.005; u < 1; u += 0.005 {
			near(t, "symmetry", at(u)+at(1-u), 1, 1e-12)
			if at(u) < last {
				t.Errorf("falls at %g", u)
			}
			last = at(u)
		}
		near(t, "start", at(0.02), 0, 1e-20)
		near(t, "end", at(0.98), 1, 1e-15)
	}
}
