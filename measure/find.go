package measure

import (
	"math"
	"math/cmplx"

	"standoff/measure/dsp"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Place is where an excitation was found in a recording.
type Place struct {
	// At is the sample of the recording, fractional and perhaps negative, at which
	// the sound of the excitation's first sample is heard; right to 1 ms.
	At float64
	// Likeness is the correlation with the excitation there, 1 for a recording by
	// wire, some hundredths where there is none of it.
	Likeness float64
}

// searchBand is where an excitation is looked for, Hz: above rumble and hum,
// below what a lower sample rate cannot hold.
var searchBand = [2]float64{500, 4000}

// Finder finds an excitation in recordings that are longer, by the largest value of
//
//	|Σ x*(t)·y(t+u)| / √(Σ|x(t)|² · Σ|y(t+u)|²)
//
// over u, where x and y are the analytic signals of excitation and recording in
// searchBand, and the sums go over the time in which the excitation passes that band.
// What is loud before and after does not count, because each stretch is held against
// its own energy. The recording is read in blocks of about four such times: memory does
// not grow with it.
type Finder struct {
	first    int // sample of the excitation with which the template begins
	count    int // samples of the template
	n, small int // lengths of the block and of its spectrum in the band
	low      int // first bin in the band
	template []complex128
	weight   []float64
	energy   float64
	fft      *fourier.FFT
	back     *fourier.CmplxFFT
}

// NewFinder prepares for recordings with the given sample rate of an excitation,
// which is resampled where it has another.
func NewFinder(e *Excitation, rate int) (*Finder, error) {
	x := e.Samples
	if rate != e.Rate {
		step := float64(e.Rate) / float64(rate)
		var err error
		if x, err = dsp.NewResampler().Read(x, 0, step, int(float64(len(x))/step)); err != nil {
			return nil, err
		}
	}
	lo, hi := math.Max(searchBand[0], e.From), math.Min(searchBand[1], math.Min(e.To, 0.4*float64(rate)))
	if hi < 2*lo {
		lo, hi = e.From, math.Min(e.To, 0.4*float64(rate))
	}
	f := &Finder{}
	f.first, f.count = passing(x, float64(rate), lo, hi)
	f.n = dsp.FastLen(4 * f.count)
	f.fft = fourier.NewFFT(f.n)
	f.band(float64(rate)/float64(f.n), lo, hi)
	f.back = fourier.NewCmplxFFT(f.small)
	f.template = f.spectrum(x, f.first, f.count)
	for _, v := range f.template {
		f.energy += sq(cmplx.Abs(v))
	}
	return f, nil
}

// passing is the stretch in which the band-passed excitation is above a tenth of its
// largest envelope.
func passing(x []float32, rate, lo, hi float64) (first, count int) {
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = float64(v)
	}
	env := dsp.Envelope(y, rate, lo, hi)
	threshold := 0.1 * largestOf(env)
	last := len(env) - 1
	for first < last && env[first] < threshold {
		first++
	}
	for last > first && env[last] < threshold {
		last--
	}
	return first, last - first + 1
}

// band sets up the bins that count: edges a third of an octave wide.
func (f *Finder) band(spacing, lo, hi float64) {
	edge := math.Exp2(1.0 / 3)
	f.low = int(lo / edge / spacing)
	high := min(int(hi*edge/spacing), f.n/2-1)
	f.small = dsp.FastLen(high - f.low + 1)
	f.weight = make([]float64, high-f.low+1)
	for i := range f.weight {
		g := float64(f.low+i) * spacing
		f.weight[i] = dsp.SmoothStep(g, lo/edge, lo) * dsp.SmoothStep(g, hi*edge, hi)
	}
}

// spectrum of count samples of x from the sample from on, those outside of x nought,
// in the band.
func (f *Finder) spectrum(x []float32, from, count int) []complex128 {
	buf := make([]float64, f.n)
	for i := max(0, -from); i < count && from+i < len(x); i++ {
		buf[i] = float64(x[from+i])
	}
	c := f.fft.Coefficients(nil, buf)
	out := make([]complex128, f.small)
	for i, w := range f.weight {
		out[i] = c[f.low+i] * complex(w, 0)
	}
	return out
}

// Find looks through a whole recording, and beyond both its ends for an excitation
// that is cut. A finder is for one goroutine at a time.
func (f *Finder) Find(mic []float32) Place {
	best := Place{}
	step := float64(f.n) / float64(f.small) // samples from one value to the next
	hop := f.n - f.count
	for from := -f.count; from < len(mic); from += hop {
		corr, power := f.block(mic, from)
		window := int(float64(f.count) / step)
		sum := 0.0
		for _, p := range power[:window] {
			sum += p
		}
		for i := 0; float64(i)*step < float64(hop) && i+window < len(power); i++ {
			if like := corr[i] / math.Sqrt(math.Max(sum, 0)+f.silence()); like > best.Likeness {
				best = Place{At: float64(from-f.first) + float64(i)*step, Likeness: like}
			}
			sum += power[i+window] - power[i]
		}
	}
	return best
}

// silence is the energy below which there is nothing to compare: −120 dB of full scale.
func (f *Finder) silence() float64 { return 1e-12 * float64(f.small) * float64(f.count) / float64(f.n) }

// block is the correlation over the template's rms, and the recording's power, on the
// grid of small values.
func (f *Finder) block(mic []float32, from int) (corr, power []float64) {
	y := f.spectrum(mic, from, f.n)
	z := make([]complex128, f.small)
	for i, v := range y {
		z[i] = v * cmplx.Conj(f.template[i])
	}
	f.back.Sequence(y, y)
	f.back.Sequence(z, z)
	corr, power = make([]float64, f.small), make([]float64, f.small)
	// Parseval: Σ|t|² over the small grid is small·Σ|T|²/n².
	scale := math.Sqrt(float64(f.small)/f.energy) / float64(f.n)
	for i := range y {
		power[i] = sq(cmplx.Abs(y[i]) / float64(f.n))
		corr[i] = cmplx.Abs(z[i]) * scale
	}
	return corr, power
}
