package fit

import (
	"fmt"
	"math"
	"sync"

	"standoff/measure"
)

// Result says what the analysis found. Takes, polarity, version and what is
// known of gate and clock are added by who knows them.
func (a *Analysis) Result() *Result {
	best, budget := a.Best(), a.budget()
	r := &Result{Schema: Schema, Polarity: "unknown", Capsule: a.capsule(budget), Budget: budget, Models: a.candidates(), RiseTable: a.riseTable()}
	r.Fit = FitSummary{
		From: a.Data.Hz[0], To: a.Data.Hz[len(a.Data.Hz)-1],
		ReducedChiSquare: best.ReducedChiSquare(), Points: len(a.Data.Hz) * len(a.Data.Points),
		BandReason: a.Band, Unexplained: a.Data.Unexplained, Room: a.Data.Room, Alike: best.Alike, DegreesOfFreedom: best.Freedom, Status: best.Status.String(), Clock: measure.ClockCommon,
		SpeedOfSound: best.Acoustics.Speed, SpeedExpanded: Coverage * best.SpeedSE,
	}
	if a.Data.FreeClock {
		r.Fit.Clock = measure.ClockFree
	}
	alone := a.eachAlone()
	for i, p := range a.Data.Points {
		r.Distances = append(r.Distances, DistanceResult{
			Label: p.Label, Nominal: p.Nominal, Fitted: best.Distances[i] - best.Setback,
			FittedExpanded: Coverage * best.DistanceSE[i], Used: true, Flags: []measure.Flag{},
			Alone: alone[i], Misfit: best.misfit[i],
		})
	}
	r.Profiles, r.Octaves = a.profiles(), a.octaves()
	r.Warnings = a.warnings(r)
	return r
}

func (a *Analysis) eachAlone() []Alone {
	out := make([]Alone, len(a.Data.Points))
	var wg sync.WaitGroup
	for i := range out {
		wg.Go(func() { out[i] = a.alone(i) })
	}
	wg.Wait()
	return out
}

func (a *Analysis) capsule(b Budget) CapsuleResult {
	best := a.Best()
	ac := best.Acoustics
	c := CapsuleResult{
		Model: best.Model.Form, Body: best.Model.Body, Rear: best.Model.rear(), Claimed: a.Claimed,
		GradientFraction: mixValue(ac.Beta, b.GradientFraction),
		PortSpacing:      spacingValue(ac.Spacing, b.PortSpacing, ac.Beta-b.GradientFraction.Expanded, best.SpacingAtBound),
		Setback:          resolved(best.Setback, best.SetbackSE, "m"),
		SourceRadius:     resolved(ac.Radius, best.RadiusSE, "m"),
	}
	if best.BetaSE == 0 || best.BetaAtBound || !best.Status.Good() {
		c.GradientFraction, c.PortSpacing = unresolved("1"), unresolved("m")
	}
	if !c.PortSpacing.Resolved && ac.Beta-b.GradientFraction.Expanded >= leastGradient {
		_, c.PortSpacing.UpperLimit = a.limits(true)
	}
	if !c.GradientFraction.Resolved && best.Status.Good() {
		below, above := a.limits(false)
		c.GradientFraction.LowerLimit, c.GradientFraction.UpperLimit = telling(below), telling(above)
	}
	if v := c.GradientFraction; v.Resolved {
		c.Pattern = NearestPattern(*v.Value)
		if a.Claimed != "" {
			agrees := agreesWith(a.Claimed, *v.Value, *v.Expanded)
			c.Agrees = &agrees
		}
	}
	return c
}

// telling is a limit of the mix where it says something.
func telling(limit *float64) *float64 {
	if limit == nil || *limit <= 0 || *limit >= 1 {
		return nil
	}
	return limit
}

// root is the root of the sum of squares.
func root(parts ...float64) float64 {
	var sum float64
	for _, p := range parts {
		sum += p * p
	}
	return math.Sqrt(sum)
}

