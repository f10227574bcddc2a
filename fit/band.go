package fit

import "fmt"

// A band may leave over bandWorse times what its lower half leaves, and bandSlack
// more, before it is cut.
const (
	bandWorse = 1.5
	bandSlack = 0.0005
	bandClear = 10.0 // in −2 ln L, by which it has to be certain
)

// fewest frequencies that a band is cut to.
const fewestInBand = 8

// byMisfit is the dataset up to the highest frequency at which the best model holds
// about as well as in the lower half of the band, and why. Ports and bodies of real
// capsules leave every simple model behind somewhere; where that is, only the misfit
// can tell.
func (d *Dataset) byMisfit(best *Joint) (cut *Dataset, why string) {
	top := d.Hz[len(d.Hz)-1]
	least := d.below(top / 2)
	if len(least.Hz) < fewestInBand {
		return d, "all that gate and rig leave: too few frequencies to choose among"
	}
	over := func(part *Dataset) (unexplained float64, worseThan func(float64) bool) {
		j, err := fitModel(part, best.Model, best)
		if err != nil {
			return mostUnexplained, func(float64) bool { return true }
		}
		r := j.residues()
		u, rho := leftovers(r)
		return u, func(enough float64) bool {
			return u > enough && unlikely(r, enough, rho)-unlikely(r, u, rho) > bandClear
		}
	}
	low, _ := over(least)
	whole, worse := over(d)
	enough := bandWorse*low + bandSlack
	if !worse(enough) {
		return d, fmt.Sprintf("the model leaves %s over in all of it, %s in its lower half", percent(whole), percent(low))
	}
	cut = least
	for _, part := range []float64{1.26, 1.59} {
		c := d.below(top / part)
		if _, worse := over(c); !worse(enough) {
			cut = c
			break
		}
	}
	return cut, fmt.Sprintf("above %.0f Hz the model holds less well: it leaves %s over in all that the rig allows, %s in the lower half", cut.Hz[len(cut.Hz)-1], percent(whole), percent(low))
}

func percent(x float64) string { return fmt.Sprintf("%.2g %%", 100*x) }
