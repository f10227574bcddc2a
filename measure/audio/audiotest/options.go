package audiotest

import (
	"math"
	"time"

	"standoff/measure"
	"standoff/measure/audio"
)

// Option says what a recorder cannot do, or needs.
type Option func(*settings)

type settings struct {
	request   audio.Request // what a good request looks like; copied for every take
	instant   bool
	realTime  bool
	freeClock bool
	within    time.Duration
}

// WithRequest replaces the request that the suite makes: a quarter of a second
// of sweep at 48 kHz for a distance "100mm", take 1. Its Meter is not used.
func WithRequest(req audio.Request) Option {
	return func(s *settings) { s.request = req }
}

// Instant is for a recorder that makes no sound and returns at once, as replay
// does: it is not interrupted half-way, need not call Meter, and is not asked
// for an excitation other than that of the request.
func Instant() Option { return func(s *settings) { s.instant = true } }

// RealTime is for a recorder whose take lasts as long as the excitation: a
// deadline in the middle of the take is tried too, and the pace is checked.
func RealTime() Option { return func(s *settings) { s.realTime = true } }

// FreeClock is for a recorder whose takes do not share a start: their delays
// are not compared.
func FreeClock() Option { return func(s *settings) { s.freeClock = true } }

// Within sets the time in which a recorder has to return after its context has
// ended; without it 2 s.
func Within(d time.Duration) Option { return func(s *settings) { s.within = d } }

func newSettings(opts []Option) settings {
	s := settings{request: defaultRequest(), within: 2 * time.Second}
	for _, opt := range opts {
		opt(&s)
	}
	s.request.Meter = nil
	return s
}

// good is a fresh copy of the request, so that a recorder that writes into an
// excitation cannot spoil the next check.
func (s settings) good() audio.Request {
	req := s.request
	req.Excitation = append([]float32(nil), s.request.Excitation...)
	return req
}

// duration of the excitation.
func (s settings) duration() time.Duration {
	return time.Duration(float64(len(s.request.Excitation)) / float64(s.request.SampleRate) * 1e9)
}

// defaultRequest is an exponential sweep with silence on both sides.
func defaultRequest() audio.Request {
	const rate, from, to = 48000, 50.0, 10000.0
	x := make([]float32, rate/2)
	n := rate / 4
	rise := math.Log(to / from)
	for i := range n {
		u := float64(i) / float64(n)
		phase := 2 * math.Pi * from * 0.25 / rise * (math.Exp(u*rise) - 1)
		x[rate/20+i] = float32(0.05 * math.Sin(math.Pi*u) * math.Sin(phase))
	}
	return audio.Request{
		Excitation: x,
		SampleRate: rate,
		Distance:   measure.Distance{Label: "100mm", Metres: 0.1},
		Number:     1,
	}
}
