package bench

import "math/cmplx"

// output is the capsule's output for the pressures at its entries.
//
//	phase-shift  the rear pressure goes through the network and both meet at the
//	             diaphragm; a diaphragm whose motion is resistance-controlled gives
//	             out the difference over jω(d/c + τ), level for a far source
//	summed       (1−β)·centre + β·(front − rear)/(jkd): two elements, added
//
// with the network e^{−jωτ} (delay) or 1/(1+jωτ) (low-pass), cτ = d(1−β)/β. A
// summed capsule on a solid body has no pressure at its centre; its pressure
// element listens at both poles alike.
func (c Capsule) output(k, speed float64, front, rear, centre complex128) complex128 {
	beta, d := c.GradientFraction, c.PortSpacing
	if c.Form == Summed {
		return complex(1-beta, 0)*centre + complex(beta, 0)*(front-rear)/complex(0, k*d)
	}
	length := d * (1 - beta) / beta // c·τ
	network := cmplx.Rect(1, -k*length)
	if c.Rear == LowPass {
		network = 1 / complex(1, k*length)
	}
	return (front - rear*network) / complex(0, k*(d+length))
}

// reach is how far the capsule reaches from its centre towards the source, m.
func (c Capsule) reach() float64 {
	if c.Body == Sphere {
		return c.PortSpacing / 3
	}
	return c.PortSpacing / 2
}
