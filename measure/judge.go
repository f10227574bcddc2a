package measure

import (
	"fmt"
	"math"
	"slices"
)

// Limits by which a single take is judged.
const (
	clipLevel     = 0.9995 // of full scale
	clipSamples   = 3      // that many at clipLevel are no accident
	silentSNR     = 2.0    // power ratio below which nothing but noise arrived
	lowSNR        = 100.0  // power ratio, 20 dB
	flatRun       = 48     // equal samples in a row in the middle of a sweep
	distortedBy   = 0.1    // second harmonic relative to the fundamental
	dropoutFactor = 12.0   // residual of a 5 ms block over the median block's
)

// judge flags what is wrong with a single take.
func (a *Analyser) judge(t *TakeAnalysis, rec *Recording, full []float64) {
	flag := func(f Flag, format string, args ...any) {
		t.Flags = append(t.Flags, f)
		t.Reasons = append(t.Reasons, fmt.Sprintf(format, args...))
	}
	if n := rec.Overflows + rec.Underflows; n > 0 {
		flag(Xrun, "the audio system lost data %d times: close other programs or use a larger buffer", n)
	}
	if t.Quality.SNR < silentSNR {
		flag(Silent, "nothing of the sweep arrived: look at cable, input, phantom power, pad and loudspeaker")
		return
	}
	if n := clipped(rec.Mic); n >= clipSamples {
		flag(Clipped, "%d samples at full scale: turn the preamplifier down", n)
		return
	}
	if t.Quality.SNR < lowSNR {
		flag(LowSNR, "only %.0f dB over the noise: raise the level, or lengthen the sweep", 10*math.Log10(t.Quality.SNR))
	}
	if at, ok := a.dropout(rec.Mic, full, t.Impulse.Arrival); ok {
		flag(Dropout, "samples are missing or wrong %.2f s after the start", at)
	}
	if t.Quality.Second > distortedBy {
		flag(Distorted, "second harmonic at %.0f %%: turn the loudspeaker down", 100*t.Quality.Second)
	}
}

func clipped(x []float32) int {
	n := 0
	for _, v := range x {
		if v >= clipLevel || v <= -clipLevel {
			n++
		}
	}
	return n
}

// dropout looks for lost data where the sweep is on: by runs of equal samples,
// and by what the response cannot explain.
func (a *Analyser) dropout(mic []float32, full []float64, arrival float64) (at float64, found bool) {
	begin := min(max(a.exc.Begin+int(arrival), 0), len(mic))
	end := min(max(a.exc.End+int(arrival), begin), len(mic))
	run := 1
	for i := begin + 1; i < end; i++ {
		if mic[i] != mic[i-1] {
			run = 1
			continue
		}
		// At the sweep's slow beginning neighbouring samples may well be equal
		// in 16 bits: only a run with sound on both sides counts.
		if run++; run == flatRun && a.loudAround(mic, i-flatRun, i+8*flatRun) {
			return float64(i) / float64(a.exc.Rate), true
		}
	}
	return a.unexplained(mic, full, begin, end, int(arrival))
}

func (a *Analyser) loudAround(mic []float32, before, after int) bool {
	reach := a.exc.Rate / 100
	rms := func(from, to int) float64 {
		from, to = min(max(from, 0), len(mic)), min(max(to, 0), len(mic))
		var s float64
		for _, v := range mic[from:to] {
			s += float64(v) * float64(v)
		}
		return math.Sqrt(s / math.Max(float64(to-from), 1))
	}
	return rms(before-reach, before) > 3e-4 && rms(after, after+reach) > 3e-4
}

// unexplained plays the excitation through the part of the response that can be
// real (from the fifth harmonic to half a second after the direct sound) and
// looks for 5 ms blocks in which the recording differs from that by far more than
// in the median block, and by more than a twentieth of the block's own level.
func (a *Analyser) unexplained(mic []float32, full []float64, begin, end, arrival int) (at float64, found bool) {
	rate := a.exc.Rate
	lead := int(math.Ceil(a.exc.L*math.Log(5)*float64(rate))) + rate/50
	if a.exc.L == 0 {
		lead = rate / 50
	}
	back := a.dec.Forward(keepOnly(full, arrival-lead, arrival+rate/2))
	block := rate / 200
	var residual, level []float64
	for i := begin; i+block <= end; i += block {
		var r, l float64
		for j := i; j < i+block; j++ {
			r += sq(float64(mic[j]) - back[j])
			l += sq(float64(mic[j]))
		}
		residual, level = append(residual, math.Sqrt(r)), append(level, math.Sqrt(l))
	}
	if len(residual) < 40 {
		return 0, false
	}
	// The fades at both ends lie outside the band and are never explained.
	skip := len(residual) / 10
	inner, innerLevel := residual[skip:len(residual)-skip], level[skip:len(level)-skip]
	typical := Median(inner)
	worst := slices.Index(inner, slices.Max(inner))
	if inner[worst] > dropoutFactor*typical && inner[worst] > 0.05*Median(innerLevel) {
		return float64(begin+(skip+worst)*block) / float64(rate), true
	}
	return 0, false
}

// keepOnly is x with everything outside [from, to) zeroed, circularly.
func keepOnly(x []float64, from, to int) []float64 {
	out := make([]float64, len(x))
	if to-from >= len(x) {
		copy(out, x)
		return out
	}
	for i := from; i < to; i++ {
		k := ((i % len(x)) + len(x)) % len(x)
		out[k] = x[k]
	}
	return out
}
