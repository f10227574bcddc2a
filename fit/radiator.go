package fit

import (
	"fmt"
	"math"
)

// Radiator is what a pressure microphone says of the source.
type Radiator struct {
	Schema      string            `json:"schema"`
	Radius      Value             `json:"radius"` // effective, of a piston
	Centre      Value             `json:"centre"` // of its sound behind the reference plane, m; negative: before it
	Polarity    string            `json:"polarity"`
	Mix         Value             `json:"microphone_gradient_fraction"` // of the microphone, which should have none
	Unexplained float64           `json:"unexplained"`                  // by one piston, relative, standard
	OnePiston   bool              `json:"one_piston"`
	Octaves     []RadiatorOctave  `json:"octaves"`
	Fit         FitSummary        `json:"fit"`
	Distances   []RadiatorPlace   `json:"distances"`
	Warnings    []RadiatorWarning `json:"warnings"`

	joint *Joint
}

// RadiatorOctave is what one piston leaves over in an octave, relative, rms.
type RadiatorOctave struct {
	From        float64 `json:"from_hz"`
	To          float64 `json:"to_hz"`
	Unexplained float64 `json:"unexplained"`
}

// RadiatorPlace is what it leaves over at a distance.
type RadiatorPlace struct {
	Label       string  `json:"label"`
	Fitted      float64 `json:"fitted_m"`
	Unexplained float64 `json:"unexplained"`
}

// RadiatorWarning is why a person should look, with the cure.
type RadiatorWarning struct {
	Code string `json:"code"`
	Text string `json:"text"`
	Hint string `json:"hint,omitempty"`
}

// What is believed of a source beforehand: next to nothing.
const (
	anyRadius     = 0.05 // m, standard uncertainty of it, and the largest
	anyCentre     = 0.02
	widestRadius  = 0.3  // expanded, relative, of a radius that counts as resolved
	onePiston     = 0.01 // left over by what is still one piston
	leastMicTrust = 0.03 // a mix that a pressure microphone may seem to have
)

// FitRadiator fits a baffled piston to the responses of a pressure microphone: radius b
// and centre z of
//
//	Y_i(f) = S(f)·p(r_i + z + s + ε_i; b)·e^{−jωt_i} + noise,
//
// with p the pressure on the axis of a piston (see pistonPressure), s the setback of the
// microphone's diaphragm behind its grille, and S eliminated at each frequency. The
// dataset's Setback and its uncertainty are those of the microphone; its Radius is not
// used. A microphone whose mix is not that of a pressure microphone is an error.
//
// A solid body of the microphone is fitted along where the data speak for one; its
// pressure is then taken to be the mean of both poles.
//
// The centre's uncertainty contains the microphone's setback, since only their sum is
// seen; Radius hardly depends on it.
func FitRadiator(d *Dataset, claimedPolarity string) (*Radiator, error) {
	free := *d
	free.Radius, free.RadiusUncertainty = anyRadius/3, anyRadius
	free.SetbackUncertainty = anyCentre
	free.Unexplained = firstUnexplained
	mix, err := pressureMix(&free)
	if err != nil {
		return nil, err
	}
	free.pressure = true
	j, err := fitRadiator(&free)
	if err != nil {
		return nil, err
	}
	cut, why := free.byMisfit(j)
	if j, err = fitRadiator(cut.explainedBy(j)); err != nil {
		return nil, err
	}
	if j, err = fitRadiator(j.data.explainedBy(j)); err != nil {
		return nil, err
	}
	out := radiatorOf(j, d)
	out.Mix = mix
	out.Fit.BandReason = why
	out.Polarity = (&Analysis{Data: j.data, Candidates: []*Joint{j}}).Polarity(claimedPolarity)
	return out, nil
}

// pressureMix is the mix of the microphone, which is to be none.
func pressureMix(d *Dataset) (Value, error) {
	a, err := analyse(d, []Model{{Form: Summed, Body: Open, Source: PistonSource}}, "", nil)
	if err != nil {
		return unresolved("1"), err
	}
	left := a.Data.explainedBy(a.Best())
	j, err := fitModel(left, a.Best().Model, a.Best())
	if err != nil {
		return unresolved("1"), err
	}
	u := math.Hypot(j.BetaSE, d.MethodMix)
	if j.Acoustics.Beta-3*u > leastMicTrust {
		return unresolved("1"), fmt.Errorf("this microphone has a gradient part of %.2f ± %.2f (k = 2): a source is measured with a pressure microphone", j.Acoustics.Beta, Coverage*u)
	}
	return mixValue(j.Acoustics.Beta, standard(u)), nil
}

// fitRadiator fits a microphone in free air and one on a solid body, whose size it
// finds, and keeps what fits better: the body of even a small microphone disturbs the
// field of a near source by as much as the radius of the source does.
func fitRadiator(d *Dataset) (*Joint, error) {
	air, errAir := fitRadiatorOn(d, Open, []float64{smallestSpacing})
	solid, errSolid := fitRadiatorOn(d, Sphere, []float64{0.003, 0.009, 0.018, 0.03})
	switch {
	case errAir != nil && errSolid != nil:
		return nil, errAir
	case errAir != nil:
		return solid, nil
	case errSolid != nil || !solid.Status.Good():
		return air, nil
	}
	// One parameter more has to be worth it (Akaike), by what each leaves over.
	if air.unlikely()-solid.unlikely() > 2 {
		return solid, nil
	}
	return air, nil
}

