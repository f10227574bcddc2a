package measure

import (
	"math"
	"math/cmplx"

	"standoff/measure/dsp"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Excess is the phase that a response has beyond what its magnitude explains, in rad
// relative to its arrival, unwrapped, on the points of excessGrid.
type Excess struct {
	Hz    []float64
	Phase []float64
	Taken float64 // the clock's offset that the recording was freed of, relative
}

// Where clocks are read, Hz: above what a short gate blurs, below the nulls of ports.
const (
	excessFrom = 700.0
	excessTo   = 8000.0
	excessBins = 1 << 15 // of the transform; 1.5 Hz at 48 kHz
)

// excess of a response that means something from..to Hz. It has no points where that
// is less than two octaves of the band where clocks are read.
func excess(ir *ImpulseResponse, from, to float64) Excess {
	from, to = math.Max(from, 60), math.Min(to, 0.46*ir.Rate)
	if from > excessFrom || to < 5*excessFrom {
		return Excess{}
	}
	h := aligned(ir, excessGate(ir, from, to))
	spacing := ir.Rate / excessBins
	least := dsp.MinimumPhase(logMagnitude(h, int(from/spacing)+1, int(to/spacing)))
	var out Excess
	for _, f := range Grid(excessFrom, math.Min(excessTo, 0.8*to), 1/excessSpacing) {
		i := int(math.Round(f / spacing))
		p := cmplx.Phase(h[i]) - least[i]
		if n := len(out.Phase); n > 0 {
			p += 2 * math.Pi * math.Round((out.Phase[n-1]-p)/(2*math.Pi))
		}
		out.Hz, out.Phase = append(out.Hz, float64(i)*spacing), append(out.Phase, p)
	}
	return out
}

// excessSpacing is how near points may be, Hz: the resolution of the longest gate.
const excessSpacing = 100.0

// excessGate ends before the first reflection, within what leaves some resolution.
func excessGate(ir *ImpulseResponse, from, to float64) Gate {
	length := math.Min(math.Max(earliestReflection(ir, from, to), shortestGate), 0.012)
	return Gate{Lead: 0.003, Length: length, Fall: 0.6 * length}
}

// aligned is the spectrum of the gated response with its arrival, to the sample, at
// time zero.
func aligned(ir *ImpulseResponse, g Gate) []complex128 {
	at, window := g.window(ir)
	buf := make([]float64, excessBins)
	zero := int(math.Round(ir.Arrival)) - ir.First
	for i, w := range window {
		buf[((at+i-zero)%excessBins+excessBins)%excessBins] = w * ir.Samples[at+i]
	}
	return fourier.NewFFT(excessBins).Coefficients(nil, buf)
}

// logMagnitude of a spectrum, that of the bins lo and hi going on beyond them.
func logMagnitude(h []complex128, lo, hi int) []float64 {
	out := make([]float64, len(h))
	for i := range out {
		out[i] = math.Log(math.Max(cmplx.Abs(h[min(max(i, lo), hi)]), 1e-30))
	}
	return out
}
