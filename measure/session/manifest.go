package session

import (
	"encoding/json"
	"fmt"
	"math"
	"slices"
	"time"

	"standoff/measure"
)

// Schema names the manifest's format. Later versions of it under the same
// number only add keys; those are kept as they are.
const Schema = "standoff/session/1"

// Manifest is session.json.
type Manifest struct {
	Schema     string      `json:"schema"`
	Version    string      `json:"version"` // of the program that made the folder
	Tag        string      `json:"tag"`
	Serial     string      `json:"serial,omitempty"`
	RigSHA256  string      `json:"rig_sha256"`
	Created    time.Time   `json:"created,omitzero"`
	Recorder   string      `json:"recorder,omitempty"`   // what recorded, in a few words
	Excitation *Excitation `json:"excitation,omitempty"` // only where it is not the rig's own
	Takes      []Take      `json:"takes"`                // in the order made

	extra map[string]json.RawMessage // keys of later versions
}

// Excitation is the entry for excitation.wav.
type Excitation struct {
	SHA256     string `json:"sha256"`
	SampleRate int    `json:"sample_rate_hz"`
}

// Take is one recording and what was found out about it.
type Take struct {
	File       string         `json:"file"`      // takes/30mm-1.wav
	Distance   string         `json:"distance"`  // label, as the rig writes it
	Number     int            `json:"number"`    // at this distance, from 1
	Metres     float64        `json:"nominal_m"` // nominal distance, m
	SHA256     string         `json:"sha256"`
	Started    time.Time      `json:"started,omitzero"`
	SampleRate int            `json:"sample_rate_hz"`
	Channels   int            `json:"channels"` // 1, or 2 with a loopback
	Overflows  int            `json:"overflows"`
	Underflows int            `json:"underflows"`
	Source     string         `json:"source,omitempty"` // the recorder, or the name of the file imported
	Judged     bool           `json:"judged"`           // false: nobody has looked at it yet
	Accepted   bool           `json:"accepted"`
	Flags      []measure.Flag `json:"flags"`
	Quality    Quality        `json:"quality,omitzero"`
	Reason     string         `json:"reason,omitempty"` // for people: why it was not accepted

	extra map[string]json.RawMessage
}

// Quality are a take's figures. One that is not finite is null in the file and
// comes back as NaN.
type Quality struct {
	PeakDBFS float64 // largest sample, dB re full scale
	SNRDB    float64 // sweep over noise, dB
	ArrivalS float64 // arrival of the direct sound, s
}

// Verdict is the outcome of judging a take.
type Verdict struct {
	Accepted bool
	Flags    []measure.Flag
	Quality  Quality
	Reason   string
}

type qualityJSON struct {
	PeakDBFS *float64 `json:"peak_dbfs"`
	SNRDB    *float64 `json:"snr_db"`
	ArrivalS *float64 `json:"arrival_s"`
}

// MarshalJSON writes null for what JSON has no number for, such as the level of silence.
func (q Quality) MarshalJSON() ([]byte, error) {
	finite := func(v float64) *float64 {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return nil
		}
		return &v
	}
	return json.Marshal(qualityJSON{finite(q.PeakDBFS), finite(q.SNRDB), finite(q.ArrivalS)})
}

// UnmarshalJSON reads null, and a figure that is not there, as NaN.
func (q *Quality) UnmarshalJSON(data []byte) error {
	var in qualityJSON
	if err := json.Unmarshal(data, &in); err != nil {
		// Not wrapped: the position in it counts from here, not from the file's start.
		return fmt.Errorf("quality: %v", err)
	}
	number := func(p *float64) float64 {
		if p == nil {
			return math.NaN()
		}
		return *p
	}
	*q = Quality{number(in.PeakDBFS), number(in.SNRDB), number(in.ArrivalS)}
	return nil
}

func (t Take) clone() Take {
	t.Flags = slices.Clone(t.Flags)
	return t
}

func (m Manifest) clone() Manifest {
	takes := make([]Take, len(m.Takes))
	for i, t := range m.Takes {
		takes[i] = t.clone()
	}
	m.Takes = takes
	if m.Excitation != nil {
		e := *m.Excitation
		m.Excitation = &e
	}
	return m
}

func (m *Manifest) find(file string) int {
	return slices.IndexFunc(m.Takes, func(t Take) bool { return t.File == file })
}
