package measure

import (
	"fmt"
	"math"
)

// Limits by which a single take is judged.
const (
	clipLevel     = 0.9995 // of full scale
	clipSamples   = 3      // that many at clipLevel are no accident
	silentSNR     = 2.0    // power ratio below which nothing but noise arrived
	leastClarity  = 6.0    // of the direct sound; hum and music have no arrival
	lowSNR        = 100.0  // power ratio, 20 dB
	flatRun       = 48     // equal samples in a row in the middle of a sweep
	distortedBy   = 0.1    // second harmonic relative to the fundamental
	dropoutFactor = 9.0    // what a block has that cannot be real, over the median block's
	dropoutShare  = 0.05   // the same, over the level of the blocks around
	blockTime     = 0.005  // s
	harmonicAfter = 0.1    // s that a harmonic may ring
	realBefore    = 0.03   // s before its peak at which a sound may begin
	realAfter     = 0.5    // s that the room may ring
)

// judge flags what is wrong with a single take.
func (a *Analyser) judge(t *TakeAnalysis, rec *Recording, full []float64) {
	flag := func(f Flag, format string, args ...any) {
		t.Flags = append(t.Flags, f)
		t.Reasons = append(t.Reasons, fmt.Sprintf(format, args...))
	}
	if n := rec.Overflows + rec.Underflows; n > 0 && !a.wireWhole(rec.Loopback) {
		flag(Xrun, "the audio system lost data %d times: close other programs or use a larger buffer", n)
	}
	if t.Quality.SNR < silentSNR || t.Quality.Clarity < leastClarity {
		flag(Silent, "nothing of the sweep arrived: look at cable, input, gain, pad and loudspeaker, and at the power of a microphone that needs some")
		return
	}
	if n := clipped(a.during(rec.Mic, t.Impulse.Arrival)); n >= clipSamples {
		flag(Clipped, "%d samples at full scale: turn the preamplifier down", n)
		return
	}
	if t.Quality.SNR < lowSNR {
		flag(LowSNR, "only %.0f dB over the noise: raise the level, or lengthen the sweep", 10*math.Log10(t.Quality.SNR))
	}
	if at, ok := a.dropout(rec.Mic, full, t.Impulse.Arrival); ok {
		flag(Dropout, "samples are missing or wrong %.2f s after the start", at)
	}
	if t.Quality.Second > distortedBy && t.Quality.SNR >= lowSNR {
		flag(Distorted, "second harmonic at %.0f %%: turn the loudspeaker down", 100*t.Quality.Second)
	}
}

// wireWhole reports whether an electrical loopback brought the whole excitation
// back. What an audio system says of lost data is a hint; a wire that lost nothing
// is proof, since the microphone's samples travelled with it.
func (a *Analyser) wireWhole(loopback []float32) bool {
	if loopback == nil || peakOf(loopback) < 1e-4 {
		return false
	}
	full := a.dec.Impulse(loopback)
	_, lost := a.dropout(loopback, full, float64(steepest(full)))
	return !lost
}

// during is the part of a recording in which the sweep is heard.
func (a *Analyser) during(mic []float32, arrival float64) []float32 {
	from := min(max(a.exc.Begin+int(arrival), 0), len(mic))
	return mic[from:min(max(a.exc.End+int(arrival), from), len(mic))]
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
	for i := begin; i < end; {
		first := i
		for i++; i < end && mic[i] == mic[first]; i++ {
		}
		// At the sweep's slow beginning neighbouring samples may well be equal
		// in 16 bits: only a run with sound on both sides counts.
		if i-first >= flatRun && a.loudAround(mic, first, i) {
			return float64(first) / float64(a.exc.Rate), true
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

// unexplained looks for 5 ms blocks of what no loudspeaker and room can have made
// of the excitation. Lost data splash: what is wrong at the moment of one frequency
// stands beside the direct sound by the time that the sweep takes from there to
// the frequencies that it splashes to. So what can be real is taken out of the
// response (half a second from just before the direct sound, and a stretch for each
// harmonic up to the fifth), and the excitation is played through the rest.
func (a *Analyser) unexplained(mic []float32, full []float64, begin, end, arrival int) (at float64, found bool) {
	rate, l := float64(a.exc.Rate), a.exc.L
	rest := append([]float64(nil), full...)
	blank(rest, arrival-int(realBefore*rate), arrival+int(realAfter*rate))
	for n := 2.0; n <= 5; n++ {
		harmonic := float64(arrival) - l*math.Log(n)*rate
		after := math.Max(math.Min(harmonicAfter, 0.15*l), realBefore/2)
		blank(rest, int(harmonic-realBefore/2*rate), int(harmonic+after*rate))
	}
	// The sweep's ends lie outside the band and next to it.
	from, to := begin+(end-begin)/5, end-(end-begin)/10
	level, residual := blocks(mic, a.exc.Rate, from, to), blocks(a.dec.Forward(rest), a.exc.Rate, from, to)
	if len(residual) < 40 {
		return 0, false
	}
	typical := Median(residual)
	for i, r := range residual {
		around := level[max(i-10, 0):min(i+11, len(level))]
		if r > dropoutFactor*typical && r > dropoutShare*Median(around) {
			return float64(from)/rate + float64(i)*blockTime, true
		}
	}
	return 0, false
}

// blocks are the rms values of x in blocks of blockTime.
func blocks[T float32 | float64](x []T, rate, from, to int) []float64 {
	n := int(blockTime * float64(rate))
	var out []float64
	for ; from+n <= min(to, len(x)); from += n {
		var sum float64
		for _, v := range x[from : from+n] {
			sum += sq(float64(v))
		}
		out = append(out, math.Sqrt(sum/float64(n)))
	}
	return out
}

// blank zeroes [from, to) of x, circularly.
func blank(x []float64, from, to int) {
	for i := from; i < min(to, from+len(x)); i++ {
		x[((i%len(x))+len(x))%len(x)] = 0
	}
}
