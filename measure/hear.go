package measure

import (
	"fmt"
	"math"
	"slices"
)

// Hear analyses one recording, of any length and sample rate: it finds the excitation
// in it, and resamples what it takes out where rates differ. It fails on a sample rate
// that is none.
func (a *Analyser) Hear(rec *Recording) (*TakeAnalysis, error) {
	t, err := a.locate(rec)
	if err != nil {
		return nil, err
	}
	return a.HearAgain(rec, t)
}

// HearAgain is Hear with a timing that is known, such as one with the clock's offset
// taken off.
func (a *Analyser) HearAgain(rec *Recording, t Timing) (*TakeAnalysis, error) {
	part, err := a.stretch(rec, t)
	if err != nil {
		return nil, err
	}
	first := a.dec.Len()
	if t.Count > 0 { // it was found: something louder may be elsewhere
		first = int(2.5 * margin * float64(a.exc.Rate))
	}
	out := a.take(part, first)
	out.Timing = t
	if !t.asItIs() {
		a.asRecorded(out, rec)
	}
	if err := a.whole(out, rec); err != nil {
		return nil, err
	}
	told := &out.Impulse
	if out.wire != nil {
		told = out.wire
	}
	out.Excess = excess(told, a.exc.From, math.Min(a.exc.To, 0.42*float64(t.Rate)))
	out.Excess.Taken = t.Clock
	out.onRecordingsTime(float64(a.exc.Rate))
	return out, nil
}

// onRecordingsTime counts times from the recording's beginning instead of that of the
// stretch.
func (t *TakeAnalysis) onRecordingsTime(rate float64) {
	origin := float64(t.Timing.Origin)
	t.Impulse.First += t.Timing.Origin
	t.Impulse.Arrival += origin
	if t.wire != nil {
		t.Impulse.Latency += origin
	} else {
		t.Quality.Arrival += origin / rate
	}
}

// asRecorded looks for what interpolation hides: samples at full scale, while the sweep
// is heard.
func (a *Analyser) asRecorded(out *TakeAnalysis, rec *Recording) {
	t := out.Timing
	arrival := float64(t.Origin) + out.Impulse.Arrival
	from, to := int((float64(a.exc.Begin)+arrival)*t.Step), int((float64(a.exc.End)+arrival)*t.Step)
	part := rec.Mic[min(max(from, 0), len(rec.Mic)):min(max(to, 0), len(rec.Mic))]
	out.Quality.Peak = peakOf(part)
	if slices.Contains(out.Flags, Clipped) || slices.Contains(out.Flags, Silent) {
		return
	}
	if n := clipped(part); n >= clipSamples {
		out.flag(Clipped, "%d samples at full scale: turn the preamplifier down", n)
	}
}

func (t *TakeAnalysis) flag(f Flag, format string, args ...any) {
	t.Flags = append(t.Flags, f)
	t.Reasons = append(t.Reasons, fmt.Sprintf(format, args...))
}

// cutSlack is what an arrival may be wrong by, s.
const cutSlack = 0.001

// likeSome is the likeness that nothing but a part of the sweep has.
const likeSome = 0.3

// whole flags a take in which the sweep is not heard from its beginning to its end.
func (a *Analyser) whole(out *TakeAnalysis, rec *Recording) error {
	silent := slices.Contains(out.Flags, Silent)
	early, late := a.missing(out.Timing, out.Impulse.Arrival, len(rec.Mic))
	if !silent && math.Max(early, late) <= cutSlack {
		return nil
	}
	// The response of a part is no arrival, and one that comes early may have gone
	// round in the transform: look where it is.
	f, err := a.finder(rec.SampleRate)
	if err != nil {
		return err
	}
	place := f.Find(rec.Mic)
	if place.Likeness > likeSome {
		early, late = a.missing(Timing{Step: out.Timing.Step}, place.At/out.Timing.Step, len(rec.Mic))
	}
	if silent && (place.Likeness < likeSome || math.Max(early, late) <= cutSlack) {
		return nil
	}
	out.Flags, out.Reasons = nil, nil // they follow from it
	if early > late {
		out.flag(Incomplete, "the recording begins %.2f s after the sweep: start the recorder first, then play", math.Max(early, cutSlack))
	} else {
		out.flag(Incomplete, "the recording ends %.2f s before the sweep: let the recorder run on", math.Max(late, cutSlack))
	}
	return nil
}

// missing is how much of the sweep lies before and after a recording, in s, when it
// arrives so many samples after the stretch's beginning.
func (a *Analyser) missing(t Timing, arrival float64, samples int) (early, late float64) {
	rate := float64(a.exc.Rate)
	origin := float64(t.Origin) + arrival
	early = -(float64(a.exc.Begin) + origin) / rate
	late = (float64(a.exc.End) + origin - float64(samples)/t.Step) / rate
	return early, late
}
