package fit

import (
	"fmt"
	"math"
	"math/cmplx"
)

// Model is a form of capsule, body and source.
type Model struct {
	Form   string // Summed, PhaseShift
	Body   string // Open, Sphere
	Source string // PointSource, PistonSource
	Rear   string // of a phase-shift capsule: Delay ("" is that), LowPass
}

// The forms, bodies and sources.
const (
	Summed       = "summed"      // a pressure element and a gradient element, added
	PhaseShift   = "phase-shift" // one diaphragm with a delayed rear entry
	Open         = "open"        // two ports in free air
	Sphere       = "sphere"      // two ports at the poles of a rigid sphere
	PointSource  = "point"
	PistonSource = "piston"   // baffled, circular, moving as one
	Delay        = "delay"    // the way to the diaphragm's back delays
	LowPass      = "low-pass" // it is a first-order low-pass, of the same delay at low frequency
)

// Near reports whether two sets of values are the same to what matters next to the
// method's own uncertainty: the mix to 2e−5, the spacing to 5 µm.
func (a Acoustics) Near(b Acoustics) bool {
	return math.Abs(a.Beta-b.Beta) < 2e-5 && math.Abs(a.Spacing-b.Spacing) < 5e-6
}

func (m Model) String() string {
	body := " on a " + m.Body + " body"
	if m.Body == Open {
		body = " on an open body"
	}
	if m.Form == PhaseShift && m.Rear == LowPass {
		return m.Form + " with a low-pass" + body
	}
	return m.Form + body
}

// rear names the rear network, "" for a form that has none.
func (m Model) rear() string {
	switch {
	case m.Form != PhaseShift:
		return ""
	case m.Rear == "":
		return Delay
	}
	return m.Rear
}

func (m Model) validate() error {
	ok := (m.Form == Summed || m.Form == PhaseShift) && (m.Body == Open || m.Body == Sphere) &&
		(m.Source == PointSource || m.Source == PistonSource) &&
		(m.Rear == "" || m.Form == PhaseShift && (m.Rear == Delay || m.Rear == LowPass))
	if !ok {
		return fmt.Errorf("no such model: form %q, body %q, source %q, rear %q", m.Form, m.Body, m.Source, m.Rear)
	}
	return nil
}

// Acoustics are the values of a model's parameters.
type Acoustics struct {
	Beta    float64 // gradient fraction β
	Spacing float64 // d, plane-wave effective port spacing, m; 3a for the sphere
	Radius  float64 // b, of the source, m
	Speed   float64 // c, m/s
}

// Output is what the capsule gives out with its centre at r metres on the axis
// of the source, at f Hz, for a source that makes e^{−jkr}/r far away. With the
// pressures at the front and rear entry p₁, p₂ and the pressure p₀ where the
// pressure part is sensed:
//
//	summed       (1−β)·p₀ + β·(p₁ − p₂)/(jkd)
//	phase-shift  (p₁ − p₂·e^{−jωτ}) / (jω(d/c + τ)),  τ = (d/c)(1−β)/β
//
// A rear network that is a low-pass has 1/(1+jωτ) in place of e^{−jωτ}.
//
// The open body has its entries at r ∓ d/2 and p₀ at r. The sphere of radius
// a = d/3 has them at its poles; since a pressure element in such a body cannot
// sit at its centre, p₀ is the mean of both poles. Both normalise to 1·e^{−jkr}/r
// for a far source at low frequency. Source: H. F. Olson, Acoustical Engineering
// (1957), for the forms (from memory); see polePressures for the sphere.
func (m Model) Output(a Acoustics, r, f float64) complex128 {
	e := newEvaluator(m, a, []float64{f})
	return e.output(0, r)
}

// Far is the far-field form of Output: its limit for r → ∞ with e^{−jkr}/r
// taken out. Its magnitude is 1 at low frequency and has a null where f is
// about c/(d + cτ).
func (m Model) Far(a Acoustics, f float64) complex128 {
	k := 2 * math.Pi * f / a.Speed
	if m.Body == Open {
		half := k * a.Spacing / 2
		return m.mix(a, k, cmplx.Rect(1, half), cmplx.Rect(1, -half), 1)
	}
	front, rear := planeOnPoles(k, a.Spacing/3)
	return m.mix(a, k, front, rear, 0.5*(front+rear))
}

