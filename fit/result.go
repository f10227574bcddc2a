package fit

import "standoff/measure"

// Schema names the layout of Result as JSON.
const Schema = "standoff/result/1"

// Value is a number with its doubt. Value and Expanded are nil when the data
// do not hold the number (Resolved false); then UpperLimit or LowerLimit say
// what can be said, one-sided, 95 %.
type Value struct {
	Value          *float64 `json:"value"`
	Expanded       *float64 `json:"expanded"`        // half-width of the interval, CoverageFactor standard uncertainties
	CoverageFactor float64  `json:"coverage_factor"` // k
	Resolved       bool     `json:"resolved"`
	Unit           string   `json:"unit"`
	UpperLimit     *float64 `json:"upper_limit"`
	LowerLimit     *float64 `json:"lower_limit,omitempty"`
}

// Result is everything that the analysis of one session found.
type Result struct {
	Schema    string            `json:"schema"`
	Version   string            `json:"version"` // of the program
	Capsule   CapsuleResult     `json:"capsule"`
	Distances []DistanceResult  `json:"distances"`
	Takes     []TakeResult      `json:"takes"`
	Polarity  string            `json:"polarity"` // normal, reversed, unknown
	Fit       FitSummary        `json:"fit"`
	Models    []Candidate       `json:"models"` // what was compared, best first
	Budget    Budget            `json:"budget"`
	Profiles  Profiles          `json:"profiles"`
	Octaves   []OctaveMix       `json:"mix_by_octave"`
	RiseTable RiseTable         `json:"rise_table"`
	Warnings  []measure.Warning `json:"warnings"`
}

// CapsuleResult is what was found about the capsule.
type CapsuleResult struct {
	Model            string `json:"model"`          // summed, phase-shift
	Body             string `json:"body"`           // open, sphere
	Rear             string `json:"rear,omitempty"` // of phase-shift: delay, low-pass
	GradientFraction Value  `json:"gradient_fraction"`
	PortSpacing      Value  `json:"port_spacing"` // plane-wave effective, m
	Setback          Value  `json:"setback"`      // m, as fitted with its prior
	SourceRadius     Value  `json:"source_radius"`
	Pattern          string `json:"pattern"` // nearest name, "" when the mix is not resolved
	Claimed          string `json:"claimed,omitempty"`
	Agrees           *bool  `json:"agrees,omitempty"` // whether the mix is consistent with the claim
}

// DistanceResult is one place on the list.
type DistanceResult struct {
	Label          string         `json:"label"`
	Nominal        float64        `json:"nominal_m"`
	Fitted         float64        `json:"fitted_m"`          // nominal + tape error found, grille to source
	FittedExpanded float64        `json:"fitted_expanded_m"` // k = 2
	Used           bool           `json:"used"`
	Flags          []measure.Flag `json:"flags"`
	Alone          Alone          `json:"alone"`
	Misfit         float64        `json:"reduced_chi_square"` // of this distance within the joint fit
}

// Alone is the fit of one response by itself, given the far-field response
// that the other distances settle.
type Alone struct {
	GradientFraction Value `json:"gradient_fraction"`
	PortSpacing      Value `json:"port_spacing"`
}

// TakeResult is one recording and what became of it.
type TakeResult struct {
	File     string         `json:"file"`
	Distance string         `json:"distance"`
	Number   int            `json:"number"`
	Accepted bool           `json:"accepted"`
	Flags    []measure.Flag `json:"flags"`
	PeakDB   float64        `json:"peak_dbfs"`
	SNRDB    float64        `json:"snr_db"`
	Arrival  float64        `json:"arrival_s"` // of the direct sound, from the start of the sweep, latency included
	Reason   string         `json:"reason,omitempty"`
	Clock    *TakeClock     `json:"clock,omitempty"`             // of the recorder against the player, where it could be read
	Rate     int            `json:"resampled_from_hz,omitempty"` // the recording's sample rate where it is not the sweep's
}

// TakeClock is by how much a recording's clock was faster than the playback's, in
// parts in a million.
type TakeClock struct {
	Offset           float64 `json:"offset_ppm"`
	Expanded         float64 `json:"expanded_ppm"`          // k = 2
	RelativeExpanded float64 `json:"relative_expanded_ppm"` // k = 2, against the other takes
	Corrected        bool    `json:"corrected"`
}

// FitSummary says how and how well the joint fit was made.
type FitSummary struct {
	From             float64 `json:"from_hz"`
	To               float64 `json:"to_hz"`
	BandReason       string  `json:"band_reason"` // why it ends where it does
	ReducedChiSquare float64 `json:"reduced_chi_square"`
	Unexplained      float64 `json:"unexplained"` // besides noise, relative, standard
	Room             float64 `json:"room_1_m"`    // what reflections leave, the far response at 1 m being 1
	Alike            float64 `json:"alike"`       // neighbouring frequencies that deviate together
	Points           int     `json:"points"`
	DegreesOfFreedom int     `json:"degrees_of_freedom"`
	Gate             float64 `json:"gate_s"`
	GateReason       string  `json:"gate_reason"`
	Clock            string  `json:"clock"` // common, free
	Status           string  `json:"status"`
	SpeedOfSound     float64 `json:"speed_of_sound_m_s"`
	SpeedExpanded    float64 `json:"speed_of_sound_expanded_m_s"`
}

// Candidate is one model form that was tried.
type Candidate struct {
	Model            string  `json:"model"`
	Body             string  `json:"body"`
	Rear             string  `json:"rear,omitempty"`
	GradientFraction float64 `json:"gradient_fraction"`
	PortSpacing      float64 `json:"port_spacing_m"`
	ChiSquare        float64 `json:"chi_square"`
	ReducedChiSquare float64 `json:"reduced_chi_square"`
	Delta            float64 `json:"delta_chi_square"` // above the best, scaled by the best's reduced chi-square
	DegreesOfFreedom int     `json:"degrees_of_freedom"`
	Criterion        float64 `json:"information_criterion"` // Akaike's: chi-square in units of the best one's reduced chi-square, where that is above 1, and twice the parameters
	AtBound          bool    `json:"at_bound"`              // mix or spacing ended at the end of its range and means nothing
	Chosen           bool    `json:"chosen"`
	Why              string  `json:"why"`
}

// RiseTable is the rise in dB at working distances: DB[i][j] at
// Frequencies[i] and Distances[j], with Expanded[i][j] at k = 2.
type RiseTable struct {
	Distances   []float64   `json:"distances_m"`
	Frequencies []float64   `json:"frequencies_hz"`
	DB          [][]float64 `json:"db"`
	Expanded    [][]float64 `json:"expanded_db"`
}
