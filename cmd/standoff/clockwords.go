package main

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"standoff/fit"
	"standoff/measure"
)

// The codes of what is said of clocks and sample rates besides the flags.
const (
	clockCorrected = string(measure.ClockDrift)
	rateResampled  = "resampled"
)

// clockResult is what result.json holds of a take's clock.
func (h *heard) clockResult() *fit.TakeClock {
	c := h.clock
	if !h.accepted || !(c.Uncertainty > 0) || math.IsInf(c.Uncertainty, 0) {
		return nil
	}
	return &fit.TakeClock{Offset: 1e6 * c.Value, Expanded: fit.Coverage * 1e6 * c.Uncertainty,
		RelativeExpanded: fit.Coverage * 1e6 * c.Relative, Corrected: h.analysis.Timing.Clock != 0}
}

// resampledFrom is the sample rate of a recording that had to be resampled, else 0.
func (h *heard) resampledFrom(e *measure.Excitation) int {
	if !h.analysis.Timing.Resampled(e) {
		return 0
	}
	return h.analysis.Timing.Rate
}

// clockWarnings say once for all takes what was made of starts, clocks and rates.
func (a *analysed) clockWarnings() []measure.Warning {
	var out []measure.Warning
	add := func(code, hint, format string, args ...any) {
		out = append(out, measure.Warning{Code: code, Text: fmt.Sprintf(format, args...), Hint: hint})
	}
	if takes := a.flagged(measure.Unsynchronised); len(takes) > 0 {
		add(string(measure.Unsynchronised), "a common clock tells more: play and record with one device, or record the playback by wire on audio.loopback_channel",
			"play and record share no start: each take has a delay of its own, which is fitted and widens the ±")
	}
	if takes := a.flagged(measure.ClockDrift); len(takes) > 0 {
		add(clockCorrected, driftHint(takes), "play and record clocks differ, %s, in ppm: %s", takes[0].corrected(), offsets(takes))
	}
	if takes, rates := a.resampled(); takes > 0 {
		add(rateResampled, "record at the sweep's sample rate", "%d of %d recordings have %s Hz instead of the sweep's %d Hz: resampled for the analysis, kept as they are",
			takes, len(a.takes), strings.Join(rates, " and "), a.exc.Rate)
	}
	return out
}

func driftHint(takes []heard) string {
	if takes[0].analysis.Timing.Clock != 0 {
		return "nothing has to be done; where one device plays and records there is no difference to correct"
	}
	return "play and record with one device"
}

func (a *analysed) flagged(f measure.Flag) (out []heard) {
	for _, h := range a.takes {
		if slices.Contains(h.flags, f) {
			out = append(out, h)
		}
	}
	return out
}

// offsets lists what clocks differ by, the same values at a distance once.
func offsets(takes []heard) string {
	var out []string
	for _, h := range takes {
		s := fmt.Sprintf("%s %+.1f ± %.1f", h.distance.Label, 1e6*h.clock.Value, fit.Coverage*1e6*h.clock.Uncertainty)
		if !slices.Contains(out, s) {
			out = append(out, s)
		}
	}
	return strings.Join(out, ", ")
}

func (a *analysed) resampled() (takes int, rates []string) {
	for _, h := range a.takes {
		if from := h.resampledFrom(a.exc); from > 0 {
			takes++
			if s := fmt.Sprint(from); !slices.Contains(rates, s) {
				rates = append(rates, s)
			}
		}
	}
	return takes, rates
}
