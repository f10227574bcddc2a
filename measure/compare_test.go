package measure

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

var testPlaces = []float64{0.025, 0.04, 0.0635, 0.1, 0.2, 0.4, 0.8}

// placed are takes by the 1/r law of pressure and the speed of sound, as a source
// of radius b and a capsule 6 mm behind its grille would give them.
func placed(b float64, latency func(i int) float64) []Placed {
	var out []Placed
	for i, nominal := range testPlaces {
		r := nominal + 0.006
		pressure := 1 / r
		if b > 0 {
			// On the axis of a piston for k → 0 (Kinsler et al., sec. 7.4, from memory).
			pressure = 2 * (math.Hypot(r, b) - r) / (b * b)
		}
		out = append(out, Placed{
			Distance: Distance{Label: fmt.Sprintf("%gmm", 1e3*nominal), Metres: nominal},
			Analysis: &TakeAnalysis{Quality: Quality{Arrival: r/344 + latency(i), Level: 0.02 * pressure}},
		})
	}
	return out
}

func bench(b float64) Bench {
	return Bench{SpeedOfSound: 344, Tape: 0.0005, Setback: 0.006, SourceRadius: b, Clock: ClockAuto}
}

func steady(int) float64 { return 0.0123 }

// A free clock starts anywhere.
func unsteady(i int) float64 { return 0.05 * math.Sin(float64(7*i)) }

// wantFinding fails unless take at, and no other, has this one flag, and the
// reason names what it should.
func wantFinding(t *testing.T, what string, got [][]Finding, at int, flag Flag, words ...string) {
	t.Helper()
	for i, list := range got {
		if i != at && len(list) > 0 {
			t.Errorf("%s: %g m is flagged: %v", what, testPlaces[i], list)
		}
	}
	if at < 0 {
		return
	}
	if len(got[at]) != 1 || got[at][0].Flag != flag {
		t.Errorf("%s: %v, want %v", what, got[at], flag)
		return
	}
	for _, word := range words {
		if !strings.Contains(got[at][0].Reason, word) {
			t.Errorf("%s: %q does not say %q", what, got[at][0].Reason, word)
		}
	}
}

func TestCompareFindsNothingWrong(t *testing.T) {
	for _, b := range []float64{0, 0.017, 0.05} {
		wantFinding(t, "common clock", bench(b).Compare(placed(b, steady)), -1, "")
		wantFinding(t, "free clock", bench(b).Compare(placed(b, unsteady)), -1, "")
	}
	few := placed(0, unsteady)[:2]
	few[1].Analysis.Quality.Level *= 10
	if got := bench(0).Compare(few); len(got) != 2 || got[0] != nil || got[1] != nil {
		t.Errorf("of two distances: %v", got)
	}
}

// A microphone at 80 mm where the rig says 100 mm is named, with both numbers.
func TestCompareNamesAWrongDistance(t *testing.T) {
	for i, nominal := range testPlaces {
		for _, off := range []float64{0.02, -0.015, 0.1} {
			if nominal+off < 0.02 {
				continue
			}
			takes := placed(0.017, steady)
			q := &takes[i].Analysis.Quality
			q.Arrival += off / 344
			q.Level *= (nominal + 0.006) / (nominal + 0.006 + off)
			wantFinding(t, fmt.Sprintf("%g m off by %g m", nominal, off), bench(0.017).Compare(takes), i, DistanceMismatch,
				fmt.Sprintf("%.0f mm, the rig says %.0f mm", 1e3*(nominal+off), 1e3*nominal))
		}
	}
}

// A gain of 6 dB more or 3 dB less is named, in dB; 1 dB is not. Near the source a rise
// may lift a level by 3 dB: what is between only the fit can tell.
func TestCompareNamesAGainJump(t *testing.T) {
	for i := range testPlaces {
		for _, dB := range []float64{6, -3, 10} {
			for _, latency := range []func(int) float64{steady, unsteady} {
				takes := placed(0, latency)
				takes[i].Analysis.Quality.Level *= math.Pow(10, dB/20)
				wantFinding(t, fmt.Sprintf("%+g dB at %g m", dB, testPlaces[i]), bench(0).Compare(takes), i, LevelJump, fmt.Sprintf("%+.1f dB", dB))
			}
		}
		takes := placed(0, steady)
		takes[i].Analysis.Quality.Level *= math.Pow(10, 1.0/20)
		wantFinding(t, "1 dB", bench(0).Compare(takes), -1, "")
	}
}

// Where the clock is free an arrival says nothing, but the level does.
func TestCompareWithAFreeClock(t *testing.T) {
	takes := placed(0, unsteady)
	takes[1].Analysis.Quality.Level *= 0.046 / 0.106 // 40 mm measured at 100 mm
	wantFinding(t, "100 mm for 40 mm", bench(0).Compare(takes), 1, LevelJump)
}

func TestDecideClock(t *testing.T) {
	b := bench(0)
	for _, p := range []struct {
		clock   string
		latency func(int) float64
		want    string
	}{
		{ClockAuto, steady, ClockCommon}, {ClockAuto, unsteady, ClockFree},
		{ClockCommon, unsteady, ClockCommon}, {ClockFree, steady, ClockFree},
		{ClockAuto, func(i int) float64 { return 10e-6 * math.Sin(float64(5*i)) }, ClockCommon}, // 3 mm of tape errors
		{ClockAuto, func(i int) float64 { return 1e-3 * math.Sin(float64(5*i)) }, ClockFree},
	} {
		b.Clock = p.clock
		if got := b.DecideClock(placed(0, p.latency)); got != p.want {
			t.Errorf("%s: %s, want %s", p.clock, got, p.want)
		}
	}
	b.Clock = ClockAuto
	if got := b.DecideClock(placed(0, steady)[:2]); got != ClockFree {
		t.Errorf("of two distances: %s", got)
	}
}

// numpy.median and scipy.stats.median_abs_deviation(scale="normal") of these are
// 3.5 and 2.2239033277584038.
func TestMedianAndMAD(t *testing.T) {
	x := []float64{9, 1, 4, 3, 2, 5}
	near(t, "median", Median(x), 3.5, 0)
	near(t, "MAD", MAD(x), 2.223903327758404, 1e-12)
	near(t, "odd", Median(x[:5]), 3, 0)
	if !math.IsNaN(Median(nil)) || !math.IsNaN(MAD(nil)) {
		t.Error("the median of nothing is a number")
	}
	if x[0] != 9 {
		t.Error("Median sorts what it is given")
	}
}

// With two distances only, repeats that cannot both be right are named.
func TestCompareHoldsRepeatsAgainstEachOther(t *testing.T) {
	takes := placed(0, steady)
	pair := []Placed{takes[0], takes[0], takes[3]}
	other := *takes[0].Analysis
	other.Quality.Level /= 70
	pair[1].Analysis = &other
	got := bench(0).Compare(pair)
	if len(got[0]) != 1 || len(got[1]) != 1 || len(got[2]) != 0 || got[0][0].Flag != LevelJump {
		t.Errorf("two takes that differ by 37 dB: %v", got)
	}
	other.Quality.Level = takes[0].Analysis.Quality.Level * 1.05
	for i, f := range bench(0).Compare(pair) {
		if len(f) > 0 {
			t.Errorf("take %d, 0.4 dB apart: %v", i, f)
		}
	}
}
