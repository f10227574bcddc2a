package fit

import (
	"math"
	"sync"
)

// Odd is a distance that does not belong to the others.
type Odd struct {
	Label    string
	Moved    bool    // its place explains it; else its gain does
	Sounds   float64 // where it seems to have been, grille to source, m
	SoundsSE float64
	Gain     float64 // by which it is louder than its place explains, a factor; negative: reversed
	likelier float64 // in −2 ln L, than that it is as the rig has it
}

// When a distance counts as odd.
const (
	oddTension  = 4.0   // standard uncertainties of the tape
	oddPlace    = 0.002 // m, and at least that far
	oddGain     = 0.1   // dB
	oddLikelier = 30.0  // in −2 ln L, for the hypothesis against none
)

// FindOdd looks for distances that do not belong: a stand that was moved, a tape
// misread, a gain that was touched. For each distance in turn the joint fit is made
// with its place free, and with its gain free, and held against the fit as the rig has
// it, by the likelihood with what is then left over. While an odd one is among them
// everything is left over alike, and freeing another one helps little. The clearest
// is taken, and the others are looked at again, up to a third of all.
//
// before gives model and start.
func FindOdd(d *Dataset, before *Analysis) ([]Odd, error) {
	var out []Odd
	work, start := d, before.Best()
	for len(out) < len(d.Points)/3 && len(work.Points) > 4 {
		odd, at, err := clearestOdd(work, start)
		if err != nil || odd == nil {
			return out, err
		}
		out = append(out, *odd)
		work = work.without(at)
	}
	return out, nil
}

func clearestOdd(d *Dataset, start *Joint) (*Odd, int, error) {
	guessed := *d
	guessed.Unexplained, guessed.Room = firstUnexplained, 0
	all, err := fitModel(&guessed, start.Model, start)
	if err != nil {
		return nil, 0, err
	}
	left := guessed.explainedBy(all)
	if all, err = fitModel(left, start.Model, all); err != nil {
		return nil, 0, err
	}
	if !all.suspicious() {
		return nil, 0, nil
	}
	asItIs := all.unlikely()
	tried := make([]*Odd, 2*len(d.Points))
	var wg sync.WaitGroup
	for i := range d.Points {
		wg.Go(func() { tried[2*i] = all.moved(i, asItIs) })
		wg.Go(func() { tried[2*i+1] = all.louder(i, asItIs) })
	}
	wg.Wait()
	var best *Odd
	at := 0
	for n, odd := range tried {
		if odd != nil && (best == nil || odd.likelier > best.likelier) {
			best, at = odd, n/2
		}
	}
	if best == nil || best.likelier < oddLikelier || !best.matters(d.Points[at]) {
		return nil, 0, nil
	}
	return best, at, nil
}

// matters reports whether an odd one is off by more than it may be.
func (o *Odd) matters(p Point) bool {
	if o.Moved {
		return math.Abs(o.Sounds-p.Nominal) > math.Max(oddTension*p.Tape, oddPlace)
	}
	return math.Abs(decibels(o.Gain)) > oddGain
}

// moved is the fit with the place of point i free.
func (j *Joint) moved(i int, asItIs float64) *Odd {
	d := *j.data
	d.Points = append([]Point(nil), d.Points...)
	d.Points[i].Tape = freePlace
	free, err := fitModel(&d, j.Model, j)
	if err != nil || !free.Status.Good() {
		return nil
	}
	return &Odd{Label: d.Points[i].Label, Moved: true, Sounds: free.Distances[i] - free.Setback, SoundsSE: free.DistanceSE[i],
		Gain: 1, likelier: asItIs - free.unlikely()}
}

// louder is the fit with the gain of point i free.
func (j *Joint) louder(i int, asItIs float64) *Odd {
	d := *j.data
	d.louder = i + 1
	p := newSeparable(&d, j.Model)
	r, err := solve(p, p.problem(), append(append([]float64(nil), j.x...), 1))
	if err != nil || !r.Status.Good() {
		return nil
	}
	free, err := summarise(&d, j.Model, r)
	if err != nil {
		return nil
	}
	gain := r.X[p.at.gain]
	return &Odd{Label: d.Points[i].Label, Sounds: d.Points[i].Nominal, Gain: gain, likelier: asItIs - free.unlikely()}
}

// freePlace is the uncertainty in m of a place that is not known.
const freePlace = 0.3

func square(x float64) float64 { return x * x }

// suspicious reports whether it is worth looking: something is left over, or a
// tape is stretched.
func (j *Joint) suspicious() bool {
	if j.data.Unexplained > 2*LeastUnexplained || j.data.Room > 0 {
		return true
	}
	for i, p := range j.data.Points {
		if math.Abs(j.Distances[i]-j.Setback-p.Nominal) > 0.7*oddTension*p.Tape {
			return true
		}
	}
	return false
}

// unlikely is −2 ln L of the data and of what is known of tapes, setback, radius and
// air, with the leftovers that fit best.
func (j *Joint) unlikely() float64 {
	r := j.residues()
	u, rho := leftovers(r)
	d := j.data
	sum := unlikely(r, u, rho)
	sum += square((j.Setback-d.Setback)/d.SetbackUncertainty) + square((j.Acoustics.Speed-d.Speed)/d.SpeedUncertainty)
	sum += square((j.Acoustics.Radius - d.Radius) / d.RadiusUncertainty)
	for i, p := range d.Points {
		sum += square((j.Distances[i] - j.Setback - p.Nominal) / p.Tape)
	}
	return sum
}
