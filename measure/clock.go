package measure

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// ClockOffset is by how much a recording's clock is faster than the playback's,
// relative (1e-6 is 1 ppm), with standard uncertainties: of the value by itself, and
// against the other takes of the same set. They are infinite where nothing can be said.
type ClockOffset struct {
	Value       float64
	Uncertainty float64 // of Value
	Relative    float64 // of its difference to the other takes
}

// Differ reports for each take whether its clocks certainly differ or, where that
// cannot be told well, differ from those of the other takes: by three standard uncertainties, and by more than what no
// clock is blamed for.
func Differ(clocks []ClockOffset) []bool {
	var known []float64
	for _, c := range clocks {
		if !math.IsInf(c.Relative, 0) {
			known = append(known, c.Value)
		}
	}
	out := make([]bool, len(clocks))
	for i, c := range clocks {
		out[i] = certain(c.Value, c.Uncertainty) ||
			c.Uncertainty > wellKnown && certain(c.Value-Median(known), c.Relative)
	}
	return out
}

func certain(value, uncertainty float64) bool {
	return math.Abs(value) > math.Max(3*uncertainty, leastOffset)
}

// OneClock makes one offset of those of takes that share a clock: their median.
func OneClock(clocks []ClockOffset) []ClockOffset {
	var values, doubts []float64
	for _, c := range clocks {
		if !math.IsInf(c.Relative, 0) {
			values, doubts = append(values, c.Value), append(doubts, c.Uncertainty)
		}
	}
	out := slices.Clone(clocks)
	for i := range out {
		if len(values) > 0 {
			out[i] = ClockOffset{Value: Median(values), Uncertainty: Median(doubts)}
		}
	}
	return out
}

const (
	leastOffset  = 3e-6   // that no clock is blamed for
	wellKnown    = 20e-6  // standard uncertainty of a value that speaks for itself
	leastPoints  = 10     // of a phase that can be read
	methodOffset = 0.3e-6 // what is left where nothing else is in doubt, standard
	noClock      = 0.005  // rad rms left over by which a phase is a loudspeaker's own
	clockMiddle  = 3000.0 // Hz, where the fit has its middle
)

// BelievedClock is what clocks differ by, standard and relative, before anything is
// known.
const BelievedClock = 100e-6

// ReadClocks reads the offsets of the clocks, what is taken off already included, from what the phases of a set of takes
// have in excess, all of one sweep of the rate l in s. A recording clock that is ε fast
// hears the frequency f, which the sweep passes at the time t(f), later by ε·t(f).
// After deconvolution that is a phase of
//
//	φ(f) = −2πf·ε·t(f),  t(f) = L·ln f + const,
//
// and the constant is no more than a delay. It is fitted together with a delay and
// with terms in 1/f and f³, which are what a magnitude outside the band would have
// explained. What all takes have in common may be the loudspeaker's (a crossover is
// not of minimum phase); what differs between takes is the clocks'. So the mean over
// the takes gives the value of all with what is left as doubt, joined with what is
// believed of clocks (0 ± 100 ppm), and each take's difference to the mean its own, as
// far as takes differ by more than chance.
//
// Source: the shape follows from A. Farina, AES 108th Convention, paper 5093 (2000),
// with time scaled; it is checked against recordings made by scipy and sox.
func ReadClocks(takes []Excess, l float64) []ClockOffset {
	out := make([]ClockOffset, len(takes))
	points := math.MaxInt
	for i, t := range takes {
		out[i] = ClockOffset{0, math.Inf(1), math.Inf(1)}
		if len(t.Hz) > 0 {
			points = min(points, len(t.Hz))
		}
	}
	if !(l > 0) || points == math.MaxInt || points < leastPoints {
		return out
	}
	readAll(out, takes, points, l)
	return out
}

func readAll(out []ClockOffset, takes []Excess, points int, l float64) {
	var phases [][]float64
	var at []int
	var hz, taken []float64
	for i, t := range takes {
		if len(t.Hz) > 0 {
			hz = t.Hz[:points]
			phases, at, taken = append(phases, withoutTurns(hz, t.Phase[:points], l)), append(at, i), append(taken, t.Taken)
		}
	}
	weights := slices.Repeat([]float64{1}, len(at))
	// The first round tells what each take is worth.
	_, doubts := differences(hz, phases, weighted(phases, weights), l)
	for i, u := range doubts {
		weights[i] = 1 / sq(u)
	}
	mean, off := weighted(phases, weights), meanOf(taken, weights)
	common, doubt := together(hz, mean, l, off)
	if math.IsInf(doubt, 0) || math.IsNaN(doubt) {
		return
	}
	own, doubts := differences(hz, phases, mean, l)
	for n := range own {
		own[n] += taken[n] - off
	}
	draw(own, doubts)
	for n, i := range at {
		out[i] = ClockOffset{common + own[n], math.Hypot(doubt, doubts[n]), doubts[n]}
	}
}

