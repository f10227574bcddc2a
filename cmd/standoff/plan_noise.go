package main

import (
	"fmt"
	"math"
	"slices"

	"standoff/fit"
	"standoff/measure"
)

// A small loudspeaker is thought to have a high-pass of second order here, Hz.
const usualHighPass = 90

// dataset is what the list of distances would give: places, and noise at every
// frequency relative to a far response of 1 at 1 m.
func (p *plan) dataset() error {
	r := p.rig
	from, to := max(r.Fit.From, r.Sweep.From, p.gate.Lowest()), math.Min(r.Fit.To, r.Sweep.To)
	d := &fit.Dataset{
		Hz: measure.Grid(from, to, p.gate.Duration()), Unexplained: p.leftOver,
		Setback: r.Capsule.Setback + r.Source.Centre, SetbackUncertainty: math.Hypot(r.Capsule.SetbackUncertainty, r.Source.CentreUncertainty),
		Radius: r.Source.Radius, RadiusUncertainty: r.Source.RadiusUncertainty,
		Speed: r.Air.SpeedOfSound(), SpeedUncertainty: r.Air.SpeedUncertainty(),
		MethodMix: methodMix, MethodSpacing: methodSpacing,
	}
	if len(d.Hz) < 6 {
		return fmt.Errorf("a gate of %.1f ms leaves %d frequencies between %.0f and %.0f Hz: widen fit.from and fit.to", 1e3*p.gate.Length, len(d.Hz), from, to)
	}
	if r.Source.Kind == fit.PointSource {
		d.Radius, d.RadiusUncertainty = 0, 1e-3
	}
	noise, err := p.noise(d.Hz)
	if err != nil {
		return err
	}
	places := slices.Clone(r.Distances)
	slices.SortFunc(places, func(a, b measure.Distance) int { return cmpFloat(a.Metres, b.Metres) })
	for _, place := range places {
		d.Points = append(d.Points, fit.Point{Label: place.Label, Nominal: place.Metres, Tape: r.DistanceUncertainty, Variance: noise})
	}
	p.data = d
	return nil
}

func cmpFloat(a, b float64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
}

// noise is the variance of a gated response over |S|², S being the far response at
// 1 m. White noise of variance σ² per sample becomes σ²·G(f)·Σw² in a response gated by
// w, with the deconvolution's gain G; repeats divide it. On a virtual bench σ and S are
// known; else they are such that a take at 100 mm stands p.snr over the noise, by the
// figure that is printed after each take, the loudspeaker being a small one.
func (p *plan) noise(hz []float64) ([]float64, error) {
	exc, err := rigExcitation(p.rig)
	if err != nil {
		return nil, err
	}
	an, err := measure.NewAnalyser(exc, len(exc.Samples), p.rig.Fit.From, p.rig.Fit.To)
	if err != nil {
		return nil, err
	}
	energy := p.gate.Duration() * float64(exc.Rate) / float64(p.rig.Sweep.Repeats)
	variance, far := p.scale(an)
	out := make([]float64, len(hz))
	for j, f := range hz {
		s := far * fading(f, p.highPass())
		out[j] = variance * an.NoiseGain(f) * energy / (s * s)
	}
	return out, nil
}

// scale is the noise per sample and the far response at 1 m in the band.
func (p *plan) scale(an *measure.Analyser) (variance, far float64) {
	if v := p.rig.Virtual; v != nil && p.rig.Audio.Backend == "virtual" {
		// See package bench: at 30 mm a capsule of sensitivity 1 gives the excitation back.
		p.snr = math.NaN()
		variance := v.Noise * v.Noise
		if v.Bits > 0 {
			variance += math.Pow(2, -2*float64(v.Bits-1)) / 6 // rounding and dither
		}
		return variance, 0.03 * math.Abs(v.Capsule.Sensitivity)
	}
	// The printed figure is a median over the fit band, about that at its middle, of a
	// gate of 20 ms.
	const taken = 0.0165 // s, effective
	middle := math.Sqrt(p.rig.Fit.From * p.rig.Fit.To)
	at100 := 1 / 0.1
	power := math.Pow(10, p.snr/10)
	return at100 * at100 / (power * an.NoiseGain(middle) * taken * float64(p.rig.Audio.SampleRate)), 1
}

func (p *plan) highPass() float64 {
	if v := p.rig.Virtual; v != nil && p.rig.Audio.Backend == "virtual" {
		return v.Source.HighPass
	}
	return usualHighPass
}

// fading is the magnitude of a second-order Butterworth high-pass; 1 for a corner of 0.
func fading(f, corner float64) float64 {
	x := math.Pow(f/math.Max(corner, 1e-9), 4)
	if corner == 0 {
		return 1
	}
	return math.Sqrt(x / (1 + x))
}
