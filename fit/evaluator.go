package fit

import "math"

// nodesOfPiston is the number of rings for a piston in front of a sphere: with
// five the pressure at 25 mm of a 20 mm piston is right to 1e−6 at 10 kHz.
const nodesOfPiston = 6

// evaluator computes a model's output for one set of parameters on a frequency
// grid, and keeps what does not depend on the distance.
type evaluator struct {
	model  Model
	a      Acoustics
	k      []float64
	rings  []monopoleRing
	series []*sphereSeries
}

func newEvaluator(m Model, a Acoustics, hz []float64) *evaluator {
	e := &evaluator{model: m, a: a, k: make([]float64, len(hz))}
	if m.Source == PointSource {
		e.a.Radius = 0
	}
	for j, f := range hz {
		e.k[j] = 2 * math.Pi * f / a.Speed
	}
	if m.Body == Sphere {
		e.rings = ringsOf(e.a.Radius, nodesOfPiston)
		e.series = make([]*sphereSeries, len(hz))
		for j, k := range e.k {
			e.series[j] = newSphereSeries(k, a.Spacing/3)
		}
	}
	return e
}

// output at frequency j and distance r.
func (e *evaluator) output(j int, r float64) complex128 {
	k := e.k[j]
	if e.model.Body == Open {
		half := e.a.Spacing / 2
		return e.model.mix(e.a, k, pistonPressure(k, r-half, e.a.Radius), pistonPressure(k, r+half, e.a.Radius),
			pistonPressure(k, r, e.a.Radius))
	}
	var front, rear complex128
	for _, ring := range e.rings {
		f, b := e.series[j].polePressures(r, ring.radius)
		front += scaled(f, ring.weight)
		rear += scaled(b, ring.weight)
	}
	return e.model.mix(e.a, k, front, rear, 0.5*(front+rear))
}

// nearestReach is the least distance of a capsule's centre in units of d at
// which a model makes sense: its front entry stays clear of the source.
func (m Model) nearestReach(d float64) float64 {
	if m.Body == Sphere {
		return 1.25 * d / 3
	}
	return 0.55 * d
}