// weighted is the mean of phases at each frequency.
func weighted(phases [][]float64, weights []float64) []float64 {
	out, column := make([]float64, len(phases[0])), make([]float64, len(phases))
	for j := range out {
		for i, p := range phases {
			column[i] = p[j]
		}
		out[j] = meanOf(column, weights)
	}
	return out
}

func meanOf(x, weights []float64) float64 {
	var sum, w float64
	for i, v := range x {
		sum, w = sum+weights[i]*v, w+weights[i]
	}
	return sum / w
}

// differences are the offsets of takes against a mean, with their uncertainties.
func differences(hz []float64, phases [][]float64, mean []float64, l float64) (own, doubts []float64) {
	for _, p := range phases {
		d := make([]float64, len(p))
		for j := range p {
			d[j] = p[j] - mean[j]
		}
		value, u := slope(hz, d, l, 2)
		own, doubts = append(own, value), append(doubts, math.Hypot(u, methodOffset))
	}
	return own, doubts
}

// draw pulls differences together as far as they scatter by chance: clocks that differ
// among themselves by τ make the best guess of a take's difference τ²/(τ²+u²) of what
// was found. Source: R. DerSimonian, N. Laird, Control. Clin. Trials 7, 177 (1986).
func draw(own, doubts []float64) {
	var w, w2, wx, q float64
	for i, u := range doubts {
		w, w2, wx = w+1/sq(u), w2+1/sq(sq(u)), wx+own[i]/sq(u)
	}
	mean := wx / w
	for i, u := range doubts {
		q += sq((own[i] - mean) / u)
	}
	between := math.Max(0, (q-float64(len(own)-1))/math.Max(w-w2/w, 1e-300))
	for i, u := range doubts {
		trust := between / (between + sq(u))
		own[i] = mean + trust*(own[i]-mean)
		doubts[i] = math.Max(math.Sqrt(trust)*u, methodOffset)
	}
}

// together is the offset of all takes. What a loudspeaker leaves is no noise: as much
// as is seen may hide in the value, and where much is seen, all of it. Off is what is
// taken off already.
func together(hz, mean []float64, l, off float64) (value, doubt float64) {
	value, doubt = slope(hz, mean, l, float64(len(hz)))
	value += off
	if _, _, rest := dispersion(hz, mean, l, 2); rest > noClock {
		doubt = math.Max(doubt, math.Abs(value))
	}
	// Joined with what is believed of clocks.
	trust := sq(BelievedClock) / (sq(BelievedClock) + sq(doubt))
	return trust * value, math.Sqrt(trust) * doubt
}

// withoutTurns takes off the multiple of π, a reversed polarity and turns lost in
// unwrapping, that leaves least to be explained.
func withoutTurns(hz, phase []float64, l float64) []float64 {
	var best []float64
	least := math.Inf(1)
	nearest := math.Round(phase[0] / math.Pi)
	for k := -4.0; k <= 4; k++ {
		y := make([]float64, len(phase))
		for i, p := range phase {
			y[i] = p - (nearest+k)*math.Pi
		}
		if _, _, rest := dispersion(hz, y, l, 2); rest < least {
			best, least = y, rest
		}
	}
	return best
}

// slope is the clock's offset in a phase and its standard uncertainty: what the
// scatter leaves open when it counts as that of so many points, and by how much it
// depends on whether the magnitude above the band is believed to go on as it ends.
func slope(hz, phase []float64, l, alike float64) (value, uncertainty float64) {
	value, se, _ := dispersion(hz, phase, l, 2)
	other, _, _ := dispersion(hz, phase, l, 1)
	return value, math.Hypot(se*math.Sqrt(alike), other-value)
}

// dispersion fits delay, clock and, with one extra, 1/f or, with two, f³ as well. It
// returns the offset, its standard error from the rms of what is left, and that.
func dispersion(hz, phase []float64, l float64, extra int) (value, se, rest float64) {
	columns := 2 + extra
	a, b := mat.NewDense(len(hz), columns, nil), mat.NewVecDense(len(hz), phase)
	for i, f := range hz {
		u := f / clockMiddle
		terms := [4]float64{u * 10, -2 * math.Pi * u * math.Log(u), 1 / u, u * u * u}
		a.SetRow(i, terms[:columns])
	}
	var x, r mat.VecDense
	if x.SolveVec(a, b) != nil {
		return 0, math.Inf(1), math.Inf(1)
	}
	r.MulVec(a, &x)
	r.SubVec(b, &r)
	rest = math.Sqrt(mat.Dot(&r, &r) / float64(len(hz)-columns))
	var normal, inverse mat.Dense
	normal.Mul(a.T(), a)
	if inverse.Inverse(&normal) != nil {
		return 0, math.Inf(1), math.Inf(1)
	}
	scale := clockMiddle * l
	return x.AtVec(1) / scale, rest * math.Sqrt(inverse.At(1, 1)) / scale, rest
}
