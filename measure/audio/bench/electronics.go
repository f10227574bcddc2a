package bench

import "math"

// The harmonics of hum and their levels relative to the fundamental.
var humHarmonics = []float64{1, 0.4, 0.3, 0.15, 0.1}

// addHum adds mains hum; its phase is another one in every take.
func (b *Bench) addHum(x []float64, rate float64, label string, number int) {
	if b.cfg.Hum == 0 {
		return
	}
	rng := b.random("hum", label, number)
	for n, level := range humHarmonics {
		w := 2 * math.Pi * b.cfg.HumFrequency * float64(n+1) / rate
		phase := 2 * math.Pi * rng.Float64()
		for i := range x {
			x[i] += b.cfg.Hum * level * math.Sin(w*float64(i)+phase)
		}
	}
}

func (b *Bench) addNoise(x []float64, label string, number int) {
	if b.cfg.Noise == 0 {
		return
	}
	rng := b.random("noise", label, number)
	for i := range x {
		x[i] += b.cfg.Noise * rng.NormFloat64()
	}
}

// convert is the converter: full scale is ±1, whole numbers with triangular
// dither where it has a number of bits.
func (b *Bench) convert(x []float64, channel, label string, number int) []float32 {
	out := make([]float32, len(x))
	if b.cfg.Bits == 0 {
		for i, v := range x {
			out[i] = float32(math.Max(-1, math.Min(1, v)))
		}
		return out
	}
	full := float64(int64(1) << (b.cfg.Bits - 1))
	rng := b.random("dither "+channel, label, number)
	for i, v := range x {
		n := math.Round(v*full + rng.Float64() - rng.Float64())
		out[i] = float32(math.Max(-full, math.Min(full-1, n)) / full)
	}
	return out
}

// What faults do.
const (
	clipTo     = 2.0  // peak before the converter, full scale 1
	lostFrames = 256  // of a dropout
	deadNoise  = 1e-6 // −120 dBFS
)

// spoil lets go wrong what is to go wrong at the microphone.
func (b *Bench) spoil(x []float64, label string, number int) {
	for _, f := range b.faults(label, number) {
		switch f.Kind {
		case Clip:
			scale(x, clipTo/math.Max(largest(x), 1e-300))
		case Gain:
			scale(x, f.Amount)
		case Reversed:
			scale(x, -1)
		case Dead:
			rng := b.random("dead", label, number)
			for i := range x {
				x[i] = deadNoise * rng.NormFloat64()
			}
		}
	}
}

// loseSamples is a dropout: what is lost behind the converter is nought on all
// channels.
func (b *Bench) loseSamples(label string, number int, channels ...[]float32) {
	for _, f := range b.faults(label, number) {
		if f.Kind != Dropout {
			continue
		}
		for _, x := range channels {
			from := len(x) / 2
			clear(x[from:min(from+lostFrames, len(x))])
		}
	}
}

func scale(x []float64, by float64) {
	for i := range x {
		x[i] *= by
	}
}

func largest(x []float64) float64 {
	var m float64
	for _, v := range x {
		m = math.Max(m, math.Abs(v))
	}
	return m
}
