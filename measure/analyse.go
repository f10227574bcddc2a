package measure

import (
	"math"
	"math/cmplx"

	"standoff/measure/dsp"
)

// Analyser turns recordings of one excitation into impulse responses and judges
// them. It carries scratch space: one goroutine at a time; Clone for another.
type Analyser struct {
	exc *Excitation
	dec *dsp.Deconvolver
	// Band in which the signal-to-noise ratio is judged, Hz.
	from, to float64

	finders   map[int]*Finder // by sample rate
	resampler *dsp.Resampler
}

// NewAnalyser prepares for recordings of up to longest samples. Signal to noise
// is judged from..to Hz.
func NewAnalyser(exc *Excitation, longest int, from, to float64) (*Analyser, error) {
	x := make([]float64, len(exc.Samples))
	for i, v := range exc.Samples {
		x[i] = float64(v)
	}
	// Room after a recording's last sample: for a response that is still going on,
	// and for what seems to come before the excitation, because the recording was
	// started late or something took a delay away.
	n := max(longest, len(x)) + exc.Rate
	dec, err := dsp.NewDeconvolver(x, exc.Rate, exc.Low, exc.From, exc.To, exc.High, n)
	if err != nil {
		return nil, err
	}
	return &Analyser{exc: exc, dec: dec, from: math.Max(from, exc.From), to: math.Min(to, exc.To)}, nil
}

// Clone is an Analyser for another goroutine.
func (a *Analyser) Clone() *Analyser {
	b := *a
	b.dec = a.dec.Clone()
	b.finders = nil
	return &b
}

// TakeAnalysis is what one recording says.
type TakeAnalysis struct {
	Impulse ImpulseResponse
	Quality Quality
	Flags   []Flag
	Reasons []string // for people, one for every flag
	Timing  Timing   // what of the recording was analysed
	Excess  Excess   // of the loopback's response where there is one, else of Impulse

	wire *ImpulseResponse // of the loopback
}

// Quality are the figures by which a take is judged.
type Quality struct {
	Peak    float64 // largest |sample|, full scale 1
	SNR     float64 // median over the fit band of signal power over noise power in the response
	Arrival float64 // of the direct sound after the start of the sweep, less the latency that a loopback shows, s
	Level   float64 // rms magnitude of the direct response from 1 to 6 kHz
	Clarity float64 // of the direct sound: its envelope over the median around it; some 3 for anything but a sweep
	Second  float64 // second harmonic's level relative to the fundamental; NaN when not known, or not clear of the noise
}

// Take analyses one recording that begins and ends about with the excitation and has
// its sample rate.
func (a *Analyser) Take(rec *Recording) *TakeAnalysis { return a.take(rec, a.dec.Len()) }

// take looks for the direct sound in the first samples of the response only.
func (a *Analyser) take(rec *Recording, first int) *TakeAnalysis {
	out := &TakeAnalysis{}
	rate := float64(a.exc.Rate)
	full := a.dec.Impulse(rec.Mic)
	peak := steepest(full[:min(first, len(full))])
	if peak > a.dec.Len()-3*a.exc.Rate/4 {
		peak -= a.dec.Len() // it came before the excitation
	}
	ir := cutOut(full, rate, peak)
	at, clarity := directSound(ir.Samples, rate, a.exc.From, a.exc.To)
	ir.Arrival = float64(ir.First) + at
	ir.Noise = a.noise(rec.Mic, ir.Arrival)
	if out.wire = a.wireResponse(rec.Loopback); out.wire != nil {
		ir.Latency = out.wire.Arrival
	}
	out.Impulse = ir
	out.Quality = Quality{Peak: peakOf(rec.Mic), Arrival: (ir.Arrival - ir.Latency) / rate, Second: a.second(full, peak), Clarity: clarity}
	out.Quality.SNR, out.Quality.Level = a.levels(&ir)
	a.judge(out, rec, full)
	return out
}

// wireResponse is that of a loopback recording, its arrival fractional; nil for one
// that carries nothing.
func (a *Analyser) wireResponse(loopback []float32) *ImpulseResponse {
	if loopback == nil || peakOf(loopback) < 1e-4 {
		return nil
	}
	rate := float64(a.exc.Rate)
	full := a.dec.Impulse(loopback)
	ir := cutOut(full, rate, steepest(full))
	at, _ := directSound(ir.Samples, rate, a.exc.From, a.exc.To)
	ir.Arrival = float64(ir.First) + at
	return &ir
}

func peakOf(x []float32) float64 {
	var p float32
	for _, v := range x {
		p = max(p, max(v, -v))
	}
	return float64(p)
}

