package lsq

import "math"

// search tries steps from x, ever shorter, until one is accepted; it returns
// NotRun when the iteration should go on from there.
func (s *solver) search(free []int) Status {
	t := reduce(s.scaled(free), s.r)
	s.beyond = false
	for {
		if s.iterations >= s.set.MaxIterations {
			return MaxIterations
		}
		s.iterations++
		step := s.propose(t, free)
		accepted, status := s.try(step)
		if accepted || status != NotRun {
			return status
		}
		if s.collapsed() {
			return s.verdict(free)
		}
	}
}

// verdict says what it means that no step from x is accepted. Comparing costs
// finds a minimum only to the root of their rounding error: a gradient as
// small as that is zero.
func (s *solver) verdict(free []int) Status {
	switch {
	case s.beyond:
		return NotFinite
	case s.stationary(free, 10*math.Sqrt(epsilon)):
		return ConvergedG
	}
	return Stalled
}

// try evaluates a step and moves to it when it brings enough of what was
// predicted; status is NotRun unless the step shows that the iteration is over.
func (s *solver) try(st step) (accepted bool, status Status) {
	trial := make([]float64, s.p.M)
	cost, ok := s.evaluate(trial, st.x)
	if !ok {
		s.beyond = true
		s.shrink(0.25, st.length)
		return false, NotRun
	}
	actual := s.decrease(trial)
	ratio := 0.0
	if st.predicted > 0 {
		ratio = actual / st.predicted
	}
	s.adapt(st, actual, ratio)
	accepted = ratio >= 1e-4
	status = s.judge(st, accepted, actual)
	if accepted || (status.Good() && actual >= 0) {
		s.move(st.x, trial, cost)
	}
	return accepted, status
}

// decrease returns ½‖r‖² − ½‖trial‖² without the cancellation of subtracting
// the sums.
func (s *solver) decrease(trial []float64) float64 {
	sum := 0.0
	for i, v := range trial {
		sum += (s.r[i] - v) * (s.r[i] + v)
	}
	return sum / 2
}

func (s *solver) move(x, r []float64, cost float64) {
	s.x, s.r, s.cost = x, r, cost
	s.fresh, s.first = false, false
}

// adapt sets the trust radius by the gain ratio (Moré 1977, section 4).
func (s *solver) adapt(st step, actual, ratio float64) {
	if s.first {
		s.radius = math.Min(s.radius, math.Max(st.length, math.SmallestNonzeroFloat64))
	}
	switch {
	case ratio <= 0.25:
		s.shrink(interpolate(st.slope, actual), st.length)
	case st.full || ratio >= 0.75:
		s.radius = 2 * st.length
		s.root /= math.Sqrt2
	}
}

// interpolate returns where along the step, between a tenth and a half, the
// parabola through the slope at its start and the cost at its end is lowest.
func interpolate(slope, actual float64) float64 {
	if actual >= 0 || !(slope < 0) {
		return 0.5
	}
	return math.Min(0.5, math.Max(0.1, slope/(2*(slope+actual))))
}

func (s *solver) shrink(factor, length float64) {
	s.radius *= factor
	if length > 0 {
		s.radius = math.Min(s.radius, 10*factor*length)
	}
	s.root /= math.Sqrt(factor)
}

// judge applies the tests of convergence to a step. They ask what the full
// Gauss–Newton step would do, so that a step which the radius merely made
// short does not pass for convergence. A step that fails is the end too when
// what it promised and what it brought are rounding error.
func (s *solver) judge(st step, accepted bool, actual float64) Status {
	switch {
	case st.potential <= s.set.FTol*s.cost,
		!accepted && st.potential+math.Abs(actual) <= s.rounding():
		return ConvergedF
	case st.full && s.unchanged(st.x):
		return ConvergedX
	}
	return NotRun
}

// rounding estimates the rounding error of the cost. A residual is as a rule
// the difference of two larger numbers, whose size is about that of the
// change in r when the parameters go to zero, ‖J x‖ ~ √Σ(‖Jⱼ‖xⱼ)².
func (s *solver) rounding() float64 {
	sum := 0.0
	for j, v := range s.x {
		sum = math.Hypot(sum, s.norm[j]*v)
	}
	return 10 * epsilon * norm(s.r) * sum
}

// unchanged reports whether x is the same as now to within XTol, each
// parameter relative to its size; a parameter that goes to zero relative to a
// millionth of the ground that x had to cover from its start.
func (s *solver) unchanged(x []float64) bool {
	for j, v := range x {
		size := math.Abs(v)
		if s.set.Scale != nil {
			size = math.Max(size, s.size[j])
		}
		ground := math.Max(s.scale[j]*size, 1e-6*s.extent)
		if s.scale[j]*math.Abs(v-s.x[j]) > s.set.XTol*ground {
			return false
		}
	}
	return true
}

// collapsed reports whether the radius is too short to move x.
func (s *solver) collapsed() bool {
	return s.radius <= epsilon*math.Max(s.length(s.x), 1e-6*s.extent)
}
