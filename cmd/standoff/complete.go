package main

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"standoff/fit"
	"standoff/measure"
	"standoff/report/number"
)

// complete adds to the fit's result what only the takes know.
func (a *analysed) complete(version string) {
	r := a.fit.Result()
	r.Version = version
	r.Polarity = a.fit.Polarity(a.rig.Source.Polarity)
	r.Fit.Gate, r.Fit.GateReason = a.gate.Length, a.gate.Reason
	for _, h := range a.takes {
		q := h.analysis.Quality
		r.Takes = append(r.Takes, fit.TakeResult{
			File: h.take.File, Distance: h.take.Distance, Number: h.take.Number, Accepted: h.accepted,
			Flags: orEmpty(h.flags), PeakDB: dB(q.Peak), SNRDB: snrDB(q), Arrival: q.Arrival, Reason: joinReasons(h.reasons),
			Clock: h.clockResult(), Rate: h.resampledFrom(a.exc),
		})
	}
	r.Distances = a.allDistances(r.Distances)
	r.Warnings = append(r.Warnings, a.oddWarnings()...)
	r.Warnings = append(r.Warnings, a.placeWarnings()...)
	r.Warnings = append(r.Warnings, a.takeWarnings()...)
	r.Warnings = append(r.Warnings, a.clockWarnings()...)
	a.result = r
}

func orEmpty(f []measure.Flag) []measure.Flag {
	if f == nil {
		return []measure.Flag{}
	}
	return f
}

func joinReasons(r []string) string { return strings.Join(r, "; ") }

// allDistances puts the fitted distances in the rig's order and adds those that
// could not be used.
func (a *analysed) allDistances(fitted []fit.DistanceResult) []fit.DistanceResult {
	var out []fit.DistanceResult
	for _, d := range a.rig.Distances {
		res := fit.DistanceResult{Label: d.Label, Nominal: d.Metres, Fitted: d.Metres,
			FittedExpanded: fit.Coverage * a.rig.DistanceUncertainty, Alone: fit.NotAlone()}
		for _, f := range fitted {
			if f.Label == d.Label {
				res = f
			}
		}
		res.Flags = a.flagsAt(d.Label, res.Used)
		out = append(out, res)
	}
	return out
}

// flagsAt are the flags of a distance: of all its takes when none could be used,
// else of the accepted ones.
func (a *analysed) flagsAt(label string, used bool) []measure.Flag {
	out := []measure.Flag{}
	for _, h := range a.takes {
		if h.distance.Label != label || (used && !h.accepted) {
			continue
		}
		for _, f := range h.flags {
			if !slices.Contains(out, f) {
				out = append(out, f)
			}
		}
	}
	for _, g := range a.groups {
		if g.distance.Label == label && g.odd != nil {
			out = append(out, oddFlag(g.odd))
		}
	}
	return out
}

func oddFlag(o *fit.Odd) measure.Flag {
	if o.Moved {
		return measure.DistanceMismatch
	}
	return measure.LevelJump
}

// oddWarnings name distances that do not belong to the others, and what they
// probably are.
func (a *analysed) oddWarnings() []measure.Warning {
	out := []measure.Warning{}
	for _, g := range a.groups {
		switch o := g.odd; {
		case o == nil:
		case o.Moved:
			out = append(out, measure.Warning{Code: string(measure.DistanceMismatch),
				Text: fmt.Sprintf("%s sounds like %s, k = 2; the rig says %s: fitted with its place free", o.Label,
					number.PlusMinus(1e3*o.Sounds, 1e3*math.Max(fit.Coverage*o.SoundsSE, 1e-4), "mm"), number.Length(g.distance.Metres)),
				Hint: "was the stand moved, or the tape misread? measure this distance again"})
		default:
			out = append(out, measure.Warning{Code: string(measure.LevelJump),
				Text: fmt.Sprintf("%s is %s dB against what its distance explains: left out", o.Label, number.Signed(dB(math.Abs(o.Gain)), 1)),
				Hint: "has a gain been touched? measure this distance again"})
		}
	}
	return out
}

// snrDB is the signal over the noise in dB, 0 where there is no signal.
func snrDB(q measure.Quality) float64 { return dB(math.Sqrt(math.Max(q.SNR, 1))) }

// takeWarnings name what was rejected, takes of a distance with the same flaw
// together.
func (a *analysed) takeWarnings() []measure.Warning {
	out := []measure.Warning{}
	said := map[string]bool{}
	for _, h := range a.takes {
		key := h.distance.Label + " " + flagWords(h.flags)
		if h.accepted || said[key] {
			continue
		}
		said[key] = true
		var numbers []string
		for _, o := range a.takes {
			if !o.accepted && o.distance.Label+" "+flagWords(o.flags) == key {
				numbers = append(numbers, strconv.Itoa(o.take.Number))
			}
		}
		word, verb := "take", "is"
		if len(numbers) > 1 {
			word, verb = "takes", "are"
		}
		out = append(out, measure.Warning{Code: "take-rejected", Text: fmt.Sprintf("%s %s at %s %s left out: %s",
			word, strings.Join(numbers, ", "), h.distance.Label, verb, joinReasons(h.reasons))})
	}
	return out
}

func flagWords(flags []measure.Flag) string {
	var out []string
	for _, f := range flags {
		out = append(out, string(f))
	}
	return strings.Join(out, ", ")
}

// placeWarnings name distances without a take that can be used.
func (a *analysed) placeWarnings() []measure.Warning {
	out := []measure.Warning{}
	for _, d := range a.rig.Distances {
		if !slices.ContainsFunc(a.takes, func(h heard) bool { return h.distance.Label == d.Label }) {
			out = append(out, measure.Warning{Code: "distance-missing", Text: d.Label + " has not been measured",
				Hint: "run again on the same folder: it goes on where it stopped"})
		} else if !slices.ContainsFunc(a.groups, func(g group) bool { return g.distance.Label == d.Label }) {
			out = append(out, measure.Warning{Code: "distance-left-out", Text: d.Label + " has no take that can be used", Hint: "put right what the takes say, and run again on the same folder"})
		}
	}
	return out
}

// notes are warnings that ask for nothing to be done.
var notes = []string{"form-not-told", string(measure.Unsynchronised), clockCorrected, rateResampled}

// needsALook reports whether a person should look at a result: anything but a
// note.
func needsALook(r *fit.Result) bool {
	return slices.ContainsFunc(r.Warnings, func(w measure.Warning) bool { return !slices.Contains(notes, w.Code) })
}