// noise is the density of noise in the response: that of the recording where
// the sweep has not arrived yet (or, when it begins too early, where it has
// died away), times the deconvolution's gain.
func (a *Analyser) noise(mic []float32, arrival float64) Density {
	quiet := a.quiet(mic, arrival)
	var d Density
	for f := a.exc.Low; f < a.exc.High; f *= math.Exp2(1.0 / 6) {
		d.Hz = append(d.Hz, f)
	}
	segment := min(len(quiet)/3, 8192) &^ 1
	for segment > 8 && dsp.FastLen(segment) != segment {
		segment -= 2
	}
	power := dsp.PowerDensity(quiet, float64(a.exc.Rate), segment, d.Hz)
	if power == nil {
		return Density{}
	}
	for i, f := range d.Hz {
		power[i] = math.Max(power[i]*a.dec.NoiseGain(f), 1e-30)
	}
	d.Power = power
	return d
}

// quiet is the longest of the stretches before the sweep's arrival and after
// its decay.
func (a *Analyser) quiet(mic []float32, arrival float64) []float64 {
	guard := a.exc.Rate / 50
	before := min(max(a.exc.Begin+int(arrival)-guard, 0), len(mic))
	after := min(max(a.exc.End+int(arrival)+a.exc.Rate/2, 0), len(mic))
	// What follows the sweep may still hold the room's decay: it is taken
	// only when there is next to nothing before.
	part := mic[:before]
	if before < a.exc.Rate/10 && len(mic)-after > before {
		part = mic[after:]
	}
	// A recorder may hand out digital zeros until its converter has settled,
	// or until the first of its buffers has gone round.
	for len(part) > 0 && part[0] == 0 {
		part = part[1:]
	}
	out := make([]float64, len(part))
	for i, v := range part {
		out[i] = float64(v)
	}
	return out
}

// levels are the median of signal over noise power in the fit band and the rms
// magnitude of the response in the arrival band, 20 ms around the direct sound.
func (a *Analyser) levels(ir *ImpulseResponse) (snr, level float64) {
	gate := Gate{Lead: 0.002, Length: 0.018, Fall: 0.008}
	spec := ir.Spectrum(gate, nil, 0, logGrid(a.from, a.to, 24))
	ratios := make([]float64, len(spec.Hz))
	for i, v := range spec.Value {
		ratios[i] = sq(cmplx.Abs(v)) / math.Max(spec.Variance[i], 1e-300)
	}
	lo, hi := arrivalLimits(a.exc.From, a.exc.To)
	spec = ir.Spectrum(gate, nil, 0, logGrid(lo, hi, 16))
	for _, v := range spec.Value {
		level += sq(cmplx.Abs(v)) / float64(len(spec.Value))
	}
	return math.Max(Median(ratios)-1, 0), math.Sqrt(level)
}

func logGrid(from, to float64, n int) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = from * math.Pow(to/from, float64(i)/float64(n-1))
	}
	return out
}

// second is the second harmonic's level relative to the fundamental's: the square
// root of their energies' ratio in 5 ms on both sides, since their phases differ by
// 90° and peaks would not compare.
func (a *Analyser) second(full []float64, peak int) float64 {
	if a.exc.L == 0 {
		return math.NaN()
	}
	lead := int(math.Round(a.exc.L * math.Ln2 * float64(a.exc.Rate)))
	reach := a.exc.Rate / 200
	main, second := energyAround(full, peak, reach), energyAround(full, peak-lead, reach)
	// Between the harmonic and the sound there is nothing but noise and hum: what does
	// not stand clear of them is no harmonic.
	var beside []float64
	for _, part := range []float64{0.3, 0.4, 0.5, 0.6, 0.7} {
		beside = append(beside, energyAround(full, peak-int(part*float64(lead)), reach))
	}
	noise := Median(beside)
	if second < clearOfNoise*noise {
		return math.NaN()
	}
	return math.Sqrt((second - noise) / math.Max(main, 1e-300))
}

// clearOfNoise is the ratio of energies from which a harmonic is one.
const clearOfNoise = 4.0

func energyAround(x []float64, at, reach int) (sum float64) {
	for i := at - reach; i <= at+reach; i++ {
		sum += sq(x[((i%len(x))+len(x))%len(x)])
	}
	return sum
}

// NoiseGain is the power density of the deconvolved response at f Hz for white noise of
// unit variance per sample in a recording.
func (a *Analyser) NoiseGain(f float64) float64 { return a.dec.NoiseGain(f) }

// Longest is the longest recording in samples that the Analyser can take.
func (a *Analyser) Longest() int { return a.dec.Len() - a.exc.Rate }