// agreesWith reports whether some mix within the interval is nearest to the
// pattern claimed.
func agreesWith(claimed string, beta, expanded float64) bool {
	for _, t := range []float64{-1, -0.5, 0, 0.5, 1} {
		if NearestPattern(math.Min(math.Max(beta+t*expanded, 0), 1)) == claimed {
			return true
		}
	}
	return false
}

// misfitLimit is the unexplained relative error above which a model does not
// describe the measurement: the uncertainties are widened, but the form is in
// doubt. It is 0.35 dB.
const misfitLimit = 0.04

func (a *Analysis) warnings(r *Result) []measure.Warning {
	out := []measure.Warning{}
	add := func(code, text, hint string) {
		out = append(out, measure.Warning{Code: code, Text: text, Hint: hint})
	}
	c := r.Capsule
	if !c.GradientFraction.Resolved {
		add("mix-not-resolved", "the data do not hold the mix", "measure more distances between 30 mm and 600 mm, with less noise")
	}
	if !c.PortSpacing.Resolved {
		add("spacing-not-resolved", a.whyNoSpacing(c), a.spacingHint(c))
	}
	if c.Agrees != nil && !*c.Agrees {
		add("claim-disagrees", fmt.Sprintf("the mix is that of %s, the rig claims %s", article(c.Pattern), article(c.Claimed)),
			"is the pattern switch where it should be, and does the right side face the loudspeaker?")
	}
	if x := a.Data.Unexplained; x > misfitLimit {
		add("model-does-not-hold", fmt.Sprintf("responses differ from the model by %.0f %%; the ± are widened to match", 100*x),
			"look at the residuals: a reflection nearby, a source too large, or a capsule that is not first order")
	}
	if w := a.sourceWarning(); w != nil {
		out = append(out, *w)
	}
	if least, most, yes := varies(r.Octaves); yes {
		add("mix-varies", fmt.Sprintf("the mix goes from %s to %s: one number does not describe this capsule", octaveWords(least), octaveWords(most)),
			"look at the mix by octave: a leak, a second diaphragm or a network may change the pattern with frequency")
	}
	for _, j := range a.equals()[1:] {
		if a.delta(j) < tie && j.Model.Form != a.Best().Model.Form {
			add("form-not-told", fmt.Sprintf("%v fits as well as %v; the difference is part of the ±", j.Model, a.Best().Model),
				"say capsule.model in the rig when the build is known")
			break
		}
	}
	return out
}

// article puts one before a pattern.
func article(pattern string) string {
	if pattern == "omni" {
		return "an omni"
	}
	return "a " + pattern
}

// octaveWords is a mix with its ± and where it was found.
func octaveWords(o OctaveMix) string {
	v := o.GradientFraction
	return fmt.Sprintf("%.2f ± %.2f around %.0f Hz", *v.Value, math.Max(*v.Expanded, 0.01), math.Sqrt(o.From*o.To))
}

func (a *Analysis) whyNoSpacing(c CapsuleResult) string {
	text := "the data do not hold the port spacing"
	if v := c.GradientFraction; v.Resolved && *v.Value-*v.Expanded < leastGradient {
		text += ": there may be next to no gradient part that it could belong to"
	}
	if u := c.PortSpacing.UpperLimit; u != nil {
		text += fmt.Sprintf("; it is below %.0f mm (95 %%, one-sided)", math.Ceil(*u*1e3))
	}
	return text
}

func (a *Analysis) spacingHint(c CapsuleResult) string {
	if v := c.GradientFraction; v.Resolved && *v.Value-*v.Expanded < leastGradient {
		if *v.Value+*v.Expanded > 3*leastGradient {
			return "the mix itself is too uncertain: measure more distances, and see whether takes and distances agree"
		}
		return "nothing to do: a pressure microphone has no port spacing"
	}
	hint := ""
	if nearest := a.Data.nearest() - a.Data.Setback; nearest > 0.035 {
		hint = "add a distance at or below 35 mm"
	}
	if a.Data.Radius > 0.020 {
		if hint != "" {
			hint += "; "
		}
		hint += "use a source of radius below 20 mm"
	}
	if hint == "" {
		hint = "measure the nearest distances with a gauge, and the source's radius better than 1 mm"
	}
	return hint
}
