package rig

import (
	"fmt"
	"strconv"
	"strings"
)

// The checks below compare values of several sections. A default gives way where
// what is written leaves no room for it; what is written is never changed.

// checkSetback refuses distances at which the tape would end inside the
// microphone.
func (f *file) checkSetback(r *Rig) {
	if !f.sound("capsule.setback") {
		return
	}
	for i := range mostDistances {
		path := index("distances", i)
		n := f.found[path]
		if n == nil || !f.sound(path) {
			continue
		}
		text := strings.TrimSpace(n.Value)
		if metres, _ := length.parse(text); metres < r.Capsule.Setback {
			f.fail(n.Line, path, fmt.Sprintf("%s is nearer than the setback of %s", show(text), f.text("capsule.setback", "6mm")),
				"begin farther away, or correct capsule.setback")
		}
	}
}

// maxShare of the sample rate is where a sweep may end: 0.45, which leaves the
// converter's anti-alias filter its room (common practice).
func maxShare(sampleRate int) float64 { return float64(9*sampleRate) / 20 }

// checkBands holds the fit inside the sweep, and the sweep inside the sample rate.
func (f *file) checkBands(r *Rig) {
	if most := maxShare(r.Audio.SampleRate); r.Sweep.To > most {
		f.orDefault("sweep.to", &r.Sweep.To, most,
			fmt.Sprintf("is more than 0.45 of the sample rate of %dHz", r.Audio.SampleRate), "audio.sample_rate")
	}
	f.checkOrder("sweep", r.Sweep.From, r.Sweep.To)
	if r.Fit.From < r.Sweep.From {
		f.orDefault("fit.from", &r.Fit.From, r.Sweep.From, "is below the sweep, which begins at "+hertz(r.Sweep.From), "sweep.from")
	}
	if r.Fit.To > r.Sweep.To {
		f.orDefault("fit.to", &r.Fit.To, r.Sweep.To, "is above the sweep, which ends at "+hertz(r.Sweep.To), "sweep.to")
	}
	f.checkOrder("fit", r.Fit.From, r.Fit.To)
}

// orDefault moves a default to its limit, or complains about a value that the
// file gives itself, unless one of the keys that limit it is wrong anyway.
func (f *file) orDefault(path string, value *float64, limit float64, reason, limiter string) {
	n := f.found[path]
	switch {
	case n == nil:
		*value = limit
	case f.sound(path, limiter):
		f.fail(n.Line, path, show(n.Value)+" "+reason, "write "+hertz(limit))
	}
}

// checkOrder complains when a band begins above its end.
func (f *file) checkOrder(section string, from, to float64) {
	lower, upper := section+".from", section+".to"
	if from < to || !f.sound(lower, upper, "sweep.from", "sweep.to", "audio.sample_rate") {
		return
	}
	for _, path := range []string{lower, upper, "sweep.from", "sweep.to", "audio.sample_rate"} {
		if n := f.found[path]; n != nil {
			f.fail(n.Line, path, fmt.Sprintf("leaves no band to the %s: from %s to %s", section, hertz(from), hertz(to)),
				"write "+section+".from below "+section+".to")
			return
		}
	}
}

// hertz is a frequency in the notation of the file, in whole hertz or finer.
func hertz(f float64) string {
	if f >= 1000 {
		return strconv.FormatFloat(f/1000, 'g', 8, 64) + "kHz"
	}
	return strconv.FormatFloat(f, 'g', 8, 64) + "Hz"
}

// checkChannels refuses a microphone and a loopback on one input.
func (f *file) checkChannels(r *Rig) {
	if r.Audio.LoopbackChannel != r.Audio.InputChannel || !f.sound("audio.input_channel", "audio.loopback_channel") {
		return
	}
	f.fail(f.found["audio.loopback_channel"].Line, "audio.loopback_channel",
		fmt.Sprintf("%d is the microphone's channel too", r.Audio.LoopbackChannel),
		"write the input that the cable from the output goes to, or none")
}
