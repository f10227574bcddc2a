package bench

import "time"

// Config is the truth of a bench, SI units throughout.
type Config struct {
	Seed         uint64  // of noise, hum phase, dither and tape errors
	RealTime     bool    // a take lasts as long as its excitation
	SpeedOfSound float64 // m/s

	Capsule Capsule
	Source  Source
	Room    *Room // nil: free field

	Noise        float64 // rms of white Gaussian noise, full scale 1
	Hum          float64 // peak of the fundamental, full scale 1; 0 none
	HumFrequency float64 // Hz
	Bits         int     // 16, 24 or 0 for no conversion
	Latency      float64 // s, from output to input; may be a fraction of a sample
	ClockOffset  float64 // relative: recording clock against playback clock, 10e-6 is 10 ppm fast
	Loopback     bool    // an electrical loopback channel is recorded too

	TapeErrors map[string]float64 // distance label → true minus nominal, m
	TapeError  float64            // standard deviation of further random tape errors, m
	Faults     []Fault

	Now func() time.Time // clock for Recording.Started; nil means time.Now
}

// Capsule is the true microphone.
type Capsule struct {
	Form             string  // phase-shift, summed
	Body             string  // sphere, open
	Rear             string  // delay, low-pass; phase-shift only
	GradientFraction float64 // β, 0 to 1
	GradientFrom     float64 // Hz, below which the gradient part fades, summed only; 0 none
	PortSpacing      float64 // plane-wave effective spacing d, m (3a for the sphere)
	Setback          float64 // grille to capsule centre, m
	Sensitivity      float64 // see the package comment; negative reverses polarity
	Resonance        float64 // Hz, second-order low-pass, 0 none
	ResonanceQ       float64 // its quality factor
	HighPass         float64 // Hz, first order, 0 none
}

// The values of Capsule.Form, Capsule.Body and Capsule.Rear.
const (
	PhaseShift = "phase-shift"
	Summed     = "summed"
	Sphere     = "sphere"
	Open       = "open"
	Delay      = "delay"
	LowPass    = "low-pass"
)

// Source is the true loudspeaker.
type Source struct {
	Radius   float64 // of the piston, m; 0 a point
	HighPass float64 // Hz, second-order Butterworth, 0 none
	RollOff  float64 // Hz, second-order Butterworth low-pass, 0 none
	Second   float64 // second harmonic at full scale, relative to the fundamental
	Third    float64 // the same, third
}

// Room is a shoebox.
type Room struct {
	Size       [3]float64 // m: length, width, height
	Reflection float64    // pressure reflection factor of all walls, 0 to <1
}

// Fault is something going wrong on purpose.
type Fault struct {
	Distance string  // label; "" is every distance
	Take     int     // number of the take, 0 is every one
	Kind     string  // one of the kinds below
	Amount   float64 // wrong-distance: metres added; gain: factor; else unused
}

// The kinds of faults.
const (
	Clip          = "clip"           // gain raised until the peak is twice full scale
	Dropout       = "dropout"        // 256 samples are nought in the middle of the sweep, on all channels
	Dead          = "dead"           // the microphone channel has only noise at −120 dBFS
	WrongDistance = "wrong-distance" // the microphone stands somewhere else
	Reversed      = "reversed"       // polarity
	Gain          = "gain"           // somebody touched the knob
)
