package measure

import (
	"math"
	"testing"

	"standoff/measure/dsp"
)

// A sweep kept as samples shows its band, to a third of an octave inwards and, since
// 20 dB below the strongest still counts, as far outwards as its fades and its end
// reach; and its extent, to a part of its slow start.
func TestSampledExcitation(t *testing.T) {
	for _, s := range []dsp.Sweep{
		testSweep,
		{From: 20, To: 20000, Duration: 3, SampleRate: 44100, Before: 0.5, After: 1},
		{From: 100, To: 8000, Duration: 1, SampleRate: 96000, After: 0.1},
		{From: 60, To: 3500, Duration: 2, SampleRate: 8000, Before: 0.1},
	} {
		known, err := SweepExcitation(s, 0.3)
		if err != nil {
			t.Fatal(err)
		}
		got, err := SampledExcitation(known.Samples, known.Rate)
		if err != nil {
			t.Fatal(err)
		}
		from, to := math.Log2(got.From/s.From), math.Log2(got.To/s.To)
		if from < -1 || from > 0.34 || to < -0.34 || to > 0.17 {
			t.Errorf("band %.1f to %.0f Hz of a sweep from %g to %g Hz", got.From, got.To, s.From, s.To)
		}
		slow := s.L() * math.Ln2 / 4 * float64(s.SampleRate) // half of the fade-in
		near(t, "begin", float64(got.Begin), float64(known.Begin), slow)
		near(t, "end", float64(got.End), float64(known.End), slow)
		if !(got.Low < got.From && got.High > got.To && got.High < float64(got.Rate)/2) || got.L != 0 {
			t.Errorf("low %g, high %g, L %g", got.Low, got.High, got.L)
		}
	}
}

// It deconvolves as the sweep itself does, in the band that it has found.
func TestSampledExcitationMeasures(t *testing.T) {
	e, err := SampledExcitation(testExcitation(t).Samples, 48000)
	if err != nil {
		t.Fatal(err)
	}
	a, err := NewAnalyser(e, len(e.Samples), 100, 8000)
	if err != nil {
		t.Fatal(err)
	}
	got := scene{gain: 0.4, delay: 123.4, noise: 1e-4, seed: 1}.take(a)
	near(t, "arrival", got.Impulse.Arrival, 123.4, 0.1)
	near(t, "level", got.Quality.Level, 0.4, 0.01)
	wantFlags(t, "sampled", got)
	if !math.IsNaN(got.Quality.Second) {
		t.Errorf("a second harmonic of %g where the sweep's rate is not known", got.Quality.Second)
	}
}

func TestSampledExcitationRefuses(t *testing.T) {
	tone := make([]float32, 48000)
	for i := range tone {
		tone[i] = float32(math.Sin(2 * math.Pi * 1000 / 48000 * float64(i)))
	}
	withNaN := append([]float32(nil), testExcitation(t).Samples...)
	withNaN[100] = float32(math.NaN())
	withInf := append([]float32(nil), testExcitation(t).Samples...)
	withInf[100] = float32(math.Inf(-1))
	for name, x := range map[string][]float32{"nothing": nil, "silence": make([]float32, 1000), "a tone": tone, "NaN": withNaN, "infinity": withInf} {
		if e, err := SampledExcitation(x, 48000); err == nil {
			t.Errorf("%s is taken: %g to %g Hz", name, e.From, e.To)
		}
	}
}

func TestSweepExcitation(t *testing.T) {
	e := testExcitation(t)
	var peak float32
	for i, v := range e.Samples {
		peak = max(peak, v, -v)
		if (i < e.Begin || i >= e.End) && v != 0 {
			t.Fatalf("sample %d of the silence is %g", i, v)
		}
	}
	near(t, "peak", float64(peak), testLevel, 0.001*testLevel)
	near(t, "length", float64(len(e.Samples)), float64(testSweep.Len()), 0)
	for _, level := range []float64{0, -1, 1.01, math.NaN()} {
		if _, err := SweepExcitation(testSweep, level); err == nil {
			t.Errorf("a level of %g is taken", level)
		}
	}
	if _, err := SweepExcitation(dsp.Sweep{}, 0.5); err == nil {
		t.Error("a sweep without anything is taken")
	}
}
