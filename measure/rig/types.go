// Package rig reads the YAML description of a measurement, strictly: every
// value has a unit, unknown keys are errors, and every error names file, line
// and key with the likely cure.
package rig

import (
	"standoff/measure"
)

// Rig is a checked measurement description, SI units throughout, every default
// filled in.
type Rig struct {
	Path string // as given on the command line
	Raw  []byte // the file, byte for byte

	Unit                Unit
	Capsule             Capsule
	Source              Source
	Air                 measure.Air
	Sweep               Sweep
	Audio               Audio
	Distances           []measure.Distance // in the order of the file
	DistanceUncertainty float64            // standard uncertainty of the tape, m
	Fit                 Fit
	Mover               *Mover   // nil when a person moves the microphone
	Virtual             *Virtual // truth of the virtual bench; with defaults when the backend is virtual
}

// Unit is the microphone under test.
type Unit struct {
	Tag      string
	Serial   string
	Claimed  string // "" or one of Patterns
	Powering string // none, phantom or external
}

// Patterns are the values of unit.claimed.
var Patterns = []string{"omni", "subcardioid", "cardioid", "supercardioid", "hypercardioid", "figure-8"}

// Capsule is what is assumed about the capsule.
type Capsule struct {
	Model              string  // auto, summed, phase-shift
	Body               string  // auto, open, sphere
	Setback            float64 // m
	SetbackUncertainty float64 // standard, m
}

// Source is the loudspeaker.
type Source struct {
	Kind              string  // point, piston
	Radius            float64 // m; 0 for a point
	RadiusUncertainty float64 // standard, m
	Centre            float64 // by how much its sound comes from behind the reference plane, m
	CentreUncertainty float64 // standard, m
	Polarity          string  // unknown, normal, reversed: whether a positive signal makes a positive pressure

	From string // the file that it was measured into, "" without
	Raw  []byte // that file, byte for byte
}

// Sweep is the excitation.
type Sweep struct {
	From, To float64 // Hz
	Duration float64 // s, without its silences
	Level    float64 // peak, full scale 1 (the file says dBFS)
	Repeats  int     // takes per distance
	Before   float64 // silence before, s
	After    float64 // silence after, s
}

// Audio is how sound is made and recorded.
type Audio struct {
	Backend         string // virtual, portaudio, wav
	SampleRate      int
	Clock           string // common, free, auto
	Input, Output   string // device names or parts of them; "" is the default device
	InputChannel    int    // from 1
	OutputChannel   int    // from 1
	LoopbackChannel int    // from 1; 0 none
}

// Fit is where and how the model is fitted.
type Fit struct {
	From, To float64 // Hz
	Gate     float64 // s; 0 means auto
}

// Mover is a program that brings the microphone to the next distance.
type Mover struct {
	Command []string // run directly; {distance_mm} {distance_label} {index} are replaced
	Settle  float64  // s to wait afterwards
}

// Virtual is the truth of the virtual bench.
type Virtual struct {
	Seed         uint64
	RealTime     bool
	Capsule      VirtualCapsule
	Source       VirtualSource
	Room         *VirtualRoom       // nil: free field
	Noise        float64            // rms, full scale 1
	Hum          float64            // peak of the fundamental, full scale 1; 0 none
	HumFrequency float64            // Hz
	Bits         int                // 16, 24 or 0 for no conversion
	Latency      float64            // s
	ClockOffset  float64            // relative: recording clock against playback clock, 10e-6 is 10 ppm fast
	Loopback     bool               // an electrical loopback channel is recorded too
	TapeErrors   map[string]float64 // distance label → true minus nominal, m
	TapeError    float64            // standard deviation of further random tape errors, m
	Faults       []VirtualFault
}

// VirtualCapsule is the true microphone.
type VirtualCapsule struct {
	Form             string  // phase-shift, summed
	Body             string  // sphere, open
	Rear             string  // delay, low-pass (phase-shift only)
	GradientFraction float64 // β
	GradientFrom     float64 // Hz, below which the gradient part fades (summed only), 0 none
	PortSpacing      float64 // plane-wave effective spacing d, m (3a for the sphere)
	Setback          float64 // true grille to capsule centre, m
	Sensitivity      float64 // gain of the far response at 30 mm, relative; negative reverses polarity
	Resonance        float64 // Hz, 0 none
	ResonanceQ       float64
	HighPass         float64 // Hz, first order, 0 none
}

// VirtualSource is the true loudspeaker.
type VirtualSource struct {
	Radius   float64 // m, 0 a point
	HighPass float64 // Hz, second order
	RollOff  float64 // Hz, second order low-pass
	Second   float64 // second-harmonic distortion at full scale, relative to the fundamental
	Third    float64 // the same, third
}

// VirtualRoom is a shoebox.
type VirtualRoom struct {
	Size       [3]float64 // m: length, width, height
	Reflection float64    // pressure reflection factor of all walls, 0 to <1
}

// VirtualFault is something going wrong on purpose.
type VirtualFault struct {
	Distance string  // label
	Take     int     // number of the take, 0 for every one
	Kind     string  // clip, dropout, dead, wrong-distance, reversed, gain
	Amount   float64 // wrong-distance: metres added; gain: factor; else unused
}
