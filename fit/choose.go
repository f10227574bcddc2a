package fit

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"slices"
	"sync"
)

// Analysis is the joint fit of a dataset by every model allowed, the chosen one
// first.
type Analysis struct {
	Data       *Dataset
	Candidates []*Joint
	Claimed    string
	Band       string // why the data end where they do
	lower      *Joint // the chosen model on the lower half of the band; nil where that is too little
}

// Best is the chosen candidate.
func (a *Analysis) Best() *Joint { return a.Candidates[0] }

// Analyse fits every model and chooses. Frequencies at which the chosen model's
// far response nears its null, where the rise means nothing, are left out and
// the fit is made again.
//
// The dataset's Unexplained and Room are estimated: the fit is made with a first guess, and
// again with what the best model leaves over.
//
// before, an earlier look at much the same data, gives the starts; nil is none.
func Analyse(d *Dataset, models []Model, claimed string, before *Analysis) (*Analysis, error) {
	guessed := *d
	guessed.Unexplained = firstUnexplained
	a, err := clearOfNull(&guessed, models, claimed, before)
	if err != nil {
		return nil, err
	}
	cut, why := a.Data.byMisfit(a.Best())
	if len(cut.Hz) < len(a.Data.Hz) {
		if a, err = analyse(cut, models, claimed, a); err != nil {
			return nil, err
		}
	}
	left := a.Data.explainedBy(a.Best())
	if j, err := fitModel(left, a.Best().Model, a.Best()); err == nil {
		left = left.explainedBy(j)
	}
	if a, err = analyse(left, models, claimed, a); err != nil {
		return nil, err
	}
	a.Band = why
	if half := left.below(left.Hz[len(left.Hz)-1] / 2); len(half.Hz) >= 6 {
		a.lower, _ = fitModel(half, a.Best().Model, a.Best())
	}
	return a, nil
}

// Guess is Analyse without its refinements: for a first look at the rise. Models
// that before has and that are not among those asked for come along untried, after
// the others, for later starts.
func Guess(d *Dataset, models []Model, before *Analysis) (*Analysis, error) {
	guessed := *d
	guessed.Unexplained = firstUnexplained
	a, err := analyse(&guessed, models, "", before)
	if err != nil || before == nil {
		return a, err
	}
	for _, j := range before.Candidates {
		if a.find(j.Model) == nil {
			a.Candidates = append(a.Candidates, j)
		}
	}
	return a, nil
}

// explainedBy is the dataset with what a fit leaves over.
func (d *Dataset) explainedBy(j *Joint) *Dataset {
	out := *d
	out.level = j.levels()
	out.Unexplained, out.Room = leftovers(j.residues())
	return &out
}

func clearOfNull(d *Dataset, models []Model, claimed string, before *Analysis) (*Analysis, error) {
	a, err := analyse(d, models, claimed, before)
	if err != nil {
		return nil, err
	}
	best := a.Best()
	limit := nullShare * best.Model.null(best.Acoustics)
	if limit >= d.Hz[len(d.Hz)-1] {
		return a, nil
	}
	if cut := d.below(limit); len(cut.Hz) >= 8 {
		return analyse(cut, models, claimed, nil)
	}
	return a, nil
}

// nullShare is the part of the way to the far form's null up to which data are
// fitted; useShare up to which the rise is shown.
const (
	nullShare = 0.75
	useShare  = 0.4
)

func analyse(d *Dataset, models []Model, claimed string, before *Analysis) (*Analysis, error) {
	a := &Analysis{Data: d, Claimed: claimed}
	fitted, errs := make([]*Joint, len(models)), make([]error, len(models))
	var wg sync.WaitGroup
	for i, m := range models {
		wg.Go(func() { fitted[i], errs[i] = fitModel(d, m, before.find(m)) })
	}
	wg.Wait()
	for _, j := range fitted {
		if j != nil {
			a.Candidates = append(a.Candidates, j)
		}
	}
	if len(a.Candidates) == 0 {
		return nil, errors.Join(errs...)
	}
	a.order()
	return a, nil
}

// find is the candidate of a model, nil where there is none.
func (a *Analysis) find(m Model) *Joint {
	if a == nil {
		return nil
	}
	for _, j := range a.Candidates {
		if j.Model == m {
			return j
		}
	}
	return nil
}

// Of two models whose misfits differ by less than tie, in units of the best
// reduced chi-square, the data cannot tell; a model within within adds its
// difference to the uncertainty of the model's form.
const (
	tie    = 2.0
	within = 9.0
)

// order puts the chosen model first and the others by misfit.
func (a *Analysis) order() {
	slices.SortStableFunc(a.Candidates, func(x, y *Joint) int { return cmp.Compare(score(x), score(y)) })
	best := a.Candidates[0]
	for i, j := range a.Candidates {
		if (score(j)-score(best))/unit(best) < tie && preference(j.Model) < preference(a.Candidates[0].Model) {
			copy(a.Candidates[1:i+1], a.Candidates[:i])
			a.Candidates[0] = j
		}
	}
}

