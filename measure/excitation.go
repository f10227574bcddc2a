package measure

import (
	"errors"
	"math"
	"math/cmplx"

	"standoff/measure/dsp"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/stat"
)

// Excitation is what was played: a sweep with silence before and after.
type Excitation struct {
	Samples []float32 // full scale ±1
	Rate    int       // Hz
	Begin   int       // sample at which the sweep begins
	End     int       // sample after its last

	// The band in Hz: flat from From to To, nothing below Low and above High.
	Low, From, To, High float64

	// L is the sweep's rate in s (see dsp.Sweep.L); 0 when it is not known.
	L float64
	// read is the same as it is seen in Samples.
	read float64
}

// SweepExcitation samples a sweep at the given peak (full scale 1).
func SweepExcitation(s dsp.Sweep, level float64) (*Excitation, error) {
	if err := s.Validate(); err != nil {
		return nil, err
	}
	if !(level > 0) || level > 1 {
		return nil, errors.New("a sweep's level lies above 0 and at most at full scale")
	}
	x := s.Samples()
	e := &Excitation{Samples: make([]float32, len(x)), Rate: s.SampleRate, L: s.L()}
	for i, v := range x {
		e.Samples[i] = float32(level * v)
	}
	e.From, e.To = s.From, s.To
	e.Low, e.High = s.Edges()
	e.Begin = s.Start()
	e.End = len(x) - int(math.Round(s.After*float64(s.SampleRate)))
	return e, nil
}

// SampledExcitation takes any sweep as it was played, and finds where it begins
// and ends and the band that it fills: where its energy per octave is within
// 20 dB of the strongest. It fails when that is less than two octaves.
func SampledExcitation(x []float32, rate int) (*Excitation, error) {
	e := &Excitation{Samples: x, Rate: rate}
	var peak float32
	for _, v := range x {
		peak = max(peak, max(v, -v))
	}
	if !(peak > 0) || math.IsInf(float64(peak), 1) {
		return nil, errors.New("the excitation is silent, or holds what is no number")
	}
	e.Begin, e.End = extent(x, peak*1e-3)
	coef := spectrumOf(x)
	e.From, e.To = filledBand(coef, rate)
	if !(e.To > 4*e.From) {
		return nil, errors.New("the excitation fills less than two octaves: it is no sweep that can measure")
	}
	e.Low, e.High = e.From/math.Sqrt2, math.Min(e.To*1.12, 0.495*float64(rate))
	e.read = sweepRate(coef, float64(rate), e.From*math.Sqrt2, e.To/math.Sqrt2)
	return e, nil
}

func extent(x []float32, threshold float32) (begin, end int) {
	begin, end = 0, len(x)
	for begin < end && max(x[begin], -x[begin]) < threshold {
		begin++
	}
	for end > begin && max(x[end-1], -x[end-1]) < threshold {
		end--
	}
	return begin, end
}

func spectrumOf(x []float32) []complex128 {
	buf := make([]float64, dsp.FastLen(len(x)))
	for i, v := range x {
		buf[i] = float64(v)
	}
	return fourier.NewFFT(len(buf)).Coefficients(nil, buf)
}

// filledBand looks at the energy in sixths of an octave.
func filledBand(coef []complex128, rate int) (from, to float64) {
	n := 2 * (len(coef) - 1)
	var centres, energies []float64
	step := math.Exp2(1.0 / 6)
	for f := 10.0; f*step < 0.49*float64(rate); f *= step {
		lo, hi := int(f/float64(rate)*float64(n)), int(f*step/float64(rate)*float64(n))
		var sum float64
		for _, c := range coef[lo : hi+1] {
			sum += real(c)*real(c) + imag(c)*imag(c)
		}
		centres, energies = append(centres, f*math.Sqrt(step)), append(energies, sum)
	}
	threshold := 0.01 * largestOf(energies)
	for i, s := range energies {
		if s < threshold {
			continue
		}
		if from == 0 {
			from = centres[i]
		}
		to = centres[i]
	}
	return from * step, to / step
}

func largestOf(x []float64) float64 {
	m := math.Inf(-1)
	for _, v := range x {
		m = math.Max(m, v)
	}
	return m
}

// SweepRate is the sweep's rate in s: L where it is known, else read from the times at
// which the excitation passes its frequencies; 0 for what is no exponential sweep.
func (e *Excitation) SweepRate() float64 {
	if e.L == 0 {
		return e.read
	}
	return e.L
}

// sweepRate reads the rate L off the group delays t(f) = −dφ/dω of an excitation:
// those of an exponential sweep lie on L·ln f + const. It is 0 where they do not
// within a hundredth, rms, of the time that the band takes.
func sweepRate(coef []complex128, rate float64, from, to float64) float64 {
	n := 2 * (len(coef) - 1)
	var logs, times []float64
	for f := from; f < to; f *= math.Exp2(1.0 / 12) {
		var turn complex128
		first := int(f / rate * float64(n))
		for k := first; k < min(int(f*math.Exp2(1.0/12)/rate*float64(n))+1, len(coef)-1); k++ {
			turn += coef[k+1] * cmplx.Conj(coef[k])
		}
		t := -cmplx.Phase(turn) / (2 * math.Pi)
		logs, times = append(logs, math.Log(f)), append(times, (t-math.Floor(t))*float64(n)/rate)
	}
	if len(logs) < 12 {
		return 0
	}
	at, l := stat.LinearRegression(logs, times, nil, false)
	var off float64
	for i, t := range times {
		off += sq(t-at-l*logs[i]) / float64(len(times))
	}
	if !(l > 0) || math.Sqrt(off) > 0.01*l*math.Log(to/from) {
		return 0
	}
	return l
}
