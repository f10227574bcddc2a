package fit

import (
	"errors"
	"fmt"
	"math"
)

// Dataset is what the fit works on: complex responses of one capsule on one
// frequency grid at several distances, and what is known beforehand. Values are
// in SI units, uncertainties standard ones.
type Dataset struct {
	Hz     []float64
	Points []Point

	Setback, SetbackUncertainty float64 // δ, m
	Radius, RadiusUncertainty   float64 // b, m
	Speed, SpeedUncertainty     float64 // c, m/s
	FreeClock                   bool    // every response has a delay of its own
	SweepRate                   float64 // L of the sweep in s, where Point.Clock counts

	// What a response differs from any first-order model besides its noise.
	// Unexplained is relative to its magnitude: small movements, the capsule's own
	// deviations. Room is the same at all distances, as reflections are: relative to
	// what the far response would be at 1 m, in 1/m. Both are standard, both
	// quadratures together. Analyse estimates them.
	Unexplained, Room float64

	// What the method itself is right to where nothing else is left to doubt, as
	// standard uncertainties: of the mix, and of the spacing relative to it.
	MethodMix, MethodSpacing float64

	level []float64 // |S·Far| on Hz, for Room; nil is none
	// pressure holds the mix at 0: of a microphone without a gradient part, whose spacing
	// is no more than the size of a solid body, and nothing without one.
	pressure bool

	louder  int     // 1 + the point whose gain is free; 0 is none
	inflate float64 // of all variances; 0 is 1
}

// Point is one distance.
type Point struct {
	Label    string
	Nominal  float64      // grille to source, m
	Tape     float64      // standard uncertainty of Nominal, m
	Value    []complex128 // on Hz
	Variance []float64    // E|error|² of Value: noise
	Clock    float64      // standard uncertainty of what is left of its clock's offset, relative; 0 none
}

// Validate reports why a dataset cannot be fitted.
func (d *Dataset) Validate() error {
	if len(d.Points) < 2 {
		return errors.New("a fit needs at least two distances")
	}
	if len(d.Hz) < 4 {
		return errors.New("a fit needs at least four frequencies: widen the band or lengthen the gate")
	}
	for _, p := range d.Points {
		if len(p.Value) != len(d.Hz) || len(p.Variance) != len(d.Hz) {
			return fmt.Errorf("%s: response and frequencies differ in number", p.Label)
		}
		for j, v := range p.Value {
			s := math.Abs(real(v)) + math.Abs(imag(v)) + p.Variance[j]
			if math.IsNaN(s) || math.IsInf(s, 0) || p.Variance[j] < 0 {
				return fmt.Errorf("%s: the response at %.0f Hz is no usable number", p.Label, d.Hz[j])
			}
		}
		if p.Nominal+d.Setback <= 0 {
			return fmt.Errorf("%s: the capsule would be inside the source", p.Label)
		}
	}
	return nil
}

func (d *Dataset) nearest() float64 {
	r := math.Inf(1)
	for _, p := range d.Points {
		r = math.Min(r, p.Nominal+d.Setback)
	}
	return r
}

// without is the dataset without point i.
func (d *Dataset) without(i int) *Dataset {
	out := *d
	out.Points = append(append([]Point(nil), d.Points[:i]...), d.Points[i+1:]...)
	return &out
}

// variance is E|error|² of point i at frequency j, everything together.
func (d *Dataset) variance(i, j int) float64 {
	return math.Max(d.inflate, 1) * (d.Points[i].Variance[j] + d.leftover(i, j) + d.room(j))
}

// Variances are E|error|² of point i on Hz, everything together: noise, what is left
// over, and the room.
func (d *Dataset) Variances(i int) []float64 {
	out := make([]float64, len(d.Hz))
	for j := range out {
		out[j] = d.variance(i, j)
	}
	return out
}

// leftover is the part of it that is relative to the response.
func (d *Dataset) leftover(i, j int) float64 {
	y := d.Points[i].Value[j]
	// A recording with digital silence has no noise at all; rounding it has.
	const rounding = 1e-12
	return (d.Unexplained*d.Unexplained + rounding) * (real(y)*real(y) + imag(y)*imag(y))
}

// room is the part that is alike at all distances.
func (d *Dataset) room(j int) float64 {
	if d.level == nil {
		return 0
	}
	return d.Room * d.Room * d.level[j] * d.level[j]
}

// scaledBy multiplies all variances, for a misfit that they do not explain.
func (d *Dataset) scaledBy(factor float64) *Dataset {
	out := *d
	out.inflate = math.Max(d.inflate, 1) * factor
	return &out
}