// fitRadiatorOn fits from several radii, and sizes of the body, and keeps the best.
func fitRadiatorOn(d *Dataset, body string, sizes []float64) (*Joint, error) {
	m := Model{Form: Summed, Body: body, Source: PistonSource}
	p := newSeparable(d, m)
	var starts [][]float64
	for _, size := range sizes {
		for _, b := range []float64{0.004, 0.01, 0.018, 0.03, 0.05} {
			x := p.start(0, size)
			x[p.at.radius] = b
			p.settleDelays(x)
			starts = append(starts, x)
		}
	}
	best, err := solveFrom(p, starts)
	if err != nil {
		return nil, err
	}
	return summarise(d, m, best)
}

// radiatorOf says it.
func radiatorOf(j *Joint, told *Dataset) *Radiator {
	d := j.data
	out := &Radiator{Schema: "standoff/source/1", Unexplained: d.Unexplained, joint: j,
		Radius: unresolved("m"), Centre: unresolved("m")}
	centre := math.Hypot(j.SetbackSE, told.SetbackUncertainty)
	if j.SetbackSE > 0 && Coverage*centre < anyCentre {
		out.Centre = resolved(j.Setback-told.Setback, centre, "m")
	}
	u, b := math.Hypot(j.RadiusSE, radiusFloor*j.Acoustics.Radius), j.Acoustics.Radius
	if j.RadiusSE > 0 && (Coverage*u < widestRadius*b || Coverage*u < smallRadius) {
		out.Radius = resolved(b, u, "m")
	} else {
		out.Radius.UpperLimit = j.upperRadius()
	}
	out.Fit = FitSummary{From: d.Hz[0], To: d.Hz[len(d.Hz)-1], ReducedChiSquare: j.ReducedChiSquare(), Points: len(d.Hz) * len(d.Points),
		Unexplained: d.Unexplained, Room: d.Room, Alike: j.Alike, DegreesOfFreedom: j.Freedom, Status: j.Status.String(),
		SpeedOfSound: j.Acoustics.Speed, SpeedExpanded: Coverage * j.SpeedSE}
	out.describe()
	return out
}

// What the method adds to a radius, relative, and how well a small one has to be known.
const (
	radiusFloor = 0.01
	smallRadius = 0.002 // m, expanded
)

// upperRadius is the one-sided 95 % limit by the profile, nil without one.
func (j *Joint) upperRadius() *float64 {
	p := newSeparable(j.data, j.Model)
	lower, upper := p.bounds()
	wide := j.profile(p.at.radius, 0, lower[p.at.radius], math.Min(upper[p.at.radius], anyRadius))
	return wide.above(oneSided)
}

// Travel is the time in s from the source to the microphone at the dataset's point i.
func (r *Radiator) Travel(i int) float64 {
	return r.joint.Model.Travel(r.joint.Acoustics, r.joint.Distances[i]) + r.joint.Delays[i]
}

// describe says what one piston leaves over, where, and whether that is one piston.
func (r *Radiator) describe() {
	d, all := r.joint.data, r.joint.residues()
	n := len(d.Hz)
	rms := func(keep func(i, k int) bool) float64 {
		var sum, count float64
		for i := range d.Points {
			for k := range n {
				if x := all[i*n+k]; keep(i, k) {
					sum += math.Max(x.square-x.noise, 0) / math.Max(x.response, 1e-300)
					count++
				}
			}
		}
		return math.Sqrt(sum / math.Max(count, 1))
	}
	for _, centre := range octaveCentres {
		from, to := centre/math.Sqrt2, centre*math.Sqrt2
		in := func(_, k int) bool { return d.Hz[k] >= from && d.Hz[k] < to }
		if part := d.between(from, to); len(part.Hz) > 0 {
			r.Octaves = append(r.Octaves, RadiatorOctave{from, to, rms(in)})
		}
	}
	for i, p := range d.Points {
		r.Distances = append(r.Distances, RadiatorPlace{p.Label, r.joint.Distances[i] - r.joint.Setback, rms(func(k, _ int) bool { return k == i })})
	}
	r.OnePiston = d.Unexplained < onePiston && r.Radius.Resolved
	r.warn()
}

func (r *Radiator) warn() {
	r.Warnings = []RadiatorWarning{}
	if !r.Radius.Resolved {
		text := "the data do not hold the radius"
		if u := r.Radius.UpperLimit; u != nil {
			text += fmt.Sprintf("; it is below %.0f mm (95 %%, one-sided)", math.Ceil(*u*1e3))
		}
		r.Warnings = append(r.Warnings, RadiatorWarning{"radius-not-resolved", text, "measure nearer to the source: the nearest distance should be about twice its radius"})
	}
	if !r.Centre.Resolved {
		r.Warnings = append(r.Warnings, RadiatorWarning{"centre-not-resolved", "the data do not hold the acoustic centre", "measure nearer to the source, and say the microphone's setback"})
	}
	if x := r.Unexplained; x >= onePiston {
		r.Warnings = append(r.Warnings, RadiatorWarning{"not-one-piston", fmt.Sprintf("one piston leaves %.1f %% over: it does not describe this source", 100*x),
			"several drivers, a horn or the edges of a cabinet; use a single small driver, or measure on its axis"})
	}
}
