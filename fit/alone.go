package fit

import (
	"math"
	"math/cmplx"

	"standoff/fit/lsq"
)

// lone is the fit of one response by itself, with the far response S settled by
// the other distances: mix, spacing, the place, and with a free clock the delay.
type lone struct {
	point    Point
	hz       []float64
	others   *Joint
	sigma    []float64
	place    float64 // expected distance, m
	placeSE  float64
	fixed    float64 // spacing held at this; 0 free
	freeTime bool
}

// alone fits point i given what all others settle. It returns values that are
// not resolved when fewer than three distances are there.
func (a *Analysis) alone(i int) Alone {
	nothing := NotAlone()
	if len(a.Data.Points) < 3 {
		return nothing
	}
	best := a.Best()
	others, err := best.refit(a.Data.without(i))
	if err != nil {
		return nothing
	}
	l := newLone(a.Data, i, others)
	l.point = a.Data.steadied(i, best, others)
	free, ok := l.solve(best.Acoustics)
	if !ok {
		return nothing
	}
	method := a.Data
	out := Alone{PortSpacing: spacingValue(free.spacing, standard(math.Hypot(free.spacingSE, method.MethodSpacing*free.spacing)),
		free.beta-Coverage*free.betaSE, free.atBound)}
	if !out.PortSpacing.Resolved {
		l.fixed = best.Acoustics.Spacing
		if free, ok = l.solve(best.Acoustics); !ok {
			return nothing
		}
	}
	out.GradientFraction = mixValue(free.beta, standard(math.Hypot(free.betaSE, method.MethodMix)))
	return out
}

// refit solves the same model on another dataset, from this solution.
func (j *Joint) refit(d *Dataset) (*Joint, error) {
	p := newSeparable(d, j.Model)
	x := p.start(j.Acoustics.Beta, j.Acoustics.Spacing)
	p.settleDelays(x)
	r, err := solve(p, p.problem(), x)
	if err != nil {
		return nil, err
	}
	return summarise(d, j.Model, r)
}

func newLone(d *Dataset, i int, others *Joint) *lone {
	l := &lone{point: d.Points[i], hz: d.Hz, others: others, freeTime: d.FreeClock}
	l.place = l.point.Nominal + others.Setback
	l.placeSE = math.Hypot(l.point.Tape, others.SetbackSE)
	inflate := math.Max(others.ReducedChiSquare(), 1)
	e := newEvaluator(others.Model, others.Acoustics, d.Hz)
	for j := range d.Hz {
		h := cmplx.Abs(e.output(j, l.place))
		l.sigma = append(l.sigma, math.Sqrt((inflate*d.variance(i, j)+h*h*others.farVariance[j])/2))
	}
	return l
}

func (l *lone) residuals(dst, x []float64) {
	m := l.others.Model
	ac := l.others.Acoustics
	ac.Beta, ac.Spacing = x[0], x[1]
	e := newEvaluator(m, ac, l.hz)
	r := math.Max(l.place+x[2], m.nearestReach(ac.Spacing)*1.001)
	for j, f := range l.hz {
		v := l.point.Value[j] - e.output(j, r)*l.others.far[j]*cmplx.Rect(1, -2*math.Pi*f*x[3])
		dst[2*j], dst[2*j+1] = real(v)/l.sigma[j], imag(v)/l.sigma[j]
	}
	dst[2*len(l.hz)] = x[2] / l.placeSE
}

type loneFit struct {
	beta, betaSE, spacing, spacingSE float64
	atBound                          bool
}

func (l *lone) solve(from Acoustics) (loneFit, bool) {
	m := l.others.Model
	lower := []float64{lowestSummed, smallestSpacing, math.Inf(-1), math.Inf(-1)}
	upper := []float64{highestMix, math.Max(0.95*l.place/m.nearestReach(1), 2*smallestSpacing), math.Inf(1), math.Inf(1)}
	upper[1] = math.Min(upper[1], largestSpacing)
	if m.Form == PhaseShift {
		lower[0] = lowestPhaseShift
	}
	spacing := math.Min(from.Spacing, upper[1])
	x := []float64{math.Max(from.Beta, lower[0]), spacing, 0, 0}
	if l.fixed > 0 {
		lower[1], upper[1] = spacing, spacing
	}
	if !l.freeTime {
		lower[3], upper[3] = 0, 0
	} else {
		x[3] = l.delay(x)
	}
	problem := lsq.Problem{Residuals: l.residuals, M: 2*len(l.hz) + 1, Lower: lower, Upper: upper}
	r, err := lsq.Solve(problem, x, lsq.Settings{MaxIterations: 40, FTol: 1e-8, XTol: 1e-7, Scale: []float64{0.1, 0.01, l.placeSE, 1e-5}})
	if err != nil || r.Covariance == nil {
		return loneFit{}, false
	}
	se := r.StandardErrors(math.Max(r.ReducedChiSquare(2*len(l.hz)-2), 1))
	return loneFit{r.X[0], se[0], r.X[1], se[1], l.fixed == 0 && r.AtBound[1] != 0}, r.AtBound[0] == 0
}

// delay lines the response up with the model.
func (l *lone) delay(x []float64) float64 {
	ac := l.others.Acoustics
	ac.Beta, ac.Spacing = x[0], x[1]
	e := newEvaluator(l.others.Model, ac, l.hz)
	z := make([]complex128, len(l.hz))
	for j := range z {
		z[j] = l.point.Value[j] * cmplx.Conj(e.output(j, l.place)*l.others.far[j])
	}
	return phaseSlope(z, l.hz)
}

// NotAlone is for a response that was not fitted by itself.
func NotAlone() Alone {
	return Alone{GradientFraction: unresolved("1"), PortSpacing: unresolved("m")}
}
