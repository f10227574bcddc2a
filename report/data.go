// Package report draws the pages of a session: one PDF, and every figure as
// PNG and SVG. It knows no files and no devices; it is handed Data and writes
// to an io.Writer.
package report

import (
	"time"

	"standoff/fit"
)

// Data is everything the pages show.
type Data struct {
	Result *fit.Result
	Curves *fit.Curves

	Tag, Serial string
	Powering    string    // none, phantom, external: which caution is shown
	Measured    time.Time // when the first take was made, with its zone
	Version     string    // of the program
	Session     string    // short identity of the session, 8 hex digits
	Conditions  Conditions

	Responses []Response // near to far
	Impulses  []Impulse  // near to far
}

// Conditions are what was set and what prevailed, for the summary page.
type Conditions struct {
	TemperatureC, HumidityPercent, PressureKPa float64
	SourceKind                                 string  // point, piston
	SourceRadius, SourceRadiusExpanded         float64 // m
	SweepFrom, SweepTo, SweepDuration          float64 // Hz, Hz, s
	SweepLevelDBFS                             float64
	Repeats                                    int
	SampleRate                                 int
	Recorder                                   string  // e.g. "virtual bench"
	DistanceUncertainty                        float64 // standard, m
}

// Response is the gated, averaged response at one distance.
type Response struct {
	Label                     string
	Metres                    float64 // nominal
	Used                      bool
	Hz, DB, Degrees, Expanded []float64 // Expanded: ± of DB, k = 2
}

// Impulse is the impulse response at one distance around its gate.
type Impulse struct {
	Label            string
	Metres           float64
	Used             bool
	Seconds, Value   []float64 // time from the direct sound's arrival; value relative to the largest of this response
	GateFrom, GateTo float64   // s, where the gate's flat part begins and where it has closed
}
