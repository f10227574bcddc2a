package measure

import (
	"fmt"
	"math"
	"testing"
)

// phasesOf are excess phases as clocks make them: −∫2π·ε·L·ln(f)·df summed up, without
// the closed form, with a delay, a polarity and what a loudspeaker adds.
func phasesOf(clock, l, delay float64, turned bool, extra func(hz float64) float64) Excess {
	e := Excess{Hz: Grid(excessFrom, excessTo, 1/excessSpacing)}
	sum, at := 0.0, 0.0
	for _, f := range e.Hz {
		for step := (f - at) / 1000; at < f-step/2; at += step {
			sum -= 2 * math.Pi * step * clock * (l*math.Log((at+step/2)/1000) + l)
		}
		p := sum - 2*math.Pi*f*delay + extra(f)
		if turned {
			p += math.Pi
		}
		e.Phase = append(e.Phase, p)
	}
	return e
}

func none(float64) float64 { return 0 }

// allpass is what a crossover leaves when its halves add up flat.
func allpass(corner float64) func(float64) float64 {
	return func(f float64) float64 { return -2 * math.Atan(f/corner) }
}

func TestClocksAreRead(t *testing.T) {
	truth := []float64{-180e-6, 0, 25e-6, 200e-6}
	for _, l := range []float64{0.15, 0.72, 8} {
		var takes []Excess
		for i, c := range truth {
			takes = append(takes, phasesOf(c, l, 3e-6*float64(i), i%2 == 1, none))
		}
		clocks := ReadClocks(takes, l)
		differ := Differ(clocks)
		for i, c := range clocks {
			near(t, fmt.Sprintf("L %g: offset %d in ppm", l, i), 1e6*c.Value, 1e6*truth[i], 0.1)
			if differ[i] != (truth[i] != 0) || c.Uncertainty > 2e-6 {
				t.Errorf("L %g: %v differs %v", l, c, differ[i])
			}
		}
	}
}

// A loudspeaker with a crossover is not blamed on the clock; what differs between
// takes still is, and to the ppm.
func TestACrossoverIsNoClock(t *testing.T) {
	for _, corner := range []float64{600, 1000, 1500, 2000, 2500, 3500, 5000} {
		for _, l := range []float64{0.29, 0.72} {
			same := ReadClocks([]Excess{phasesOf(0, l, 0, false, allpass(corner)), phasesOf(0, l, 0, false, allpass(corner))}, l)
			for i, differ := range Differ(same) {
				if differ {
					t.Errorf("crossover at %g Hz, L %g: taken for a clock of %v", corner, l, same[i])
				}
			}
			other := ReadClocks([]Excess{phasesOf(-60e-6, l, 0, false, allpass(corner)), phasesOf(40e-6, l, 0, false, allpass(corner))}, l)
			near(t, "difference in ppm", 1e6*(other[1].Value-other[0].Value), 100, 0.5)
			if d := Differ(other); !d[0] || !d[1] {
				t.Errorf("crossover at %g Hz: clocks 100 ppm apart are not told: %v", corner, other)
			}
		}
	}
}

// What scatters by chance is drawn together, what differs stays.
func TestClocksAreDrawnTogether(t *testing.T) {
	own, doubts := []float64{1e-6, -1e-6, 0.5e-6}, []float64{2e-6, 2e-6, 2e-6}
	draw(own, doubts)
	for i := range own {
		near(t, "by chance, in ppm", 1e6*own[i], 0.5/3, 1e-9)
	}
	own, doubts = []float64{100e-6, -100e-6, 0}, []float64{1e-6, 1e-6, 8e-6}
	draw(own, doubts)
	near(t, "clearly apart, in ppm", 1e6*own[0], 100, 0.1)
	near(t, "with its doubt, in ppm", 1e6*doubts[2], 8, 0.5)
}

// Where nothing can be read, nothing is said.
func TestUnreadableClocks(t *testing.T) {
	readable := phasesOf(50e-6, 0.7, 0, false, none)
	for what, clocks := range map[string][]ClockOffset{
		"no sweep":  ReadClocks([]Excess{readable}, 0),
		"no phases": ReadClocks([]Excess{{}, {}}, 0.7),
		"no takes":  ReadClocks(nil, 0.7),
		"one point": ReadClocks([]Excess{{Hz: []float64{700}, Phase: []float64{0}}}, 0.7),
	} {
		for i, c := range clocks {
			if !math.IsInf(c.Uncertainty, 1) || c.Value != 0 || Differ(clocks)[i] {
				t.Errorf("%s: %v", what, c)
			}
		}
	}
	mixed := ReadClocks([]Excess{{}, readable}, 0.7)
	if !math.IsInf(mixed[0].Uncertainty, 1) {
		t.Errorf("nothing read from nothing: %v", mixed[0])
	}
	near(t, "beside one without, in ppm", 1e6*mixed[1].Value, 50, 0.1)
}

func TestOneClock(t *testing.T) {
	got := OneClock([]ClockOffset{{10e-6, 1e-6, 1e-6}, {0, math.Inf(1), math.Inf(1)}, {12e-6, 1e-6, 1e-6}, {11e-6, 1e-6, 1e-6}})
	for _, c := range got {
		if c != (ClockOffset{11e-6, 1e-6, 0}) {
			t.Errorf("one clock: %v", c)
		}
	}
}
