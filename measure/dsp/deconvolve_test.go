package dsp

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

func deconvolverOf(t testing.TB, s Sweep, x []float64, extra int) *Deconvolver {
	t.Helper()
	low, high := s.Edges()
	d, err := NewDeconvolver(x, s.SampleRate, low, s.From, s.To, high, len(x)+extra)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

func single(x []float64) []float32 {
	out := make([]float32, len(x))
	for i, v := range x {
		out[i] = float32(v)
	}
	return out
}

// A wire – what is recorded is what was played – has the response 1: magnitude
// 0 ± 0.01 dB, phase 0 ± 0.1° from 1.2·f1 to 0.9·f2. It distorts nothing, so where the
// harmonics of a distortion would land (Farina 2000: L·ln n before the direct
// sound) there is less than −100 dB of its peak.
func TestWire(t *testing.T) {
	for _, s := range sweeps {
		x := s.Samples()
		d := deconvolverOf(t, s, x, 0)
		ir := d.Impulse(single(x))
		worstDB, worstDegrees := wireErrors(ir, s)
		peak, at := peakOf(ir)
		if at != 0 {
			t.Errorf("%d Hz: the pulse stands at %d", s.SampleRate, at)
		}
		highest := math.Inf(-1)
		for n := 2; n <= 5; n++ {
			level := 20 * math.Log10(largestAround(ir, -s.HarmonicLead(n)*float64(s.SampleRate), 0.01*float64(s.SampleRate))/peak)
			highest = math.Max(highest, level)
		}
		t.Logf("%6d Hz, %4g s: ±%.5f dB, ±%.5f°, harmonics below %.0f dB", s.SampleRate, s.Duration, worstDB, worstDegrees, highest)
		limit := -100.0
		if s.HarmonicLead(2)*s.From < 5 {
			limit = -85
		}
		if worstDB > 0.01 || worstDegrees > 0.1 || highest > limit {
			t.Errorf("%+v: ±%.4f dB, ±%.4f°, harmonics at %.1f dB", s, worstDB, worstDegrees, highest)
		}
	}
}

func wireErrors(ir []float64, s Sweep) (dB, degrees float64) {
	n := len(ir)
	coef := fourier.NewFFT(n).Coefficients(nil, ir)
	for i, c := range coef {
		f := float64(i) * float64(s.SampleRate) / float64(n)
		if f < 1.2*s.From || f > 0.9*s.To {
			continue
		}
		dB = math.Max(dB, math.Abs(20*math.Log10(cmplx.Abs(c))))
		degrees = math.Max(degrees, math.Abs(cmplx.Phase(c))*180/math.Pi)
	}
	return dB, degrees
}

func peakOf(x []float64) (peak float64, at int) {
	for i, v := range x {
		if math.Abs(v) > peak {
			peak, at = math.Abs(v), i
		}
	}
	return peak, at
}

// largestAround is the largest |x| within reach of a place, circularly.
func largestAround(x []float64, at, reach float64) float64 {
	var p float64
	for i := int(at - reach); i <= int(at+reach); i++ {
		p = math.Max(p, math.Abs(x[((i%len(x))+len(x))%len(x)]))
	}
	return p
}

// excerpt is the stretch of half a width either side of a place, windowed by a
// cosine taper over its outer quarters, and the origin that makes the place time zero.
func excerpt(x []float64, at float64, half int) (out []float64, origin float64) {
	first := int(math.Round(at)) - half
	out = Gate(2*half, half/2, half/2)
	for i := range out {
		out[i] *= x[(((first+i)%len(x))+len(x))%len(x)]
	}
	return out, at - float64(first)
}

// A memoryless polynomial y = x + a₂x² + a₃x³. With x = sin φ,
//
//	x² = ½ − ½cos 2φ,  x³ = ¾ sin φ − ¼ sin 3φ,
//
// and n·φ(t) = φ(t + L·ln n), so the response is 1 + ¾a₃ at time 0, a₂/2 in
// magnitude and −90° (−cos is sin turned by −90°) at −L·ln 2, and −a₃/4 at
// −L·ln 3; each gated by itself, ±0.05 dB and ±0.5°.
func TestPolynomialDistortion(t *testing.T) {
	const a2, a3 = 0.08, 0.05
	s := Sweep{From: 40, To: 20000, Duration: 4, SampleRate: 192000, Before: 0.1, After: 0.2}
	x := s.Samples()
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = v + a2*v*v + a3*v*v*v
	}
	ir := deconvolverOf(t, s, x, 0).Impulse(single(y))
	fs := float64(s.SampleRate)
	for _, p := range []struct {
		n    int
		want complex128
	}{{1, 1 + 0.75*a3}, {2, complex(0, -a2/2)}, {3, -a3 / 4}} {
		part, origin := excerpt(ir, -s.HarmonicLead(p.n)*fs, int(0.06*fs))
		var hz []float64
		for f := 300.0; f < 15000; f *= 1.2 {
			hz = append(hz, f)
		}
		for i, v := range DTFT(part, fs, origin, hz) {
			ratio := v / p.want
			dB, degrees := 20*math.Log10(cmplx.Abs(ratio)), cmplx.Phase(ratio)*180/math.Pi
			if math.Abs(dB) > 0.05 || math.Abs(degrees) > 0.5 {
				t.Errorf("harmonic %d at %.0f Hz: %+.3f dB, %+.2f°", p.n, hz[i], dB, degrees)
			}
		}
	}
}

