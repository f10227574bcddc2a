package measure

import (
	"fmt"
	"math"
)

// Placed is a take with the place that the rig gives it.
type Placed struct {
	Distance Distance
	Analysis *TakeAnalysis
}

// Bench is what is known of the set-up when takes are compared with each other.
type Bench struct {
	SpeedOfSound float64 // m/s
	Tape         float64 // standard uncertainty of a distance, m
	Setback      float64 // grille to capsule centre, m
	SourceRadius float64 // m; 0 a point
	Clock        string  // common, free, auto
}

// The clock of a set of takes.
const (
	ClockCommon = "common"
	ClockFree   = "free"
	ClockAuto   = "auto"
)

// commonWithin is how far, robustly, arrivals may scatter about r/c when play
// and record share a clock and a start: some samples, 10 mm of sound.
const commonWithin = 30e-6

// DecideClock answers which clock the takes had: what the rig says or, when
// that is auto, common when arrivals follow the distances.
func (b Bench) DecideClock(takes []Placed) string {
	if b.Clock == ClockCommon || b.Clock == ClockFree {
		return b.Clock
	}
	if len(takes) < 3 {
		return ClockFree
	}
	if MAD(b.offsets(takes)) < commonWithin {
		return ClockCommon
	}
	return ClockFree
}

// offsets are arrival − r/c in s.
func (b Bench) offsets(takes []Placed) []float64 {
	out := make([]float64, len(takes))
	for i, t := range takes {
		out[i] = t.Analysis.Quality.Arrival - (t.Distance.Metres+b.Setback)/b.SpeedOfSound
	}
	return out
}

// Tolerances of the comparison, which is for gross errors: the fit tells finer ones
// (fit.FindOdd). Near the source the rise itself shifts the envelope of the direct
// sound by some millimetres, far from it a reflection that comes soon after.
const (
	arrivalSlack = 0.008 // m
	arrivalShare = 0.005 // of the distance
	arrivalTapes = 5     // standard uncertainties of the tape
	levelSlack   = 1.26  // factor, 2 dB
)

// Finding is a flag that only the comparison of distances can raise.
type Finding struct {
	Flag   Flag
	Reason string
}

// Compare looks at each take in the company of the others: arrival and level
// against distance. The result has one list for every take. With fewer than three
// distances only the takes of one distance are held against each other.
func (b Bench) Compare(takes []Placed) [][]Finding {
	out := make([][]Finding, len(takes))
	if countPlaces(takes) < 3 {
		b.compareRepeats(takes, out)
		return out
	}
	clock := b.DecideClock(takes)
	offsets, products := b.offsets(takes), b.products(takes)
	typical, level := Median(offsets), Median(products)
	for i, t := range takes {
		nominal := t.Distance.Metres
		away := (offsets[i] - typical) * b.SpeedOfSound
		if clock == ClockCommon && math.Abs(away) > arrivalSlack+arrivalShare*nominal+arrivalTapes*b.Tape {
			out[i] = append(out[i], Finding{DistanceMismatch, fmt.Sprintf(
				"sounds like %.0f mm, the rig says %.0f mm: put it right and measure again", 1e3*(nominal+away), 1e3*nominal)})
			continue
		}
		ratio := products[i] / level
		slack := levelSlack * (1 + arrivalTapes*b.Tape/(nominal+b.Setback))
		if ratio > slack*gradientRise((nominal+b.Setback)/b.SpeedOfSound) || ratio < 1/slack {
			out[i] = append(out[i], Finding{LevelJump, fmt.Sprintf(
				"%+.1f dB against the other distances: has a gain been touched, or the stand moved?", 20*math.Log10(ratio))})
		}
	}
	return out
}

// compareRepeats flags the takes of a distance that differ in level by more than any
// repeat may. With nothing else to go by, all of them: one is wrong, and which is not
// known.
func (b Bench) compareRepeats(takes []Placed, out [][]Finding) {
	places := map[string][]int{}
	for i, t := range takes {
		places[t.Distance.Label] = append(places[t.Distance.Label], i)
	}
	for _, at := range places {
		least, most := math.Inf(1), 0.0
		for _, i := range at {
			least, most = math.Min(least, takes[i].Analysis.Quality.Level), math.Max(most, takes[i].Analysis.Quality.Level)
		}
		if most > levelSlack*least {
			for _, i := range at {
				out[i] = append(out[i], Finding{LevelJump, fmt.Sprintf("takes of this distance differ by %.1f dB: one of them is wrong", 20*math.Log10(most/least))})
			}
		}
	}
}

// gradientRise is the most by which a near-field rise can lift the rms level from 1
// to 6 kHz: that of a pure gradient, |1 + 1/(jkr)|, t = r/c away.
func gradientRise(t float64) float64 {
	var sum float64
	hz := logGrid(arrivalBand[0], arrivalBand[1], 16)
	for _, f := range hz {
		kr := 2 * math.Pi * f * t
		sum += (1 + 1/(kr*kr)) / float64(len(hz))
	}
	return math.Sqrt(sum)
}

func countPlaces(takes []Placed) int {
	places := map[string]bool{}
	for _, t := range takes {
		places[t.Distance.Label] = true
	}
	return len(places)
}

// products are level times distance: by the 1/r law of pressure the same for
// all, with the distance that a piston's on-axis pressure has at low frequency,
// b²/2(√(r²+b²)−r).
func (b Bench) products(takes []Placed) []float64 {
	out := make([]float64, len(takes))
	for i, t := range takes {
		r := t.Distance.Metres + b.Setback
		if b.SourceRadius > 0 {
			r = b.SourceRadius * b.SourceRadius / (2 * (math.Hypot(r, b.SourceRadius) - r))
		}
		out[i] = t.Analysis.Quality.Level * r
	}
	return out
}
