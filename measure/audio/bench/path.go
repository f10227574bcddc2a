package bench

import (
	"fmt"
	"math"
	"math/cmplx"
)

// referenceDistance is where a far response of 1 comes back at its own level.
const referenceDistance = 0.03

// path is the transfer function from excitation to preamplifier for the capsule's
// centre at r, on bins 0 to n/2.
func (b *Bench) path(r float64, rate, n int) ([]complex128, error) {
	key := pathKey{r, rate, n}
	b.mu.Lock()
	h, ok := b.paths[key]
	b.mu.Unlock()
	if ok {
		return h, nil
	}
	if err := b.fits(r); err != nil {
		return nil, err
	}
	h = b.compute(r, rate, n)
	b.mu.Lock()
	defer b.mu.Unlock()
	if len(b.order) >= pathsKept {
		delete(b.paths, b.order[0])
		b.order = b.order[1:]
	}
	b.paths[key] = h
	b.order = append(b.order, key)
	return h, nil
}

// fits refuses places at which the capsule would stand in the loudspeaker or in a
// wall.
func (b *Bench) fits(r float64) error {
	front := b.cfg.Capsule.reach()
	if r <= 1.05*front {
		return fmt.Errorf("virtual bench: with its centre at %.1f mm the capsule stands in the loudspeaker", 1e3*r)
	}
	if room := b.cfg.Room; room != nil && !room.holds(r) {
		return fmt.Errorf("virtual bench: %.2f m do not fit into the room", r)
	}
	return nil
}

func (b *Bench) compute(r float64, rate, n int) []complex128 {
	step := float64(rate) / float64(n) // Hz
	top := float64(rate) / 2
	h := make([]complex128, n/2+1)
	direct := newCurve(top, func(f float64) complex128 { return b.direct(r, f, top) })
	octave := octaves(len(h), step)
	direct.addTo(h, octave, step, r/b.cfg.SpeedOfSound)
	for _, im := range b.images(r) {
		c := newCoarseCurve(top, func(f float64) complex128 { return b.reflected(im, f) })
		c.addTo(h, octave, step, im.distance/b.cfg.SpeedOfSound)
	}
	for i := range h {
		f := float64(i) * step
		h[i] *= b.electric(f)
	}
	h[0] = 0
	if n%2 == 0 {
		h[n/2] = complex(real(h[n/2]), 0)
	}
	return h
}

// direct is what the capsule makes of the loudspeaker itself, with the travel to
// its centre taken out so that it is a slow function of frequency.
func (b *Bench) direct(r, f, top float64) complex128 {
	k := 2 * math.Pi * f / b.cfg.SpeedOfSound
	source := rings(b.cfg.Source.Radius, r, 2*math.Pi*top/b.cfg.SpeedOfSound)
	c := b.cfg.Capsule
	var front, rear, centre complex128
	if c.Body == Open {
		half := c.PortSpacing / 2
		front, rear, centre = onAxis(source, k, r-half), onAxis(source, k, r+half), onAxis(source, k, r)
	} else {
		for _, s := range source {
			p, q := poles(k, c.PortSpacing/3, r, s.radius)
			front += complex(s.weight, 0) * p
			rear += complex(s.weight, 0) * q
		}
		centre = 0.5 * (front + rear)
	}
	return referenceDistance * c.output(k, b.cfg.SpeedOfSound, front, rear, centre) * cmplx.Rect(1, k*r)
}

// reflected is the same for a mirror image, far enough to be a point.
func (b *Bench) reflected(im image, f float64) complex128 {
	k := 2 * math.Pi * f / b.cfg.SpeedOfSound
	c := b.cfg.Capsule
	along, aside := im.distance*im.cos, im.distance*math.Sqrt(1-im.cos*im.cos)
	var front, rear, centre complex128
	if c.Body == Open {
		half := c.PortSpacing / 2
		front, rear = monopole(k, math.Hypot(along-half, aside)), monopole(k, math.Hypot(along+half, aside))
		centre = monopole(k, im.distance)
	} else {
		front, rear = poles(k, c.PortSpacing/3, along, aside)
		centre = 0.5 * (front + rear)
	}
	out := c.output(k, b.cfg.SpeedOfSound, front, rear, centre)
	return complex(referenceDistance*im.strength, 0) * out * cmplx.Rect(1, k*im.distance)
}

// electric is everything that is the same at every distance.
func (b *Bench) electric(f float64) complex128 {
	c, s := b.cfg.Capsule, b.cfg.Source
	h := complex(c.Sensitivity, 0) * cmplx.Rect(1, -2*math.Pi*f*b.cfg.Latency)
	h *= butterworthHigh(f, s.HighPass) * butterworthLow(f, s.RollOff)
	return h * resonance(f, c.Resonance, c.ResonanceQ) * firstHigh(f, c.HighPass)
}

// Second-order Butterworth high-pass and low-pass at the corner f0; 0 is none.
func butterworthHigh(f, f0 float64) complex128 {
	if f0 == 0 {
		return 1
	}
	s := complex(0, f/f0)
	return s * s / (s*s + math.Sqrt2*s + 1)
}

func butterworthLow(f, f0 float64) complex128 {
	if f0 == 0 {
		return 1
	}
	s := complex(0, f/f0)
	return 1 / (s*s + math.Sqrt2*s + 1)
}

// resonance is a second-order low-pass of quality q.
func resonance(f, f0, q float64) complex128 {
	if f0 == 0 {
		return 1
	}
	s := complex(0, f/f0)
	return 1 / (s*s + s/complex(q, 0) + 1)
}

func firstHigh(f, f0 float64) complex128 {
	if f0 == 0 {
		return 1
	}
	s := complex(0, f/f0)
	return s / (s + 1)
}
