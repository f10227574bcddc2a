package measure

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"slices"
	"testing"

	"standoff/measure/dsp"

	"gonum.org/v1/gonum/dsp/fourier"
)

// testSweep is short, so that many takes take little time.
var testSweep = dsp.Sweep{From: 40, To: 20000, Duration: 0.8, SampleRate: 48000, Before: 0.2, After: 0.5}

const testLevel = 0.5

func testExcitation(t testing.TB) *Excitation {
	t.Helper()
	e, err := SweepExcitation(testSweep, testLevel)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

func testAnalyser(t testing.TB) *Analyser {
	t.Helper()
	e := testExcitation(t)
	a, err := NewAnalyser(e, len(e.Samples), 80, 8000)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// scene is what a recording is made of: gain and delay in samples, an integrator
// 1 + w/(jω), an echo, a loudspeaker with a high-pass of second order and, before
// that, a distortion x + second·x² + third·x³, and hum and white noise on top.
type scene struct {
	gain, delay     float64
	w               float64 // rad/s
	highPass        float64 // Hz
	echo, echoDelay float64 // relative to the direct sound; samples
	second, third   float64
	hum, noise      float64
	seed            uint64
}

// record plays the excitation through the scene, as many samples as it has.
func (s scene) record(e *Excitation) []float32 {
	n := dsp.FastLen(len(e.Samples) + e.Rate/2)
	x := make([]float64, n)
	for i, v := range e.Samples {
		u := float64(v) / testLevel
		x[i] = testLevel * (u + s.second*u*u + s.third*u*u*u)
	}
	fft := fourier.NewFFT(n)
	coef := fft.Coefficients(nil, x)
	for i := range coef {
		w := 2 * math.Pi * float64(i) / float64(n) // per sample
		if i == 0 {
			coef[i] = 0
			continue
		}
		h := complex(s.gain, 0) * (1 + complex(0, -s.w/(w*float64(e.Rate))))
		if s.highPass > 0 {
			u := complex(0, w*float64(e.Rate)/(2*math.Pi*s.highPass))
			h *= u * u / (u*u + complex(math.Sqrt2, 0)*u + 1)
		}
		h *= cmplx.Rect(1, -w*s.delay) + complex(s.echo, 0)*cmplx.Rect(1, -w*(s.delay+s.echoDelay))
		coef[i] *= h
	}
	y := fft.Sequence(nil, coef)
	rng := rand.New(rand.NewPCG(s.seed, 77))
	out := make([]float32, len(e.Samples))
	for i := range out {
		v := y[i]/float64(n) + s.noise*rng.NormFloat64() + s.hum*math.Sin(2*math.Pi*50/float64(e.Rate)*float64(i)+1)
		out[i] = float32(math.Max(-1, math.Min(1, v)))
	}
	return out
}

// recording of the scene as a take would bring it home.
func (s scene) take(a *Analyser) *TakeAnalysis {
	return a.Take(&Recording{SampleRate: a.exc.Rate, Mic: s.record(a.exc)})
}

func near(t *testing.T, what string, got, want, within float64) {
	t.Helper()
	if !(math.Abs(got-want) <= within) {
		t.Errorf("%s: %.8g, want %.8g ± %.2g", what, got, want, within)
	}
}

// wantFlags fails unless exactly these flags are there, each with a reason.
func wantFlags(t *testing.T, what string, got *TakeAnalysis, want ...Flag) {
	t.Helper()
	if !slices.Equal(got.Flags, want) || len(got.Reasons) != len(got.Flags) {
		t.Errorf("%s: flags %v, want %v; %q", what, got.Flags, want, got.Reasons)
	}
}
