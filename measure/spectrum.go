package measure

import (
	"math"
	"math/cmplx"

	"standoff/measure/dsp"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Spectrum is a complex response with the variance of its noise.
type Spectrum struct {
	Hz       []float64
	Value    []complex128
	Variance []float64 // E|error|², both quadratures together
}

// Rise is the near-field rise of a response over its far form, a slow complex
// function of frequency in Hz; nil is none.
type Rise func(hz float64) complex128

// FirstOrderRise is 1 + w/(jω), the rise of a small capsule before a point source,
// with the corner w in rad/s: βc/r.
func FirstOrderRise(corner float64) Rise {
	return func(f float64) complex128 { return complex(1, -corner/(2*math.Pi*f)) }
}

// Spectrum gates the response and transforms it. Time zero is origin samples
// after the start of the excitation.
//
// A near-field rise is an integrator with a long tail that a short gate would
// cut. So the response is first made compact by dividing by its rise, then gated,
// and at each frequency the rise is multiplied back.
func (ir *ImpulseResponse) Spectrum(g Gate, rise Rise, origin float64, hz []float64) Spectrum {
	table := tabulate(rise, ir.Rate)
	from, window := g.window(ir)
	x := ir.compact(table)[from : from+len(window)]
	for i := range x {
		x[i] *= window[i]
	}
	value := dsp.DTFT(x, ir.Rate, origin-float64(ir.First+from), hz)
	out := Spectrum{Hz: hz, Value: value, Variance: make([]float64, len(hz))}
	energy, blur := dsp.SumSquares(window), ir.Rate/float64(len(window))
	for i, f := range hz {
		r := table.at(f)
		out.Value[i] *= r
		// The window smears what lies beside f into it.
		var noise float64
		for _, off := range []float64{-blur, 0, blur} {
			near := math.Max(f+off, 0.25*blur)
			noise += ir.Noise.At(near) / sq(cmplx.Abs(table.at(near))) / 3
		}
		out.Variance[i] = noise * energy * sq(cmplx.Abs(r))
	}
	return out
}

// compact is the response divided by its rise, the same stretch of time.
func (ir *ImpulseResponse) compact(t riseTable) []float64 {
	n := len(ir.Samples)
	if t.v == nil {
		return append([]float64(nil), ir.Samples...)
	}
	m := dsp.FastLen(2 * n)
	fft := fourier.NewFFT(m)
	buf := make([]float64, m)
	copy(buf, ir.Samples)
	c := fft.Coefficients(nil, buf)
	c[0] = 0 // an integrator has no inverse there, and a sweep no sound
	for k := 1; k < len(c); k++ {
		c[k] /= t.at(float64(k) * ir.Rate / float64(m))
	}
	fft.Sequence(buf, c)
	for i := range n {
		buf[i] /= float64(m)
	}
	return buf[:n]
}

// riseTable is a rise on a logarithmic grid. What it gives in between is a matter
// of taste: the same table divides and multiplies back.
type riseTable struct{ v []complex128 }

const (
	tableFrom      = 2.0 // Hz
	tablePerOctave = 24
)

func tabulate(rise Rise, rate float64) riseTable {
	if rise == nil {
		return riseTable{}
	}
	n := int(math.Ceil(tablePerOctave*math.Log2(rate/2/tableFrom))) + 2
	t := riseTable{make([]complex128, n)}
	for i := range t.v {
		t.v[i] = rise(tableFrom * math.Exp2(float64(i)/tablePerOctave))
	}
	return t
}

// at is the rise at f, linear in log f; below the table it goes on as 1/f.
func (t riseTable) at(f float64) complex128 {
	if t.v == nil {
		return 1
	}
	if f <= tableFrom {
		return t.v[0] * complex(tableFrom/math.Max(f, 1e-3), 0)
	}
	x := math.Log2(f/tableFrom) * tablePerOctave
	i := min(int(x), len(t.v)-2)
	u := math.Min(x-float64(i), 1)
	return t.v[i]*complex(1-u, 0) + t.v[i+1]*complex(u, 0)
}

func sq(x float64) float64 { return x * x }

// window places the gate on the response, sample by sample, and cuts it where
// the response ends.
func (g Gate) window(ir *ImpulseResponse) (from int, w []float64) {
	at := ir.Arrival - float64(ir.First)
	from = min(max(int(math.Floor(at-g.Lead*ir.Rate)), 0), len(ir.Samples))
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
