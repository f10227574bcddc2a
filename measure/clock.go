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

// Differ reports for each take whether its clocks certainly differ, or differ from
// those of the other takes: by three standard uncertainties, and by more than what no
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
		out[i] = certain(c.Value, c.Uncertainty) || certain(c.Value-Median(known), c.Relative)
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
	leastOffset   = 3e-6   // that no clock is blamed for
	believedClock = 100e-6 // what clocks differ by, standard, before anything is known
	methodOffset  = 0.3e-6 // what is left where nothing else is in doubt, standard
	noClock       = 0.02   // rad rms left over by which a phase is a loudspeaker's own
	clockMiddle   = 3000.0 // Hz, where the fit has its middle
)

// ReadClocks reads the offsets of the clocks from what the phases of a set of takes
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
// believed of clocks (0 ± 100 ppm), and each take's difference to the mean its own.
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
	if !(l > 0) || points == math.MaxInt {
		return out
	}
	readAll(out, takes, points, l)
	return out
}

func readAll(out []ClockOffset, takes []Excess, points int, l float64) {
	mean, n := make([]float64, points), 0.0
	phases := make([][]float64, len(takes))
	var hz []float64
	for i, t := range takes {
		if len(t.Hz) == 0 {
			continue
		}
		hz = t.Hz[:points]
		phases[i] = withoutTurns(hz, t.Phase[:points], l)
		for j, p := range phases[i] {
			mean[j] += p
		}
		n++
	}
	for j := range mean {
		mean[j] /= n
	}
	common, doubt := together(hz, mean, l)
	if math.IsInf(doubt, 0) || math.IsNaN(doubt) {
		return
	}
	for i, p := range phases {
		if p == nil {
			continue
		}
		difference := make([]float64, points)
		for j := range p {
			difference[j] = p[j] - mean[j]
		}
		own, u := slope(hz, difference, l, 2)
		u = math.Hypot(u, methodOffset)
		out[i] = ClockOffset{common + own, math.Hypot(doubt, u), u}
	}
}

// together is the offset of all takes. What a loudspeaker leaves is no noise: as much
// as is seen may hide in the value, and where much is seen, all of it.
func together(hz, mean []float64, l float64) (value, doubt float64) {
	value, doubt = slope(hz, mean, l, float64(len(hz)))
	if _, _, rest := dispersion(hz, mean, l, 2); rest > noClock {
		doubt = math.Max(doubt, math.Abs(value))
	}
	// Joined with what is believed of clocks.
	trust := sq(believedClock) / (sq(believedClock) + sq(doubt))
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
	if len(hz) < columns+4 || x.SolveVec(a, b) != nil {
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
