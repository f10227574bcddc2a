package main

import (
	"math"
	"math/cmplx"

	"standoff/fit"
	"standoff/measure"
	"standoff/report"
)

// data is everything the pages show.
func (a *analysed) data(version string) *report.Data {
	m := a.folder.Manifest()
	d := &report.Data{
		Result: a.result, Curves: a.fit.Curves(),
		Tag: m.Tag, Serial: m.Serial, Powering: a.rig.Unit.Powering,
		Measured: m.Created, Version: version, Session: a.folder.ID(), Conditions: a.conditions(m.Recorder),
	}
	if len(a.takes) > 0 {
		d.Measured = a.takes[0].take.Started
	}
	shown := a.averages(a.displayGrid(), a.result.Fit.Clock)
	for i, g := range a.groups {
		d.Responses = append(d.Responses, a.response(g, shown[i]))
		d.Impulses = append(d.Impulses, a.impulse(g))
	}
	return d
}

func (a *analysed) conditions(recorder string) report.Conditions {
	r := a.rig
	return report.Conditions{
		TemperatureC: r.Air.Temperature - 273.15, HumidityPercent: 100 * r.Air.Humidity, PressureKPa: r.Air.Pressure / 1e3,
		SourceKind: r.Source.Kind, SourceRadius: r.Source.Radius, SourceRadiusExpanded: fit.Coverage * r.Source.RadiusUncertainty,
		SweepFrom: r.Sweep.From, SweepTo: r.Sweep.To, SweepDuration: r.Sweep.Duration, SweepLevelDBFS: dB(r.Sweep.Level),
		Repeats: r.Sweep.Repeats, SampleRate: a.exc.Rate, Recorder: recorder, DistanceUncertainty: r.DistanceUncertainty,
	}
}

// The grid on which responses are shown: 24 points an octave from 20 Hz to
// 20 kHz as far as the excitation goes.
func (a *analysed) displayGrid() []float64 {
	var hz []float64
	for f := math.Max(20, a.exc.From); f <= math.Min(20000, a.exc.To)*(1+1e-9); f *= math.Exp2(1.0 / 24) {
		hz = append(hz, f)
	}
	return hz
}

// response is the gated average at one distance, in dB relative to a wire from
// output to input.
func (a *analysed) response(g group, spec measure.Spectrum) report.Response {
	out := report.Response{Label: g.distance.Label, Metres: g.distance.Metres, Used: g.used(), Hz: spec.Hz}
	for j, v := range spec.Value {
		level := math.Max(cmplx.Abs(v), 1e-12)
		out.DB = append(out.DB, dB(level))
		out.Degrees = append(out.Degrees, cmplx.Phase(v)*180/math.Pi)
		relative := math.Hypot(math.Sqrt(spec.Variance[j]), a.result.Fit.Unexplained*level) / (math.Sqrt2 * level)
		out.Expanded = append(out.Expanded, fit.Coverage*20/math.Ln10*relative)
	}
	return out
}

// What is shown of an impulse response around the direct sound, s.
const (
	showBefore = 0.002
	showAfter  = 0.012
)

func (a *analysed) impulse(g group) report.Impulse {
	mean, arrival := a.meanImpulse(g)
	rate := float64(a.exc.Rate)
	out := report.Impulse{Label: g.distance.Label, Metres: g.distance.Metres, Used: g.used(),
		GateFrom: -a.gate.Lead / 2, GateTo: a.gate.Length}
	from := max(int(arrival-showBefore*rate), 0)
	to := min(int(arrival+math.Max(showAfter, 1.6*a.gate.Length)*rate), len(mean))
	var largest float64
	for _, v := range mean[from:to] {
		largest = math.Max(largest, math.Abs(v))
	}
	for i, v := range mean[from:to] {
		out.Seconds = append(out.Seconds, (float64(from+i)-arrival)/rate)
		out.Value = append(out.Value, v/math.Max(largest, 1e-300))
	}
	return out
}

// meanImpulse is the average of the accepted responses at a distance, lined up by
// whole samples on the first, and the direct sound's place in it.
func (a *analysed) meanImpulse(g group) (mean []float64, arrival float64) {
	first := &g.takes[0].analysis.Impulse
	mean = make([]float64, len(first.Samples))
	for _, h := range g.takes {
		ir := &h.analysis.Impulse
		shift := 0
		if a.result.Fit.Clock == measure.ClockCommon {
			shift = ir.First - first.First - int(math.Round(ir.Latency-first.Latency))
		} else {
			shift = int(math.Round(first.Arrival - float64(first.First) - ir.Arrival + float64(ir.First)))
		}
		for i, v := range ir.Samples {
			if k := i + shift; k >= 0 && k < len(mean) {
				mean[k] += v / float64(len(g.takes))
			}
		}
	}
	return mean, first.Arrival - float64(first.First)
}
