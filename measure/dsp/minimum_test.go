package dsp

import (
	"math"
	"math/cmplx"
	"testing"
)

// Poles and zeros inside the unit circle are of minimum phase: the phase comes back
// from the magnitude alone. A zero outside has the magnitude of the one mirrored
// inside, and that one's phase.
func TestMinimumPhaseOfPolesAndZeros(t *testing.T) {
	const n = 4096
	at := func(i int, zero, pole float64) complex128 {
		z := cmplx.Rect(1, -2*math.Pi*float64(i)/n)
		return (1 - complex(zero, 0)*z) / (1 - complex(pole, 0)*z + 0.5*z*z)
	}
	for _, c := range []struct{ zero, mirrored, pole float64 }{
		{0, 0, 0}, {0.7, 0.7, 0}, {-0.9, -0.9, 0.8}, {1 / 0.6, 0.6, 0.3},
	} {
		logs := make([]float64, n/2+1)
		for i := range logs {
			logs[i] = math.Log(cmplx.Abs(at(i, c.zero, c.pole)))
		}
		for i, got := range MinimumPhase(logs) {
			if want := cmplx.Phase(at(i, c.mirrored, c.pole)); math.Abs(got-want) > 1e-9 {
				t.Fatalf("zero %g, pole %g, bin %d: %.9g rad, want %.9g", c.zero, c.pole, i, got, want)
			}
		}
	}
}
