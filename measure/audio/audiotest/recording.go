package audiotest

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"standoff/measure"
	"standoff/measure/audio"
)

func checkName(rec audio.Recorder, _ settings) error {
	name := rec.Name()
	if strings.TrimSpace(name) == "" || strings.ContainsAny(name, "\r\n") {
		return fmt.Errorf("name %q is not a few words on one line", name)
	}
	return nil
}

func checkRecording(rec audio.Recorder, s settings) error {
	_, err := record(rec, s.good())
	return err
}

// checkFullScale plays a square wave at full scale: a recorder may clip it, but
// not hand out more than full scale.
func checkFullScale(rec audio.Recorder, s settings) error {
	req := s.good()
	for i := range req.Excitation {
		req.Excitation[i] = 1
		if i/100%2 == 1 {
			req.Excitation[i] = -1
		}
	}
	_, err := record(rec, req)
	return err
}

func checkExcitation(rec audio.Recorder, s settings) error {
	req := s.good()
	if _, err := record(rec, req); err != nil {
		return err
	}
	if !slices.Equal(req.Excitation, s.request.Excitation) {
		return errors.New("the recorder changed the excitation")
	}
	return nil
}

// checkSameDelay compares two takes by their cross-correlation. The best lag
// has to be nought: latency is the same for all takes of an open recorder.
func checkSameDelay(rec audio.Recorder, s settings) error {
	first, err := record(rec, s.good())
	if err != nil {
		return err
	}
	second, err := record(rec, s.good())
	if err != nil {
		return err
	}
	if lag := bestLag(first.Mic, second.Mic, 500); lag != 0 {
		return fmt.Errorf("the second take is %d samples later than the first", lag)
	}
	return nil
}

// record makes a good take and checks its form.
func record(rec audio.Recorder, req audio.Request) (*measure.Recording, error) {
	got, err := rec.Record(context.Background(), req)
	if err != nil {
		return nil, fmt.Errorf("a good request failed: %w", err)
	}
	return got, checkForm(got, req)
}

func checkForm(got *measure.Recording, req audio.Request) error {
	if got == nil {
		return errors.New("neither a recording nor an error")
	}
	if got.SampleRate != req.SampleRate {
		return fmt.Errorf("sample rate %d, asked for %d", got.SampleRate, req.SampleRate)
	}
	if len(got.Mic) != len(req.Excitation) {
		return fmt.Errorf("%d samples of microphone for %d of excitation", len(got.Mic), len(req.Excitation))
	}
	if got.Loopback != nil && len(got.Loopback) != len(got.Mic) {
		return fmt.Errorf("%d samples of loopback for %d of microphone", len(got.Loopback), len(got.Mic))
	}
	if got.Overflows < 0 || got.Underflows < 0 {
		return fmt.Errorf("negative counts: %d overflows, %d underflows", got.Overflows, got.Underflows)
	}
	if err := checkSamples("microphone", got.Mic); err != nil {
		return err
	}
	return checkSamples("loopback", got.Loopback)
}

func checkSamples(channel string, x []float32) error {
	for i, v := range x {
		// The comparison is written so that a NaN fails it.
		if !(math.Abs(float64(v)) <= 1) {
			return fmt.Errorf("sample %d of the %s is %v, outside ±1", i, channel, v)
		}
	}
	return nil
}

// bestLag is the lag of b behind a, within ±most, with the largest
// cross-correlation.
func bestLag(a, b []float32, most int) int {
	best, at := math.Inf(-1), 0
	for lag := -most; lag <= most; lag++ {
		sum := 0.0
		for i := max(0, -lag); i < min(len(a), len(b)-lag); i++ {
			sum += float64(a[i]) * float64(b[i+lag])
		}
		if sum > best {
			best, at = sum, lag
		}
	}
	return at
}
