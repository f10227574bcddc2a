package measure

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"
)

// pulse is a response of 0.41 s with its direct sound at sample 2880.
func pulse() *ImpulseResponse {
	return &ImpulseResponse{Rate: 48000, Samples: make([]float64, 19680), First: -2880}
}

// integrator is 1 + w/(jω) as a response: a pulse and the step that it leaves
// behind (trapezoid rule, within 0.3 % of w/(jω) up to 5 kHz for the w of the tests).
func integrator(w float64) *ImpulseResponse {
	ir := pulse()
	for i := 2880; i < len(ir.Samples); i++ {
		ir.Samples[i] = w / ir.Rate
	}
	ir.Samples[2880] = 1 + 0.5*w/ir.Rate
	return ir
}

// worstFrom is the largest relative difference of a spectrum from 1 + w/(jω).
func worstFrom(s Spectrum, w float64) float64 {
	worst := 0.0
	for i, f := range s.Hz {
		want := complex(1, -w/(2*math.Pi*f))
		worst = math.Max(worst, cmplx.Abs(s.Value[i]-want)/cmplx.Abs(want))
	}
	return worst
}

// A short gate cuts the tail of a near-field rise; gated after division by that
// rise (or one near it) the whole spectrum is there again.
func TestCompactGatingKeepsTheRise(t *testing.T) {
	hz := Grid(80, 5000, 0.007)
	for _, w := range []float64{500, 2000, 6000} {
		ir := integrator(w)
		plain := worstFrom(ir.Spectrum(FixedGate(0.008), nil, 0, hz), w)
		exact := worstFrom(ir.Spectrum(FixedGate(0.008), FirstOrderRise(w), 0, hz), w)
		nearly := worstFrom(ir.Spectrum(FixedGate(0.008), FirstOrderRise(1.1*w), 0, hz), w)
		t.Logf("w %g: plain %.1f %%, with its rise %.2f %%, with a rise 10 %% off %.2f %%", w, 100*plain, 100*exact, 100*nearly)
		if plain < 0.2 || exact > 0.01 || nearly > 0.05 {
			t.Errorf("w %g: plain %.1f %%, with its rise %.2f %%, with a rise 10 %% off %.2f %%", w, 100*plain, 100*exact, 100*nearly)
		}
	}
}

// What the fit needs is the ratio of two distances: through sweep, loudspeaker
// and deconvolution it is that of their rises, to 0.3 %, while gated as they are
// it is ten times as far off.
func TestRatioOfTwoRises(t *testing.T) {
	a := testAnalyser(t)
	hz := Grid(80, 5000, 0.007)
	near, far := 5000.0, 500.0
	first := scene{gain: 0.05, delay: 100.4, w: near, highPass: 70}.take(a).Impulse
	second := scene{gain: 0.2, delay: 150.7, w: far, highPass: 70}.take(a).Impulse
	worst := func(rise func(w float64) Rise) float64 {
		x := first.Spectrum(FixedGate(0.012), rise(near), 100.4, hz)
		y := second.Spectrum(FixedGate(0.012), rise(far), 150.7, hz)
		out := 0.0
		for i, f := range hz {
			s := complex(0, 2*math.Pi*f)
			want := 0.25 * (1 + complex(near, 0)/s) / (1 + complex(far, 0)/s)
			out = math.Max(out, cmplx.Abs(x.Value[i]/y.Value[i]-want)/cmplx.Abs(want))
		}
		return out
	}
	made, plain := worst(FirstOrderRise), worst(func(float64) Rise { return nil })
	t.Logf("compact %.2f %%, plain %.1f %%", 100*made, 100*plain)
	if made > 0.003 || plain < 10*made {
		t.Errorf("compact %.2f %%, plain %.1f %%", 100*made, 100*plain)
	}
}

// The time origin and the fraction of a sample are in the phase. Gate and band shape
// both responses alike, so their ratio is that of the delays.
func TestSpectrumPhase(t *testing.T) {
	a := testAnalyser(t)
	first := scene{gain: 0.3, delay: 300}.take(a).Impulse
	second := scene{gain: 0.15, delay: 321.7}.take(a).Impulse
	hz := Grid(100, 15000, 0.02)
	x, y := first.Spectrum(FixedGate(0.02), nil, 290, hz), second.Spectrum(FixedGate(0.02), nil, 280, hz)
	for i, f := range hz {
		want := cmplx.Rect(0.5, -2*math.Pi*f*(21.7+10)/48000)
		if got := y.Value[i] / x.Value[i]; cmplx.Abs(got-want) > 1e-3 {
			t.Errorf("%.0f Hz: %v, want %v", f, got, want)
		}
	}
}