// score is the misfit; a fit that did not end well, or with its mix on a bound,
// comes after all others.
func score(j *Joint) float64 {
	if !j.Status.Good() || j.BetaAtBound {
		return j.ChiSquare * 1e6
	}
	return j.ChiSquare
}

func unit(j *Joint) float64 { return math.Max(j.ReducedChiSquare(), 1) }

// preference among models that fit alike: a capsule in a housing with a rear
// entry is what most of them are (common practice).
func preference(m Model) int {
	p := 0
	if m.Form != PhaseShift {
		p++
	}
	if m.Body != Sphere {
		p += 2
	}
	if m.Rear == LowPass {
		p += 4
	}
	return p
}

// delta is by how much j fits worse than the best fitting model.
func (a *Analysis) delta(j *Joint) float64 {
	lowest, u := math.Inf(1), 1.0
	for _, c := range a.Candidates {
		if score(c) < lowest {
			lowest, u = score(c), unit(c)
		}
	}
	return (score(j) - lowest) / u
}

// equals are the candidates, the chosen one included, which the data cannot
// well refuse.
func (a *Analysis) equals() []*Joint {
	out := []*Joint{a.Best()}
	for _, j := range a.Candidates[1:] {
		if a.delta(j) < within {
			out = append(out, j)
		}
	}
	return out
}

// formUncertainty is the standard uncertainty that the choice of the model adds
// to a quantity: the largest difference between models that the data cannot
// refuse, as the half-width of a rectangular distribution.
func (a *Analysis) formUncertainty(of func(*Joint) float64) float64 {
	best, widest := of(a.Best()), 0.0
	for _, j := range a.equals()[1:] {
		widest = math.Max(widest, math.Abs(of(j)-best))
	}
	return widest / math.Sqrt(3)
}

// bandUncertainty is the standard uncertainty of a quantity from the choice of the
// band: by how much the lower half of the band disagrees with the whole, beyond
// what it is less certain by, when that is more than chance does (two standard
// deviations). A model that holds gives nothing; one that holds nowhere quite gives
// another answer in every band.
func (a *Analysis) bandUncertainty(of, se func(*Joint) float64) float64 {
	if a.lower == nil || !a.lower.Status.Good() {
		return 0
	}
	off := square(of(a.lower) - of(a.Best()))
	// What uses part of the data differs by chance with the difference of variances
	// (J. A. Hausman, Econometrica 46, 1251 (1978)).
	chance := math.Max(square(se(a.lower))-square(se(a.Best())), 0)
	if off <= 4*chance {
		return 0
	}
	return math.Sqrt((off - chance) / 3)
}

func (a *Analysis) candidates() []Candidate {
	out := make([]Candidate, len(a.Candidates))
	for i, j := range a.Candidates {
		out[i] = Candidate{
			Model: j.Model.Form, Body: j.Model.Body, Rear: j.Model.rear(), GradientFraction: j.Acoustics.Beta, PortSpacing: j.Acoustics.Spacing,
			ChiSquare: j.ChiSquare, ReducedChiSquare: j.ReducedChiSquare(), Delta: math.Min(a.delta(j), 1e6),
			DegreesOfFreedom: j.Freedom, Criterion: j.ChiSquare/unit(a.Best()) + 2*float64(len(j.x)),
			AtBound: j.BetaAtBound || j.SpacingAtBound, Chosen: i == 0, Why: a.why(i),
		}
	}
	return out
}

func (a *Analysis) why(i int) string {
	j := a.Candidates[i]
	switch {
	case !j.Status.Good():
		return "did not converge: " + j.Status.String()
	case i > 0 && j.BetaAtBound:
		return "its mix ran into the end of its range"
	case len(a.Candidates) == 1:
		return "the only one that the rig allows"
	case i == 0 && a.delta(j) > 0:
		return "fits as well as any, and is the usual build"
	case i == 0:
		return "fits best"
	case a.delta(j) < tie:
		return "fits as well; the data cannot tell it from the chosen one"
	case a.delta(j) < within:
		return "fits a little worse; its difference is part of the uncertainty"
	}
	if a.delta(j) > 1000 {
		return "fits far worse"
	}
	return fmt.Sprintf("fits worse by %.0f in chi-square", a.delta(j))
}

// below is the dataset up to a frequency.
func (d *Dataset) below(limit float64) *Dataset {
	n := 0
	for n < len(d.Hz) && d.Hz[n] <= limit {
		n++
	}
	out := *d
	out.Hz = d.Hz[:n]
	if d.level != nil {
		out.level = d.level[:n]
	}
	out.Points = append([]Point(nil), d.Points...)
	for i := range out.Points {
		out.Points[i].Value = out.Points[i].Value[:n]
		out.Points[i].Variance = out.Points[i].Variance[:n]
	}
	return &out
}
