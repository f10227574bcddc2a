package fit

import "math"

// nodesFor is the number of rings for a piston of radius b whose plane is gap away
// from the front of a sphere. What they leave is below 1e−6 of the difference between
// the poles, up to 10 kHz, or where the gap is less than half a radius below 1e−5.
func nodesFor(gap, b float64) int {
	switch {
	case gap < 1.2*b:
		return 12
	case gap < 2*b:
		return 6
	case gap < 3*b:
		return 4
	case gap < 9*b:
		return 3
	}
	return 2
}

// mostNodes is the largest of them.
const mostNodes = 12

// evaluator computes a model's output for one set of parameters on a frequency
// grid, and keeps what does not depend on the distance.
type evaluator struct {
	model  Model
	a      Acoustics
	k      []float64
	rings  [mostNodes + 1][]monopoleRing // by their number
	series []*sphereSeries
}

func newEvaluator(m Model, a Acoustics, hz []float64) *evaluator {
	e := newMixer(m, a, hz)
	if m.Body == Sphere {
		for _, n := range []int{2, 3, 4, 6, 12} {
			e.rings[n] = ringsOf(e.a.Radius, n)
		}
		e.series = make([]*sphereSeries, len(hz))
		for j, k := range e.k {
			e.series[j] = newSphereSeries(k, a.Spacing/3)
		}
	}
	return e
}

// newMixer is an evaluator that can do nothing but mix.
func newMixer(m Model, a Acoustics, hz []float64) *evaluator {
	e := &evaluator{model: m, a: a, k: make([]float64, len(hz))}
	if m.Source == PointSource {
		e.a.Radius = 0
	}
	for j, f := range hz {
		e.k[j] = 2 * math.Pi * f / a.Speed
	}
	return e
}

// entries are the pressures that a capsule senses.
type entries struct{ front, rear, centre complex128 }

// output at frequency j and distance r.
func (e *evaluator) output(j int, r float64) complex128 {
	return e.mix(j, e.entries(j, r, nodesFor(r-e.a.Spacing/3, e.a.Radius)))
}

// mix joins them.
func (e *evaluator) mix(j int, p entries) complex128 {
	return e.model.mix(e.a, e.k[j], p.front, p.rear, p.centre)
}

// entries at frequency j and distance r, the piston before a sphere being nodes
// rings.
func (e *evaluator) entries(j int, r float64, nodes int) entries {
	k := e.k[j]
	if e.model.Body == Open {
		half := e.a.Spacing / 2
		p := entries{front: pistonPressure(k, r-half, e.a.Radius), rear: pistonPressure(k, r+half, e.a.Radius)}
		if e.model.Form == Summed {
			p.centre = pistonPressure(k, r, e.a.Radius)
		}
		return p
	}
	var p entries
	for _, ring := range e.rings[nodes] {
		front, rear := e.series[j].polePressures(r, ring.radius)
		p.front += scaled(front, ring.weight)
		p.rear += scaled(rear, ring.weight)
	}
	p.centre = 0.5 * (p.front + p.rear)
	return p
}

// nearestReach is the least distance of a capsule's centre in units of d at
// which a model makes sense: its front entry stays clear of the source.
func (m Model) nearestReach(d float64) float64 {
	if m.Body == Sphere {
		return 1.25 * d / 3
	}
	return 0.55 * d
}
