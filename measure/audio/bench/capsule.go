package bench

import "math/cmplx"

// entries are the pressures that a capsule senses, or their spectra's values in
// one bin: at its front and rear port and at its centre.
type entries struct{ front, rear, centre complex128 }

// output is the capsule's output at f for the pressures at its entries, k = 2πf/c.
//
//	phase-shift  the rear pressure goes through the network and both meet at the
//	             diaphragm; a diaphragm whose motion is resistance-controlled gives
//	             out the difference over jω(d/c + τ), level for a far source
//	summed       (1−β)·centre + β·(front − rear)/(jkd): two elements, added
//
// with the network e^{−jωτ} (delay) or 1/(1+jωτ) (low-pass), cτ = d(1−β)/β. A
// summed capsule on a solid body has no pressure at its centre; its pressure
// element listens at both poles alike. Its β may be that of fading.
func (c Capsule) output(f, k float64, p entries) complex128 {
	d := c.PortSpacing
	if c.Form == Summed {
		if c.Body == Sphere {
			p.centre = 0.5 * (p.front + p.rear)
		}
		beta := c.fading(f)
		return (1-beta)*p.centre + beta*(p.front-p.rear)/complex(0, k*d)
	}
	length := c.rearLength()
	network := cmplx.Rect(1, -k*length)
	if c.Rear == LowPass {
		network = 1 / complex(1, k*length)
	}
	return (p.front - p.rear*network) / complex(0, k*(d+length))
}

// fading is the gradient fraction at f: β·f²/(f₀²+f²) where GradientFrom f₀ is given,
// as if two elements were joined by a network of linear phase that hands over to the
// pressure element below it.
func (c Capsule) fading(f float64) complex128 {
	if c.GradientFrom == 0 {
		return complex(c.GradientFraction, 0)
	}
	return complex(c.GradientFraction*f*f/(c.GradientFrom*c.GradientFrom+f*f), 0)
}

// rearLength is cτ of the rear network, m.
func (c Capsule) rearLength() float64 {
	return c.PortSpacing * (1 - c.GradientFraction) / c.GradientFraction
}

// hasCentre reports whether the pressure at the centre matters.
func (c Capsule) hasCentre() bool { return c.Form == Summed && c.Body == Open }

// radius of the body, of which d = 3a is the effective spacing, m; 0 when open.
func (c Capsule) radius() float64 {
	if c.Body == Sphere {
		return c.PortSpacing / 3
	}
	return 0
}

// reach is how far the capsule reaches from its centre towards the source, m.
func (c Capsule) reach() float64 {
	if c.Body == Sphere {
		return c.radius()
	}
	return c.PortSpacing / 2
}
