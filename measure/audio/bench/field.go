package bench

import (
	"context"
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/dsp/fourier"
)

// field is the spectrum of the pressure at each entry of the capsule, in bins from
// 0 to half the sample rate; centre is nil where it does not matter.
type field struct{ front, rear, centre []complex128 }

func (c Capsule) newField(bins int) field {
	f := field{make([]complex128, bins), make([]complex128, bins), nil}
	if c.hasCentre() {
		f.centre = make([]complex128, bins)
	}
	return f
}

// at is bin i.
func (f field) at(i int) entries {
	p := entries{front: f.front[i], rear: f.rear[i]}
	if f.centre != nil {
		p.centre = f.centre[i]
	}
	return p
}

func (f field) each(do func([]complex128)) {
	do(f.front)
	do(f.rear)
	if f.centre != nil {
		do(f.centre)
	}
}

// Points per octave for the loudspeaker itself, and for its images.
const fine, coarse = 48, 12

// addDirect adds what comes from the loudspeaker itself to a capsule whose centre
// is at r. step is the distance of the bins, Hz.
func (b *Bench) addDirect(to field, r, step float64) {
	c, speed := b.cfg.Capsule, b.cfg.SpeedOfSound
	if c.Body == Sphere {
		b.addDirectSphere(to, r, step)
		return
	}
	top := step * float64(len(to.front)-1)
	port := func(dst []complex128, x float64) {
		source := rings(b.cfg.Source.Radius, x, 2*math.Pi*top/speed)
		spread := (math.Hypot(x, b.cfg.Source.Radius) - x) / speed
		newGrid(fine, spread, top).sample(func(f float64) complex128 {
			k := 2 * math.Pi * f / speed
			return onAxis(source, k, x) * cmplx.Rect(1, k*x)
		}).addTo(dst, step, x/speed)
	}
	port(to.front, r-c.PortSpacing/2)
	port(to.rear, r+c.PortSpacing/2)
	if to.centre != nil {
		port(to.centre, r)
	}
}

func (b *Bench) addDirectSphere(to field, r, step float64) {
	a, speed := b.cfg.Capsule.radius(), b.cfg.SpeedOfSound
	top := step * float64(len(to.front)-1)
	// The nodes suit the front pole, which is nearest to the source.
	source := rings(b.cfg.Source.Radius, r-a, 2*math.Pi*top/speed)
	spread := (math.Hypot(r-a, b.cfg.Source.Radius) - (r - a) + a) / speed
	addPoles(to, newGrid(fine, spread, top), step, speed, travel(a, r, 0), travel(a, r, math.Pi),
		func(k float64) (front, rear complex128) {
			for _, s := range source {
				p, q := poles(k, a, r, s.radius)
				front += complex(s.weight, 0) * p
				rear += complex(s.weight, 0) * q
			}
			return front, rear
		})
}

// addPoles adds the pressures at both poles, computed on a grid without their
// travel in m.
func addPoles(to field, g grid, step, speed, toFront, toRear float64, pressures func(k float64) (front, rear complex128)) {
	front, rear := curve{g, make([]complex128, g.length)}, curve{g, make([]complex128, g.length)}
	for i := range front.v {
		k := 2 * math.Pi * g.frequency(float64(i)) / speed
		p, q := pressures(k)
		front.v[i], rear.v[i] = p*cmplx.Rect(1, k*toFront), q*cmplx.Rect(1, k*toRear)
	}
	front.addTo(to.front, step, toFront/speed)
	rear.addTo(to.rear, step, toRear/speed)
}

// travel is the way in m from a source at R to a place on a sphere of radius a at
// an angle θ from it: straight, or in the shadow along the tangent and then around.
func travel(a, R, theta float64) float64 {
	if horizon := math.Acos(a / R); theta > horizon {
		return math.Sqrt((R-a)*(R+a)) + a*(theta-horizon)
	}
	return math.Sqrt((R-a)*(R-a) + 2*a*R*(1-math.Cos(theta)))
}

// addRoom adds the images. Pressures (not yet gradients, which ring for long at low
// frequency) are over soon after the last image has arrived, so that a short
// transform carries them; fft is the long one of the bins.
func (b *Bench) addRoom(ctx context.Context, to field, r, rate float64, fft *fourier.FFT) error {
	images := b.images(r)
	if len(images) == 0 {
		return nil
	}
	var last float64
	for _, im := range images {
		last = math.Max(last, im.distance())
	}
	n := min(transformLength(int(last/b.cfg.SpeedOfSound*rate)+2*settling), fft.Len())
	room := b.cfg.Capsule.newField(n/2 + 1)
	for _, im := range images {
		if err := ctx.Err(); err != nil {
			return err
		}
		b.addImage(room, im, rate/float64(n))
	}
	short := fourier.NewFFT(n)
	var out [][]complex128
	room.each(func(bins []complex128) { out = append(out, lengthen(bins, short, fft)) })
	to.each(func(bins []complex128) {
		for i, v := range out[0] {
			bins[i] += v
		}
		out = out[1:]
	})
	return nil
}

// settling is what a band-limited response needs before and after, samples.
const settling = 2048

// lengthen puts silence after a short response: its last settling samples are what
// comes before time zero.
func lengthen(bins []complex128, short, long *fourier.FFT) []complex128 {
	bins[len(bins)-1] = complex(real(bins[len(bins)-1]), 0)
	x := inverse(short, bins)
	out := make([]float64, long.Len())
	before := min(settling, len(x)/2)
	copy(out, x[:len(x)-before])
	copy(out[len(out)-before:], x[len(x)-before:])
	return long.Coefficients(nil, out)
}

// addImage adds a mirror image, far enough to be a point.
func (b *Bench) addImage(to field, im image, step float64) {
	c, speed := b.cfg.Capsule, b.cfg.SpeedOfSound
	if a := c.radius(); a > 0 {
		R := im.distance()
		angle := math.Atan2(im.aside, im.along)
		top := step * float64(len(to.front)-1)
		addPoles(to, newGrid(coarse, a/speed, top), step, speed, travel(a, R, angle), travel(a, R, math.Pi-angle),
			func(k float64) (front, rear complex128) {
				front, rear = poles(k, a, im.along, im.aside)
				return complex(im.strength, 0) * front, complex(im.strength, 0) * rear
			})
		return
	}
	port := func(dst []complex128, ahead float64) {
		R := math.Hypot(im.along-ahead, im.aside)
		level := complex(im.strength/R, 0)
		delayed(len(dst), step, R/speed, func(i int, turn complex128) { dst[i] += level * turn })
	}
	port(to.front, c.PortSpacing/2)
	port(to.rear, -c.PortSpacing/2)
	if to.centre != nil {
		port(to.centre, 0)
	}
}
