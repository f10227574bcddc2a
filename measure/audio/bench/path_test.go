package bench

import (
	"context"
	"math"
	"math/cmplx"
	"slices"
	"strings"
	"testing"
)

// Whole paths, with pistons, bodies, networks and rooms, as numpy and scipy have
// them from the same geometry by other ways.
func TestPathsAgainstScipy(t *testing.T) {
	configs, distances := referenceCases(t)
	paths := map[string][]complex128{}
	for id, c := range configs {
		paths[id] = transfer(t, c, distances[id])
	}
	for _, row := range table(t, "paths.csv") {
		v := numbers(t, row[1:])
		f := int(v[0])
		want := complex(v[1], v[2])
		// Most agree to 1e−5; interpolation between grid points is worst for large
		// pistons at the top, and for images at the bottom where they nearly cancel.
		tolerance := 3e-4 * cmplx.Abs(want)
		nearComplex(t, "case "+row[0]+" at "+row[1]+" Hz", paths[row[0]][f], want, tolerance)
	}
}

func referenceCases(t *testing.T) (map[string]Config, map[string]float64) {
	configs, distances := map[string]Config{}, map[string]float64{}
	for _, row := range table(t, "cases.csv") {
		v := numbers(t, row[4:])
		c := Config{SpeedOfSound: 344, Source: Source{Radius: v[2]}}
		c.Capsule = Capsule{Form: row[1], Body: row[2], Rear: row[3], GradientFraction: v[0], PortSpacing: v[1], Sensitivity: 1}
		if v[4] > 0 {
			c.Room = &Room{Size: [3]float64{v[4], v[5], v[6]}, Reflection: v[7]}
		}
		configs[row[0]], distances[row[0]] = c, v[3]
	}
	return configs, distances
}

// The filters, by what their names say: Butterworth −3.01 dB at the corner and 12 dB
// per octave, a resonance of Q at its frequency, a first order of 6 dB per octave.
func TestFilters(t *testing.T) {
	half := -20 * math.Log10(math.Sqrt2)
	near(t, "high-pass at its corner", decibels(butterworthHigh(90, 90)), half, 1e-9)
	near(t, "high-pass, octave", decibels(butterworthHigh(2, 90)/butterworthHigh(1, 90)), 40*math.Log10(2), 0.01)
	near(t, "high-pass, passed", decibels(butterworthHigh(9000, 90)), 0, 1e-6)
	near(t, "roll-off at its corner", decibels(butterworthLow(16e3, 16e3)), half, 1e-9)
	near(t, "roll-off, octave", decibels(butterworthLow(2e6, 16e3)/butterworthLow(1e6, 16e3)), -40*math.Log10(2), 0.01)
	near(t, "resonance", cmplx.Abs(resonance(9000, 9000, 3)), 3, 1e-9)
	near(t, "resonance, below", cmplx.Abs(resonance(9, 9000, 3)), 1, 1e-5)
	near(t, "first order at its corner", decibels(firstHigh(18, 18)), half, 1e-9)
	near(t, "first order, octave", decibels(firstHigh(0.02, 18)/firstHigh(0.01, 18)), 20*math.Log10(2), 0.01)
	nearComplex(t, "phase of a first order", firstHigh(18, 18), 0.5+0.5i, 1e-12)
	for name, h := range map[string]complex128{"high": butterworthHigh(50, 0), "low": butterworthLow(50, 0), "resonance": resonance(50, 0, 0), "first": firstHigh(50, 0)} {
		nearComplex(t, name+" left out", h, 1, 0)
	}
}

func TestPlacesThatAreRefused(t *testing.T) {
	c := good()
	c.Capsule.Setback = 0
	b := open(t, c)
	for metres, want := range map[float64]string{
		0.008: "stands in the loudspeaker", -1: "stands in the loudspeaker", 0: "stands in the loudspeaker",
		2.86: "do not fit into the room: at most 2.85 m", math.NaN(): "stands in the loudspeaker", math.Inf(1): "farther than",
	} {
		_, err := b.Record(context.Background(), request([]float32{1}, metres))
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%g m: error %v, want %q", metres, err, want)
		}
	}
	record(t, b, request([]float32{1}, 2.84))
	record(t, b, request([]float32{1}, 0.0092))
}

// Paths are kept within bounds, and the oldest goes first.
func TestKeptPathsAreBounded(t *testing.T) {
	var p paths
	for i := range 10 {
		p.add(pathKey{distance: float64(i)}, make([]complex128, binsKept/4))
	}
	if p.bins > binsKept || len(p.kept) != 4 || !slices.Equal(p.keys, []pathKey{{distance: 6}, {distance: 7}, {distance: 8}, {distance: 9}}) {
		t.Errorf("%d bins in %d paths, keys %v", p.bins, len(p.kept), p.keys)
	}
	p.add(pathKey{distance: 99}, make([]complex128, 2*binsKept))
	if len(p.kept) != 1 {
		t.Errorf("%d paths beside a large one", len(p.kept)-1)
	}
}