// Over many takes with fresh noise the spectra scatter by the variance that each
// of them predicts: within 20 % in every third of the band, white noise and
// noise that falls with frequency, with and without a rise.
func TestVarianceIsThatOfTheScatter(t *testing.T) {
	t.Parallel()
	sweep := testSweep
	sweep.Duration, sweep.After = 0.3, 0.1
	e, err := SweepExcitation(sweep, testLevel)
	if err != nil {
		t.Fatal(err)
	}
	a, err := NewAnalyser(e, len(e.Samples), 100, 8000)
	if err != nil {
		t.Fatal(err)
	}
	hz := Grid(100, 8000, FixedGate(0.01).Duration())
	clean := scene{gain: 0.2, delay: 200}.record(e)
	for name, pole := range map[string]float64{"white": 0, "falling": 0.9} {
		var takes []*ImpulseResponse
		for seed := range uint64(32) {
			takes = append(takes, noisyTake(a, clean, pole, seed+uint64(1000*pole)))
		}
		for rise, of := range map[string]Rise{"as it is": nil, "made compact": FirstOrderRise(3000)} {
			var values []Spectrum
			for _, ir := range takes {
				values = append(values, ir.Spectrum(FixedGate(0.01), of, 200, hz))
			}
			third := len(hz) / 3
			for part := range 3 {
				what := fmt.Sprintf("%s, %s, part %d: scatter over prediction", name, rise, part)
				near(t, what, scatterOver(values, part*third, (part+1)*third), 1, 0.2)
			}
		}
	}
}

func noisyTake(a *Analyser, clean []float32, pole float64, seed uint64) *ImpulseResponse {
	rng := rand.New(rand.NewPCG(seed, 9))
	mic := make([]float32, len(clean))
	var y float64
	for range 200 {
		y = pole*y + rng.NormFloat64()
	}
	for i, v := range clean {
		y = pole*y + rng.NormFloat64()
		mic[i] = v + float32(1e-3*y)
	}
	return &a.Take(&Recording{SampleRate: 48000, Mic: mic}).Impulse
}

// scatterOver is the mean over frequencies of the scatter's variance over that
// predicted.
func scatterOver(s []Spectrum, from, to int) float64 {
	n := float64(len(s))
	var out float64
	for j := from; j < to; j++ {
		var mean complex128
		var predicted, variance float64
		for _, one := range s {
			mean += one.Value[j] / complex(n, 0)
			predicted += one.Variance[j] / n
		}
		for _, one := range s {
			variance += sq(cmplx.Abs(one.Value[j]-mean)) / (n - 1)
		}
		out += variance / predicted / float64(to-from)
	}
	return out
}

// Of n repeats with the same noise the mean has 1/n of the variance; where the
// repeats scatter by more than their noise, by what they scatter.
func TestAverage(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 8))
	const n, m, declared = 5, 200, 0.01
	repeats := func(actual float64) []Spectrum {
		out := make([]Spectrum, n)
		for i := range out {
			for j := range m {
				out[i].Hz = append(out[i].Hz, float64(j))
				noise := complex(rng.NormFloat64(), rng.NormFloat64()) * complex(math.Sqrt(actual/2), 0)
				out[i].Value = append(out[i].Value, complex(float64(j), 1)+noise)
				out[i].Variance = append(out[i].Variance, declared)
			}
		}
		return out
	}
	for _, actual := range []float64{0.25 * declared, declared, 9 * declared} {
		all := repeats(actual)
		mean := Average(all)
		want := math.Max(actual, declared) / n
		var direct complex128
		for _, r := range all {
			direct += r.Value[7] / n
		}
		near(t, "mean", cmplx.Abs(mean.Value[7]-direct), 0, 1e-12)
		near(t, "variance of the mean over what it is", mean.Variance[7]/want, 1, 0.12) // 800 degrees of freedom: ±5 %
	}
	one := repeats(declared)[:1]
	near(t, "variance of one", Average(one).Variance[3], declared, 0)
}

// Points of a gated response closer than 1/T repeat each other.
func TestGrid(t *testing.T) {
	for _, T := range []float64{0.003, 0.007, 0.02, 0.5} {
		hz := Grid(80, 5000, T)
		if hz[0] != 80 || hz[len(hz)-1] > 5000.01 {
			t.Errorf("T %g: from %g to %g Hz", T, hz[0], hz[len(hz)-1])
		}
		for i := 1; i < len(hz); i++ {
			step, octaves := hz[i]-hz[i-1], math.Log2(hz[i]/hz[i-1])
			if step < (1-1e-9)/T || octaves < (1-1e-9)/12 {
				t.Errorf("T %g: %g Hz, %.3f octaves after %g Hz", T, step, octaves, hz[i-1])
			}
			if step > (1+1e-9)/T && octaves > (1+1e-9)/12 {
				t.Errorf("T %g: a gap after %g Hz", T, hz[i-1])
			}
		}
	}
}
