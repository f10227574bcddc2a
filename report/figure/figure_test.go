package figure

import (
	"image/color"
	"math"
	"slices"
	"testing"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"pgregory.net/rapid"
)

// Names beside lines keep their order and their distance, and stay in the frame
// where there is room for all.
func TestSpread(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		places := rapid.SliceOfN(rapid.Float64Range(0, 300), 1, 30).Draw(t, "places")
		const gap, lo, hi = 8.0, 0.0, 300.0
		out := spread(places, gap, lo, hi)
		sorted := slices.Sorted(slices.Values(out))
		if sorted[0] < lo-1e-6 || sorted[len(sorted)-1] > hi+1e-6 {
			t.Fatalf("%v leaves the frame", sorted)
		}
		for i := 1; i < len(sorted); i++ {
			if sorted[i]-sorted[i-1] < gap-0.5 {
				t.Fatalf("%v and %v are nearer than %v", sorted[i-1], sorted[i], gap)
			}
		}
		for i := range places {
			for j := range places {
				if places[i] < places[j] && out[i] > out[j] {
					t.Fatalf("%v stands above %v now", places[i], places[j])
				}
			}
		}
	})
}

func TestSpreadLeavesAlone(t *testing.T) {
	places := []float64{10, 40, 25}
	if got := spread(places, 8, 0, 100); !slices.Equal(got, places) {
		t.Errorf("%v became %v", places, got)
	}
}

// The ramp must hold in grey: its luminance only rises, by steps that can be told.
// Relative luminance after IEC 61966-2-1; lightness L* = 116·Y^(1/3) − 16 (CIE 15).
func TestRampHoldsInGrey(t *testing.T) {
	s := Default()
	last := math.Inf(-1)
	for i := range 8 {
		lightness := 116*math.Cbrt(luminance(s.Ramp(i, 8))) - 16
		if lightness < last+4 {
			t.Errorf("colour %d of 8 has lightness %.1f after %.1f", i, lightness, last)
		}
		last = lightness
	}
}

// Black and white, and the grey that is known to reach 4.54 to 1 on white, #767676
// (common practice).
func TestContrast(t *testing.T) {
	for _, p := range []struct {
		c    color.RGBA
		want float64
	}{{color.RGBA{0, 0, 0, 255}, 21}, {color.RGBA{255, 255, 255, 255}, 1}, {color.RGBA{0x76, 0x76, 0x76, 255}, 4.54}} {
		if got := contrast(p.c); math.Abs(got-p.want) > 0.005 {
			t.Errorf("%v: %.3f, want %.2f", p.c, got, p.want)
		}
	}
	s := Default()
	for i := range 30 {
		if got := contrast(readable(s.Ramp(i, 30))); got < 4.5 {
			t.Errorf("name %d of 30: contrast %.2f", i, got)
		}
	}
	for _, c := range []color.Color{s.Ink, s.Soft, s.Accent} {
		if got := contrast(color.RGBAModel.Convert(c).(color.RGBA)); got < 4.5 {
			t.Errorf("%v: contrast %.2f", c, got)
		}
	}
}

func TestLogTicks(t *testing.T) {
	p := plot.New()
	logFrequency(p, 20, 20000)
	var got []string
	for _, tick := range p.X.Tick.Marker.Ticks(20, 20000) {
		if tick.Label != "" {
			got = append(got, tick.Label)
		}
	}
	if want := []string{"20", "50", "100", "200", "500", "1k", "2k", "5k", "10k", "20k"}; !slices.Equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
}

// Any range has between two and ten named levels, all within it, with the values inside.
func TestLevelAxis(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		lo := rapid.Float64Range(-150, 150).Draw(t, "lo")
		hi := lo + math.Pow(10, rapid.Float64Range(-1, 2.5).Draw(t, "decades"))
		p := plot.New()
		levelAxis(p, lo, hi)
		if p.Y.Min > lo || p.Y.Max < hi {
			t.Fatalf("axis %v to %v for %v to %v", p.Y.Min, p.Y.Max, lo, hi)
		}
		ticks := p.Y.Tick.Marker.Ticks(p.Y.Min, p.Y.Max)
		if len(ticks) < 2 || len(ticks) > 10 {
			t.Fatalf("%d ticks for %v to %v", len(ticks), lo, hi)
		}
		seen := map[string]bool{}
		for _, k := range ticks {
			if k.Value < p.Y.Min-1e-9 || k.Value > p.Y.Max+1e-9 || seen[k.Label] {
				t.Fatalf("tick %v %q for %v to %v", k.Value, k.Label, lo, hi)
			}
			seen[k.Label] = true
		}
	})
}

// The polar plot puts 0 dB at the rim, −15 dB half-way, and a null in the middle.
func TestPolarPlace(t *testing.T) {
	var p Polar
	for _, k := range []struct{ level, theta, x, y float64 }{
		{1, 0, 0, 100}, {math.Pow(10, -0.75), math.Pi / 2, -50, 0}, {0, 1, 0, 0},
	} {
		got := p.place(vg.Point{}, 100, k.theta, k.level)
		if math.Abs(float64(got.X)-k.x) > 1e-9 || math.Abs(float64(got.Y)-k.y) > 1e-9 {
			t.Errorf("level %g at %g rad stands at %v", k.level, k.theta, got)
		}
	}
}

// A parabola of standard uncertainty 2 is 4 at ±2 of them, wherever its points are; a
// curve that rises on one side only has no end on the other.
func TestInterval(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, p := range []struct {
		value, excess []float64
		lo, hi        float64
	}{
		{[]float64{4, 7, 10, 13, 17}, []float64{9, 2.25, 0, 2.25, 12.25}, 6, 14},
		{[]float64{1, 2, 3}, []float64{0, 1, 9}, -inf, 2.5},
		{[]float64{1, 2, 3}, []float64{9, 1, 0}, 1.5, inf},
		{[]float64{1, 2, 3}, []float64{0.1, 0, -0.1}, -inf, inf},
		{[]float64{1, 2, nan, 3}, []float64{0, 1, 2, 9}, -inf, 2.5},
		{[]float64{1}, []float64{0}, -inf, inf},
		{nil, nil, nan, nan},
	} {
		lo, hi := Interval(p.value, p.excess, 4)
		same := func(a, b float64) bool {
			return a == b || math.IsNaN(a) && math.IsNaN(b) || math.Abs(a-b) < 1e-9
		}
		if !same(lo, p.lo) || !same(hi, p.hi) {
			t.Errorf("%v %v: %g to %g, want %g to %g", p.value, p.excess, lo, hi, p.lo, p.hi)
		}
	}
}
