package bench

import (
	"errors"
	"fmt"
	"maps"
	"math"
	"slices"
)

// validate joins everything that is impossible in a configuration.
func (c Config) validate() error {
	errs := []error{
		inRange("speed of sound", c.SpeedOfSound, 100, 2000),
		inRange("noise", c.Noise, 0, 1),
		inRange("hum", c.Hum, 0, 1),
		inRange("latency", c.Latency, 0, 10),
		inRange("clock offset", c.ClockOffset, -0.01, 0.01),
		inRange("tape error", c.TapeError, 0, 1),
		oneOf("bits", c.Bits, 0, 16, 24),
		c.Capsule.validate(),
		c.Source.validate(),
		c.Room.validate(),
	}
	if c.Hum > 0 {
		errs = append(errs, inRange("hum frequency", c.HumFrequency, 1, 1000))
	}
	for _, label := range slices.Sorted(maps.Keys(c.TapeErrors)) {
		errs = append(errs, inRange("tape error of "+label, c.TapeErrors[label], -1, 1))
	}
	for i, f := range c.Faults {
		if err := f.validate(); err != nil {
			errs = append(errs, fmt.Errorf("fault %d: %w", i+1, err))
		}
	}
	return errors.Join(errs...)
}

// leastPhaseShift is the least gradient fraction β of a phase-shift capsule: its
// rear path has the length d(1−β)/β, which then is 49 times the spacing.
const leastPhaseShift = 0.02

func (c Capsule) validate() error {
	errs := []error{
		oneOf("form", c.Form, PhaseShift, Summed),
		oneOf("body", c.Body, Sphere, Open),
		inRange("gradient fraction", c.GradientFraction, 0, 1),
		inRange("port spacing", c.PortSpacing, 1e-4, 0.5),
		inRange("setback", c.Setback, -0.5, 0.5),
		inRange("sensitivity", math.Abs(c.Sensitivity), 1e-9, 1e9),
		corner("frequency from which on the gradient is whole", c.GradientFrom),
		corner("resonance", c.Resonance),
		corner("high-pass of the capsule", c.HighPass),
	}
	if c.Form == PhaseShift {
		if c.GradientFrom != 0 {
			errs = append(errs, errors.New("a gradient that fades needs two elements; use the form summed"))
		}
		errs = append(errs, oneOf("rear", c.Rear, Delay, LowPass))
		if c.GradientFraction < leastPhaseShift {
			errs = append(errs, fmt.Errorf("gradient fraction %g is below %g, where no rear path is long enough for a phase-shift capsule; use the form summed", c.GradientFraction, leastPhaseShift))
		}
	}
	if c.Resonance > 0 {
		errs = append(errs, inRange("quality factor of the resonance", c.ResonanceQ, 0.05, 100))
	}
	return errors.Join(errs...)
}

func (s Source) validate() error {
	return errors.Join(
		inRange("source radius", s.Radius, 0, 1),
		corner("high-pass of the source", s.HighPass),
		corner("roll-off of the source", s.RollOff),
		inRange("second harmonic", s.Second, -0.3, 0.3),
		inRange("third harmonic", s.Third, -0.3, 0.3),
	)
}

func (r *Room) validate() error {
	if r == nil {
		return nil
	}
	errs := []error{inRange("reflection factor", r.Reflection, 0, 0.99)}
	for i, name := range []string{"length", "width", "height"} {
		errs = append(errs, inRange(name+" of the room", r.Size[i], 0.5, 100))
	}
	return errors.Join(errs...)
}

func (f Fault) validate() error {
	errs := []error{
		oneOf("kind", f.Kind, Clip, Dropout, Dead, WrongDistance, Reversed, Gain),
		inRange("take", float64(f.Take), 0, 1e6),
	}
	switch f.Kind {
	case WrongDistance:
		errs = append(errs, inRange("amount", f.Amount, -10, 10))
	case Gain:
		errs = append(errs, inRange("amount", math.Abs(f.Amount), 1e-9, 1e9))
	}
	return errors.Join(errs...)
}

// inRange refuses NaN as well: no comparison with it is true.
func inRange(name string, v, lo, hi float64) error {
	if v >= lo && v <= hi {
		return nil
	}
	return fmt.Errorf("%s %g is not within %g to %g", name, v, lo, hi)
}

// corner of a filter that may be left out.
func corner(name string, f float64) error {
	if f == 0 {
		return nil
	}
	return inRange(name, f, 0.1, 1e6)
}

func oneOf[T comparable](name string, v T, allowed ...T) error {
	if slices.Contains(allowed, v) {
		return nil
	}
	return fmt.Errorf("%s %v is not one of %v", name, v, allowed)
}
