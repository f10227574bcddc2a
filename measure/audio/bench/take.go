package bench

import (
	"math"

	"standoff/measure/audio"

	"gonum.org/v1/gonum/dsp/fourier"
)

// decayRoom is how much longer than the excitation the transform is, s: what
// still sounds after that is folded on to the beginning, far below the noise.
const decayRoom = 1.0

// take computes both channels of one take.
func (b *Bench) take(req audio.Request) (mic, loopback []float32, err error) {
	rate, count := float64(req.SampleRate), len(req.Excitation)
	n := transformLength(count + int(decayRoom*rate))
	fft := fourier.NewFFT(n)
	path, err := b.path(b.TrueDistance(req.Distance, req.Number), req.SampleRate, n)
	if err != nil {
		return nil, nil, err
	}
	played := make([]float64, n)
	b.distort(played, req.Excitation)
	spectrum := fft.Coefficients(nil, played)
	for i := range spectrum {
		spectrum[i] *= path[i]
	}
	sound := inverse(fft, spectrum)[:count]
	sound = resample(sound, b.cfg.ClockOffset)
	label, number := req.Distance.Label, req.Number
	b.addHum(sound, rate, label, number)
	b.addNoise(sound, label, number)
	b.spoil(sound, req)
	mic = b.convert(sound, "mic", label, number)
	if b.cfg.Loopback {
		wire := b.wire(req, fft, n)[:count]
		wire = resample(wire, b.cfg.ClockOffset)
		b.loseSamples(wire, req)
		loopback = b.convert(wire, "loopback", label, number)
	}
	return mic, loopback, nil
}

// distort passes the excitation through the loudspeaker's motor, x + 2h₂x² − 4h₃x³:
// a sine of full scale, sin φ, gains h₂ cos 2φ and h₃ sin 3φ (and a little of the
// fundamental); at an amplitude A the second is Ah₂ of the fundamental, the third
// A²h₃.
func (b *Bench) distort(dst []float64, excitation []float32) {
	second, third := 2*b.cfg.Source.Second, -4*b.cfg.Source.Third
	for i, v := range excitation {
		x := float64(v)
		dst[i] = x * (1 + x*(second+x*third))
	}
}

// wire is the electrical loopback: the excitation, later by the latency.
func (b *Bench) wire(req audio.Request, fft *fourier.FFT, n int) []float64 {
	x := make([]float64, n)
	for i, v := range req.Excitation {
		x[i] = float64(v)
	}
	c := fft.Coefficients(nil, x)
	for i := range c {
		w := 2 * math.Pi * float64(i) / float64(n) * float64(req.SampleRate)
		sin, cos := math.Sincos(w * b.cfg.Latency)
		c[i] *= complex(cos, -sin)
	}
	return inverse(fft, c)
}

func inverse(fft *fourier.FFT, c []complex128) []float64 {
	x := fft.Sequence(nil, c)
	scale := 1 / float64(len(x))
	for i := range x {
		x[i] *= scale
	}
	return x
}

// transformLength is an even length ≥ n of small factors.
func transformLength(n int) int {
	best := 2
	for best < n {
		best *= 2
	}
	for _, part := range []int{5, 6, 7} { // 5/8, 6/8, 7/8 of a power of two
		if m := best / 8 * part; m >= n && part != 7 {
			return m
		}
	}
	return best
}

// resample reads x with a clock that runs faster by offset: sample i is taken at
// i/(1+offset). Interpolation by a sinc under a Hann window of 64 samples.
func resample(x []float64, offset float64) []float64 {
	if offset == 0 {
		return x
	}
	const half = 32
	out := make([]float64, len(x))
	for i := range out {
		at := float64(i) / (1 + offset)
		base := int(math.Floor(at))
		frac := at - float64(base)
		if frac == 0 {
			if base < len(x) {
				out[i] = x[base]
			}
			continue
		}
		// sin(π(frac−k)) = ±sin(π frac), so that one sine serves all.
		sine := math.Sin(math.Pi*frac) / math.Pi
		var sum float64
		for k := -half + 1; k <= half; k++ {
			j := base + k
			if j < 0 || j >= len(x) {
				continue
			}
			u := frac - float64(k)
			s := sine / u
			if k&1 != 0 {
				s = -s
			}
			sum += x[j] * s * (0.5 + 0.5*math.Cos(math.Pi*u/half))
		}
		out[i] = sum
	}
	return out
}
