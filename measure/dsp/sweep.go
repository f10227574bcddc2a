package dsp

import (
	"errors"
	"fmt"
	"math"
)

// Sweep is an exponential sine sweep with silence before and after:
//
//	x(t) = sin(2π·f1·L·e^{t/L}),  L = T/ln(f2/f1)
//
// t = 0 where the instantaneous frequency f1·e^{t/L} is f1. The fades lie
// outside the band: the sweep comes in from below f1 and leaves above f2, so
// that from f1 to f2 its amplitude is constant. The n-th harmonic of a
// memoryless distortion is the same sweep, L·ln n seconds earlier, exactly.
//
// Source: A. Farina, AES 108th Convention, paper 5093 (2000); A. Novak,
// P. Lotton, L. Simon, J. Audio Eng. Soc. 63(10), 786–798 (2015) for the form
// without the "−1" and the offset L·ln n.
type Sweep struct {
	From, To      float64 // f1 and f2, Hz
	Duration      float64 // T from f1 to f2, s
	SampleRate    int     // Hz
	Before, After float64 // silence, s
}

// Where the fades begin and end, in octaves beyond the band, and the highest
// frequency a fade may touch as a fraction of the sample rate.
const (
	fadeBelow   = 1.0 / 2
	fadeAbove   = 1.0 / 6
	nyquistSafe = 0.495
)

// Validate reports why the sweep cannot be made.
func (s Sweep) Validate() error {
	switch {
	case s.SampleRate < 8000 || s.SampleRate > 192000:
		return fmt.Errorf("sample rate %d Hz is outside 8 kHz to 192 kHz", s.SampleRate)
	case !(s.From > 0) || !(s.To > s.From):
		return errors.New("a sweep goes from a positive frequency to a higher one")
	case s.To > 0.46*float64(s.SampleRate):
		return fmt.Errorf("a sweep to %g Hz needs a sample rate above %.0f Hz", s.To, s.To/0.46)
	case !(s.Duration > 0) || s.Duration > 600:
		return errors.New("a sweep lasts between 0 and 600 s")
	case !(s.Before >= 0) || !(s.After >= 0) || s.Before+s.After > 600:
		return errors.New("the silences are between 0 and 600 s")
	}
	return nil
}

// L is the sweep's rate in s: the time in which the frequency grows e-fold.
func (s Sweep) L() float64 { return s.Duration / math.Log(s.To/s.From) }

// HarmonicLead is L·ln n, by which the n-th harmonic's response precedes the
// linear one after deconvolution, in s.
func (s Sweep) HarmonicLead(n int) float64 { return s.L() * math.Log(float64(n)) }

// Edges are the frequencies between which there is any signal: where the
// fade-in begins and where the fade-out has ended, in Hz.
func (s Sweep) Edges() (low, high float64) {
	low = s.From * math.Exp2(-fadeBelow)
	high = math.Min(s.To*math.Exp2(fadeAbove), nyquistSafe*float64(s.SampleRate))
	return low, high
}

// Start is the number of samples of silence before the first of the sweep.
func (s Sweep) Start() int { return int(math.Round(s.Before * float64(s.SampleRate))) }

// lead is the number of samples from the first of the sweep to t = 0.
func (s Sweep) lead() float64 {
	low, _ := s.Edges()
	return math.Ceil(s.L() * math.Log(s.From/low) * float64(s.SampleRate))
}

// Len is the number of samples of Samples.
func (s Sweep) Len() int {
	return s.Start() + s.core() + int(math.Round(s.After*float64(s.SampleRate)))
}

func (s Sweep) core() int {
	_, high := s.Edges()
	return int(s.lead() + math.Floor(s.L()*math.Log(high/s.From)*float64(s.SampleRate)))
}

// Samples returns silence, sweep, silence; peak 1, Len samples.
func (s Sweep) Samples() []float64 {
	out := make([]float64, s.Len())
	low, high := s.Edges()
	fs, l, lead := float64(s.SampleRate), s.L(), s.lead()
	core := out[s.Start() : s.Start()+s.core()]
	for i := range core {
		f := s.From * math.Exp((float64(i)-lead)/fs/l)
		core[i] = SmoothStep(f, low, s.From) * SmoothStep(f, high, s.To) * math.Sin(2*math.Pi*l*f)
	}
	return out
}

// Spectrum is the analytic Fourier transform of the sweep without fades at f,
// with the time origin at t = 0, in s:
//
//	X(f) = ½·√(L/f)·exp(j·2πfL·[1 − ln(f/f1)] − jπ/4)
//
// It is what the sampled sweep's transform divided by the sample rate tends
// to inside the band (within about 1 %). Source: Novak et al. 2015, eq. (43)
// gives its inverse.
func (s Sweep) Spectrum(f float64) complex128 {
	l := s.L()
	phase := 2*math.Pi*f*l*(1-math.Log(f/s.From)) - math.Pi/4
	sin, cos := math.Sincos(phase)
	a := 0.5 * math.Sqrt(l/f)
	return complex(a*cos, a*sin)
}

// SmoothStep is 0 at zero and beyond it, 1 at one and beyond, and in between a
// step in log f of which all derivatives are continuous at both ends, so that
// what is windowed with it rings little. zero may lie above one.
func SmoothStep(f, zero, one float64) float64 {
	x := math.Log(f/zero) / math.Log(one/zero)
	switch {
	case !(x > 0):
		return 0
	case x >= 1:
		return 1
	}
	a, b := math.Exp(-1/x), math.Exp(-1/(1-x))
	return a / (a + b)
}