// mix joins the pressures to the capsule's output.
func (m Model) mix(a Acoustics, k float64, front, rear, centre complex128) complex128 {
	if m.Form == Summed {
		return complex(1-a.Beta, 0)*centre + complex(a.Beta, 0)*(front-rear)/complex(0, k*a.Spacing)
	}
	delay := a.Spacing * (1 - a.Beta) / a.Beta // c·τ
	network := cmplx.Rect(1, -k*delay)
	if m.Rear == LowPass {
		network = 1 / complex(1, k*delay)
	}
	return (front - rear*network) / complex(0, k*(a.Spacing+delay))
}

// Rise is the output at r relative to that for a far source which makes the
// same free-field pressure at the capsule's centre: the near-field response over
// the far-field response. Its magnitude for a point source and d → 0 is
// |1 + β/(jkr)|.
func (m Model) Rise(a Acoustics, r, f float64) complex128 {
	return m.Output(a, r, f) / (m.freeField(a, r, f) * m.Far(a, f))
}

// freeField is the source's own pressure at r.
func (m Model) freeField(a Acoustics, r, f float64) complex128 {
	k := 2 * math.Pi * f / a.Speed
	if m.Source == PistonSource {
		return pistonPressure(k, r, a.Radius)
	}
	return pointPressure(k, r)
}

// Travel is the time in s from the source to r: of a piston the mean over its
// middle and its rim, which is what its low-frequency phase says.
func (m Model) Travel(a Acoustics, r float64) float64 {
	if m.Source == PointSource {
		return r / a.Speed
	}
	return 0.5 * (r + math.Hypot(r, a.Radius)) / a.Speed
}

// RiseForGate is Rise as a function of frequency for making responses compact
// before they are gated: above HighestUse, where the rise means nothing, it stays
// as it is there.
func (m Model) RiseForGate(a Acoustics, r float64) func(f float64) complex128 {
	top := m.HighestUse(a)
	r = math.Max(r, m.nearestReach(a.Spacing)*1.001)
	return func(f float64) complex128 { return m.Rise(a, r, math.Min(f, top)) }
}

// HighestUse is the frequency in Hz up to which the rise means something: well
// below the far form's first null.
func (m Model) HighestUse(a Acoustics) float64 { return useShare * m.null(a) }

// null is the frequency in Hz at which the far form has its first null or comes
// near one, c/(d + cτ) for ports in free air with a delay. It is found where what
// comes in at the front and what comes in at the rear cancel: where their sum is,
// after its first maximum, less than deepEnough of the sum of their magnitudes. A
// rear network that is a low-pass takes away what could cancel; without a null up
// to the one that the ports alone would have, that one is taken.
func (m Model) null(a Acoustics) float64 {
	ports := a.Speed / a.Spacing
	if m.Form == Summed && m.Body == Open {
		return ports
	}
	length := a.Spacing
	if m.Form == PhaseShift {
		length /= a.Beta // d + cτ
	}
	step := 0.02 * a.Speed / length
	passed := false
	for f := 5 * step; f < ports; f += step {
		switch left := m.cancellation(a, f); {
		case left > 0.95:
			passed = true
		case passed && left < deepEnough:
			return f / nullShare
		}
	}
	return ports
}

// deepEnough is sin(0.75π), what the two entries of a delay leave of each other at
// three quarters of the way to the null.
const deepEnough = 0.7071

// cancellation is |sum|/(|front| + |rear|) of what the two entries contribute to
// the far form.
func (m Model) cancellation(a Acoustics, f float64) float64 {
	k := 2 * math.Pi * f / a.Speed
	front, rear := cmplx.Rect(1, k*a.Spacing/2), cmplx.Rect(1, -k*a.Spacing/2)
	if m.Body == Sphere {
		front, rear = planeOnPoles(k, a.Spacing/3)
	}
	one, other := m.mix(a, k, front, 0, 0.5*front), m.mix(a, k, 0, rear, 0.5*rear)
	return cmplx.Abs(one+other) / (cmplx.Abs(one) + cmplx.Abs(other))
}
