package fit

import (
	"fmt"
	"math"

	"standoff/measure"
)

// When the responses speak for another source than the rig has.
const (
	sourceLikelier = 15.0 // in −2 ln L
	sourceTension  = 3.0  // standard uncertainties of the difference
	sourceReach    = 0.02 // m, of a radius that is not known
)

// sourceWarning fits the radius of the source freely. Where that makes the data
// clearly likelier, at a radius that is not the rig's, it says so: a source that is
// taken for smaller than it is draws the spacing down first, and leaves little over
// by which it could be noticed.
func (a *Analysis) sourceWarning() *measure.Warning {
	best := a.Best()
	d, m := *a.Data, best.Model
	from, radius, told := best, a.Data.Radius, a.Data.RadiusUncertainty
	if m.Source == PointSource {
		m.Source, radius, told = PistonSource, 0, 0
		d.Radius, from = sourceReach/2, nil
	}
	d.RadiusUncertainty = sourceReach
	free, err := fitModel(&d, m, from)
	if err != nil || !free.Status.Good() || free.RadiusSE == 0 {
		return nil
	}
	off := free.Acoustics.Radius - radius
	if best.unlikely()-free.unlikely() < sourceLikelier || math.Abs(off) < sourceTension*math.Hypot(free.RadiusSE, told) {
		return nil
	}
	says := "takes it for a point"
	if best.Model.Source == PistonSource {
		says = fmt.Sprintf("has %.1f mm ± %.1f mm", 1e3*radius, 1e3*told)
	}
	return &measure.Warning{Code: "source-size",
		Text: fmt.Sprintf("the responses speak for a source of %.1f mm ± %.1f mm radius (k = 2), the rig %s", 1e3*free.Acoustics.Radius,
			1e3*math.Max(Coverage*free.RadiusSE, 1e-4), says),
		Hint: "measure the loudspeaker's cone, middle of its surround to middle, and put half of it into source.radius; or measure the source with standoff source"}
}
