package fit

import (
	"math"
	"testing"
)

// An open pair of ports with a delay is a sine of k(d + cτ)/2, whose first null is
// at c/(d + cτ); a low-pass takes away what the null is made of.
func TestNullOfTheFarForm(t *testing.T) {
	for _, beta := range []float64{0.1, 0.25, 0.5, 0.75, 1} {
		a := Acoustics{Beta: beta, Spacing: 0.027, Speed: 343}
		want := 343 * beta / 0.027
		if got := (Model{Form: PhaseShift, Body: Open}).null(a); math.Abs(got/want-1) > 0.03 {
			t.Errorf("β %g: %.0f Hz, want %.0f", beta, got, want)
		}
		m := Model{Form: PhaseShift, Body: Open, Rear: LowPass}
		if null := m.null(a); beta <= 0.5 && null < 1.6*want {
			t.Errorf("β %g, low-pass: a null at %.0f Hz, where a delay has it at %.0f", beta, null, want)
		}
	}
}
