package audiotest

import (
	"testing"

	"standoff/measure/audio"
)

// check is one line of the contract. It returns what is wrong, so that the
// suite itself can be tested on recorders that break the contract.
type check struct {
	name string
	skip func(settings) string // reason to leave the check out, or ""
	run  func(audio.Recorder, settings) error
}

// Run opens a fresh recorder for every line of the contract and checks it. The
// suite closes what it has opened.
func Run(t *testing.T, open func(t *testing.T) audio.Recorder, opts ...Option) {
	t.Helper()
	s := newSettings(opts)
	for _, c := range checks() {
		if c.skip != nil {
			if why := c.skip(s); why != "" {
				t.Logf("%s: does not apply: %s", c.name, why)
				continue
			}
		}
		t.Run(c.name, func(t *testing.T) {
			rec := open(t)
			defer rec.Close()
			if err := c.run(rec, s); err != nil {
				t.Error(err)
			}
		})
	}
}

func checks() []check {
	return []check{
		{"name", nil, checkName},
		{"recording", nil, checkRecording},
		{"full scale", whenInstant, checkFullScale},
		{"excitation unchanged", nil, checkExcitation},
		{"meter", nil, checkMeter},
		{"same delay", whenFreeClock, checkSameDelay},
		{"bad requests", nil, checkBadRequests},
		{"context over before", nil, checkOverBefore},
		{"context over during", whenInstant, checkOverDuring},
		{"deadline during", unlessRealTime, checkDeadlineDuring},
		{"pace", unlessRealTime, checkPace},
		{"again after an error", nil, checkAgain},
		{"closed", nil, checkClosed},
	}
}

func whenInstant(s settings) string {
	if s.instant {
		return "the recorder makes no sound and is over at once"
	}
	return ""
}

func whenFreeClock(s settings) string {
	if s.freeClock {
		return "takes of this recorder share no start"
	}
	return ""
}

func unlessRealTime(s settings) string {
	if !s.realTime {
		return "the recorder is faster than real time"
	}
	return ""
}
