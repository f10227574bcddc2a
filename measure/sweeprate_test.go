package measure

import (
	"math"
	"math/rand/v2"
	"testing"
)

// The rate of a sweep that is known by its samples only is read to 0.5 %, which is 1 ppm of an offset of 200; noise,
// a chirp that is linear in frequency and a sweep downwards have none.
func TestSweepRateIsRead(t *testing.T) {
	for _, duration := range []float64{0.8, 2.3} {
		s := testSweep
		s.Duration = duration
		known, err := SweepExcitation(s, testLevel)
		if err != nil {
			t.Fatal(err)
		}
		e, err := SampledExcitation(known.Samples, known.Rate)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "rate over L", e.SweepRate()/known.SweepRate(), 1, 5e-3)
	}
	rng := rand.New(rand.NewPCG(3, 3))
	noise, chirp, down := make([]float32, 48000), make([]float32, 48000), make([]float32, 48000)
	for i := range noise {
		noise[i] = float32(0.1 * rng.NormFloat64())
		u := float64(i) / 48000
		chirp[i] = float32(math.Sin(2 * math.Pi * (50*u + 9000*u*u)))
		down[len(down)-1-i] = float32(math.Sin(2 * math.Pi * 50 / 5.9 * math.Exp(5.9*u)))
	}
	for what, x := range map[string][]float32{"noise": noise, "a linear chirp": chirp, "a sweep downwards": down} {
		e, err := SampledExcitation(x, 48000)
		if err != nil {
			t.Fatalf("%s: %v", what, err)
		}
		if l := e.SweepRate(); l != 0 {
			t.Errorf("%s has a rate of %g s", what, l)
		}
	}
}
