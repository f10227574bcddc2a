package measure

import (
	"math"
	"math/cmplx"

	"standoff/measure/dsp"
)

// Spectrum is a complex response with the variance of its noise.
type Spectrum struct {
	Hz       []float64
	Value    []complex128
	Variance []float64 // E|error|², both quadratures together
}

// Spectrum gates the response and transforms it. Time zero is origin samples
// after the start of the excitation.
//
// A near-field rise is an integrator with a long tail that a short gate would
// cut. So the response is first made compact by the rise's inverse, the
// first-order high-pass
//
//	s/(s + w),  w = corner in rad/s,
//
// gated, and the high-pass is divided out again at each frequency, exactly as
// the digital filter has it. corner 0 gates the response as it is.
func (ir *ImpulseResponse) Spectrum(g Gate, corner, origin float64, hz []float64) Spectrum {
	eq := newEqualiser(corner, ir.Rate)
	from, window := g.window(ir)
	x := eq.filter(ir.Samples)[from : from+len(window)]
	for i := range x {
		x[i] *= window[i]
	}
	value := dsp.DTFT(x, ir.Rate, origin-float64(ir.First+from), hz)
	out := Spectrum{Hz: hz, Value: value, Variance: make([]float64, len(hz))}
	energy, blur := dsp.SumSquares(window), ir.Rate/float64(len(window))
	for i, f := range hz {
		h := eq.response(f)
		out.Value[i] /= h
		// The window smears what lies beside f into it.
		var noise float64
		for _, off := range []float64{-blur, 0, blur} {
			near := math.Max(f+off, 0.25*blur)
			noise += ir.Noise.At(near) * sq(cmplx.Abs(eq.response(near))) / 3
		}
		out.Variance[i] = noise * energy / sq(cmplx.Abs(h))
	}
	return out
}

func sq(x float64) float64 { return x * x }

// window places the gate on the response, sample by sample, and cuts it where
// the response ends.
func (g Gate) window(ir *ImpulseResponse) (from int, w []float64) {
	at := ir.Arrival - float64(ir.First)
	from = max(int(math.Floor(at-g.Lead*ir.Rate)), 0)
	to := min(int(math.Ceil(at+g.Length*ir.Rate)), len(ir.Samples))
	w = make([]float64, max(to-from, 0))
	for i := range w {
		// Relative to the fractional arrival, so that the same gate stands on
		// every response.
		t := (float64(from+i) - at) / ir.Rate
		w[i] = raised((t+g.Lead)/(0.5*g.Lead)) * raised((g.Length-t)/g.Fall)
	}
	return from, w
}

// raised goes from 0 at 0 to 1 at 1 as half a cosine period.
func raised(x float64) float64 {
	switch {
	case !(x > 0):
		return 0
	case x >= 1:
		return 1
	}
	return 0.5 - 0.5*math.Cos(math.Pi*x)
}

// equaliser is the digital first-order high-pass
//
//	H(z) = (1 − z⁻¹)/((1+K) − (1−K)·z⁻¹),  K = tan(w/2fs),
//
// the bilinear transform of s/(s+w).
type equaliser struct{ k, rate float64 }

func newEqualiser(corner, rate float64) equaliser {
	return equaliser{k: math.Tan(math.Min(math.Max(corner, 0)/(2*rate), 1.5)), rate: rate}
}

func (e equaliser) filter(x []float64) []float64 {
	out := make([]float64, len(x))
	if e.k == 0 {
		copy(out, x)
		return out
	}
	var before, y float64
	for i, v := range x {
		y = (v - before + (1-e.k)*y) / (1 + e.k)
		before, out[i] = v, y
	}
	return out
}

func (e equaliser) response(f float64) complex128 {
	if e.k == 0 {
		return 1
	}
	z := cmplx.Rect(1, -2*math.Pi*f/e.rate)
	return (1 - z) / (complex(1+e.k, 0) - complex(1-e.k, 0)*z)
}

// Average is the mean of the repeats of one distance with its variance: the
// noise of each, raised where the repeats scatter more than their noise
// explains (by the ratio over the whole band, since two repeats say little at
// one frequency).
func Average(repeats []Spectrum) Spectrum {
	n := float64(len(repeats))
	first := repeats[0]
	out := Spectrum{Hz: first.Hz, Value: make([]complex128, len(first.Hz)), Variance: make([]float64, len(first.Hz))}
	for _, r := range repeats {
		for i := range r.Value {
			out.Value[i] += r.Value[i] / complex(n, 0)
			out.Variance[i] += r.Variance[i] / (n * n)
		}
	}
	if excess := scatter(repeats, out); excess > 1 {
		for i := range out.Variance {
			out.Variance[i] *= excess
		}
	}
	return out
}

// scatter is the variance between repeats over what their noise explains.
func scatter(repeats []Spectrum, mean Spectrum) float64 {
	n := float64(len(repeats))
	if n < 2 {
		return 1
	}
	var sum float64
	for _, r := range repeats {
		for i, v := range r.Value {
			sum += sq(cmplx.Abs(v-mean.Value[i])) / math.Max(n*mean.Variance[i], 1e-300)
		}
	}
	return sum / ((n - 1) * float64(len(mean.Hz)))
}

// Grid is a frequency grid for a gate of the effective duration T: twelve
// points an octave, but never closer than 1/T, since closer points of a gated
// response repeat each other.
func Grid(from, to, duration float64) []float64 {
	var out []float64
	ratio := math.Exp2(1.0 / 12)
	for f := from; f <= to*(1+1e-9); f = math.Max(f*ratio, f+1/duration) {
		out = append(out, f)
	}
	return out
}
