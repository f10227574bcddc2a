package measure

import (
	"fmt"
	"math"

	"standoff/measure/dsp"
)

// Timing says how a recording's samples lie on the excitation's time: its sample
// (Origin + i)·Step is sample i of what is analysed.
type Timing struct {
	Origin int     // samples of the excitation after the recording's beginning
	Step   float64 // samples of the recording for one of the excitation
	Count  int     // samples that are analysed; 0 is all
	Rate   int     // of the recording, Hz
	Clock  float64 // offset of the recording's clock that is taken off, relative
}

// asItIs reports whether the recording is analysed sample by sample.
func (t Timing) asItIs() bool { return t.Step == 1 && t.Count == 0 }

// Resampled reports whether the recording has another sample rate than the sweep.
func (t Timing) Resampled(e *Excitation) bool { return t.Rate != e.Rate }

// Corrected is the same stretch read with the clock's offset taken off: the clock of a
// recording that is fast makes more samples of the same sound.
func (t Timing) Corrected(e *Excitation, clock float64) Timing {
	start := float64(t.Origin) * t.Step
	t.Clock = clock
	t.Step = float64(t.Rate) / float64(e.Rate) * (1 + clock)
	t.Origin = int(math.Round(start / t.Step))
	return t
}

// LowestRate is the least sample rate in Hz of a recording in which a band up to the
// given frequency is whole: the filter of a converter begins at 0.46 of its rate.
func LowestRate(to float64) float64 { return to / 0.46 }

// margin is how much is kept before an excitation that was found, s.
const margin = 0.02

// locate finds the excitation in a recording. One that is about as long as the
// excitation and has its sample rate is taken as it is.
func (a *Analyser) locate(rec *Recording) (Timing, error) {
	t := Timing{Step: float64(rec.SampleRate) / float64(a.exc.Rate), Rate: rec.SampleRate}
	if t.Step == 1 && len(rec.Mic) <= a.Longest() {
		return t, nil
	}
	f, err := a.finder(rec.SampleRate)
	if err != nil {
		return t, err
	}
	t.Origin = int(math.Round((f.Find(rec.Mic).At - margin*float64(rec.SampleRate)) / t.Step))
	t.Count = min(len(a.exc.Samples)+int(margin*float64(a.exc.Rate)), a.Longest())
	return t, nil
}

// finder for a sample rate, kept for the next recording.
func (a *Analyser) finder(rate int) (*Finder, error) {
	if a.finders == nil {
		a.finders = map[int]*Finder{}
	}
	if f := a.finders[rate]; f != nil {
		return f, nil
	}
	f, err := NewFinder(a.exc, rate)
	if err == nil {
		a.finders[rate] = f
	}
	return f, err
}

// stretch is the part of a recording that is analysed, on the excitation's time.
func (a *Analyser) stretch(rec *Recording, t Timing) (*Recording, error) {
	if t.asItIs() {
		return rec, nil
	}
	if a.resampler == nil {
		a.resampler = dsp.NewResampler()
	}
	count := t.Count
	if count == 0 {
		count = min(int(float64(len(rec.Mic))/t.Step), a.Longest())
	}
	out := *rec
	var err error
	if out.Mic, err = a.read(rec.Mic, t, count); err != nil || rec.Loopback == nil {
		return &out, err
	}
	out.Loopback, err = a.read(rec.Loopback, t, count)
	return &out, err
}

func (a *Analyser) read(x []float32, t Timing, count int) ([]float32, error) {
	if t.Step == 1 {
		out := make([]float32, count)
		from := t.Origin
		if from < len(x) && from+count > 0 {
			copy(out[max(-from, 0):], x[max(from, 0):])
		}
		return out, nil
	}
	out, err := a.resampler.Read(x, float64(t.Origin)*t.Step, t.Step, count)
	if err != nil {
		return nil, fmt.Errorf("%d Hz to %d Hz: %w", t.Rate, a.exc.Rate, err)
	}
	return out, nil
}