// What Forward plays through a response, Impulse finds again, as far as the band
// goes: the difference has nothing inside it. And Forward of a pulse is the excitation.
func TestForwardAndBack(t *testing.T) {
	s := sweeps[3]
	x := s.Samples()
	d := deconvolverOf(t, s, x, 5000)
	pulse := make([]float64, d.Len())
	pulse[0] = 1
	for i, v := range d.Forward(pulse)[:len(x)] {
		if math.Abs(v-x[i]) > 1e-12 {
			t.Fatalf("sample %d of the excitation: %g, Forward of a pulse %g", i, x[i], v)
		}
	}
	rng := rand.New(rand.NewPCG(5, 6))
	response := make([]float64, d.Len())
	for i := range 4000 {
		response[i] = rng.NormFloat64() * math.Exp(-float64(i)/400)
	}
	again := d.Impulse(single(d.Forward(response)))
	fft := fourier.NewFFT(d.Len())
	a, b := fft.Coefficients(nil, response), fft.Coefficients(nil, again)
	for i := range a {
		f := d.frequency(i)
		if f > 1.1*s.From && f < 0.95*s.To && cmplx.Abs(a[i]-b[i]) > 1e-4*(1+cmplx.Abs(a[i])) {
			t.Fatalf("at %.1f Hz %v comes back as %v", f, a[i], b[i])
		}
	}
}

// A clone gives the same and shares no scratch.
func TestClone(t *testing.T) {
	s := sweeps[3]
	x := s.Samples()
	d := deconvolverOf(t, s, x, 0)
	c := d.Clone()
	half := single(x)
	for i := range half {
		half[i] /= 2
	}
	before := d.Impulse(single(x))
	other := c.Impulse(half)
	after := d.Impulse(single(x))
	for i := range before {
		if before[i] != after[i] || math.Abs(other[i]-before[i]/2) > 1e-7 {
			t.Fatalf("sample %d: %g, clone with half %g, again %g", i, before[i], other[i], after[i])
		}
	}
}

// With |X(f)| = ½·√(L/f)·fs (see Sweep.Spectrum) the gain of noise power is
// 1/|X|² = 4f/(L·fs²); and white noise of variance σ² comes out of the
// deconvolution with the density σ²·NoiseGain. Over the 1/12 octave that is
// averaged there are 300 to 5000 bins, so the estimate scatters by up to 6 %.
func TestNoiseGain(t *testing.T) {
	s := Sweep{From: 50, To: 20000, Duration: 5, SampleRate: 48000, After: 0.5}
	x := s.Samples()
	d := deconvolverOf(t, s, x, 0)
	fs, sigma := float64(s.SampleRate), 0.01
	rng := rand.New(rand.NewPCG(1, 2))
	noise := make([]float32, d.Len())
	for i := range noise {
		noise[i] = float32(sigma * rng.NormFloat64())
	}
	out := d.Impulse(noise)
	coef := fourier.NewFFT(d.Len()).Coefficients(nil, out)
	for f := 1000.0; f < 17000; f *= 1.7 {
		near(t, "gain over theory", d.NoiseGain(f)*s.L()*fs*fs/(4*f), 1, 0.02)
		lo, hi := int(f*math.Exp2(-1.0/24)/fs*float64(d.Len())), int(f*math.Exp2(1.0/24)/fs*float64(d.Len()))
		var density float64
		for _, c := range coef[lo:hi] {
			density += sqAbs(c) / float64(hi-lo) / float64(d.Len())
		}
		near(t, "density over prediction", density/(sigma*sigma*d.NoiseGain(f)), 1, 0.2)
	}
	for _, f := range []float64{-100, 0, 24000, 26000, 1e6} { // outside what there is: no gain, no panic
		near(t, "gain outside the band", d.NoiseGain(f), 0, 1e-3*d.NoiseGain(1000))
	}
}

func TestDeconvolverRefuses(t *testing.T) {
	x := sweeps[0].Samples()
	for name, try := range map[string]func() (*Deconvolver, error){
		"nothing":       func() (*Deconvolver, error) { return NewDeconvolver(nil, 8000, 35, 50, 3600, 3900, 10) },
		"no rate":       func() (*Deconvolver, error) { return NewDeconvolver(x, 0, 35, 50, 3600, 3900, 10) },
		"band reversed": func() (*Deconvolver, error) { return NewDeconvolver(x, 8000, 35, 3600, 50, 3900, 10) },
		"silence":       func() (*Deconvolver, error) { return NewDeconvolver(make([]float64, 99), 8000, 35, 50, 3600, 3900, 10) },
		"nan": func() (*Deconvolver, error) {
			return NewDeconvolver([]float64{math.NaN(), 1}, 8000, 35, 50, 3600, 3900, 10)
		},
		"infinite": func() (*Deconvolver, error) {
			return NewDeconvolver([]float64{math.Inf(1), 1}, 8000, 35, 50, 3600, 3900, 10)
		},
	} {
		if _, err := try(); err == nil {
			t.Errorf("%s is taken", name)
		}
	}
}

// FastLen against trying every number.
func TestFastLen(t *testing.T) {
	smooth := func(n int) bool {
		for _, p := range []int{2, 3, 5} {
			for n%p == 0 {
				n /= p
			}
		}
		return n == 1
	}
	slow := func(n int) int {
		for n = max(n, 2); n%2 != 0 || !smooth(n); {
			n++
		}
		return n
	}
	for n := range 3000 {
		if got, want := FastLen(n), slow(n); got != want {
			t.Fatalf("FastLen(%d) = %d, want %d", n, got, want)
		}
	}
	for _, n := range []int{65537, 524289, 1000001, 1048576, 2657205, 3000001} {
		if got, want := FastLen(n), slow(n); got != want {
			t.Errorf("FastLen(%d) = %d, want %d", n, got, want)
		}
	}
}
