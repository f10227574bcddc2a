package dsp

import (
	"math"
	"testing"
)

// Noise below 0.44 of the rate, at new rates, is what scipy's polyphase filter makes
// of it.
func TestResampleAgainstScipy(t *testing.T) {
	var x []float32
	for _, row := range reference(t, "band.csv") {
		x = append(x, float32(row[0]))
	}
	r := NewResampler()
	seen := map[float64]int{}
	for _, row := range reference(t, "resampled.csv") {
		up, down, i := row[0], row[1], row[2]
		y, err := r.Read(x, i*down/up, down/up, 1)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(float64(y[0])-row[3]) > 3e-5 { // of an rms of 0.9
			t.Fatalf("%g/%g, sample %g: %.7g, scipy %.7g", up, down, i, y[0], row[3])
		}
		seen[up/down]++
	}
	if len(seen) != 4 {
		t.Errorf("%d ratios of 4 were looked at", len(seen))
	}
}

// tones are sines of amplitude 1, f in parts of the rate.
func tones(n int, f ...float64) []float32 {
	x := make([]float32, n)
	for i := range x {
		for _, g := range f {
			x[i] += float32(math.Sin(2 * math.Pi * g * float64(i)))
		}
	}
	return x
}

// A sine is known between its samples. What a lower rate cannot hold is gone.
func TestResampleSines(t *testing.T) {
	r := NewResampler()
	for _, c := range []struct{ f, step, gain float64 }{
		{0.01, 1.0002, 1}, {0.3, 0.9998, 1}, {0.45, 1.0002, 1}, {0.3, 0.5, 1}, {0.2, 2, 1},
		{0.3, 2, 0}, {0.45, 2, 0}, {0.1, 4, 1}, {0.2, 4, 0}, {0.47 / 2, 2, 1}, {0.53 / 2, 2, 0},
	} {
		y, err := r.Read(tones(4000, c.f), 1000.3, c.step, 400)
		if err != nil {
			t.Fatal(err)
		}
		for i, got := range y {
			want := c.gain * math.Sin(2*math.Pi*c.f*(1000.3+float64(i)*c.step))
			if math.Abs(float64(got)-want) > 1.5e-5 {
				t.Fatalf("%g of the rate, step %g, sample %d: %.7g, want %.7g", c.f, c.step, i, got, want)
			}
		}
	}
}

func TestResampleEdges(t *testing.T) {
	r, x := NewResampler(), tones(1000, 0.1)
	same, err := r.Read(x, 0, 1, len(x))
	if err != nil {
		t.Fatal(err)
	}
	for i := range x {
		if math.Abs(float64(same[i]-x[i])) > 1e-6 {
			t.Fatalf("sample %d changed at the same rate", i)
		}
	}
	outside, _ := r.Read(x, -1e6, 1, 10)
	beyond, _ := r.Read(x, 1e9, 1, 10)
	for i := range outside {
		if outside[i] != 0 || beyond[i] != 0 {
			t.Fatal("sound where there was none")
		}
	}
	for _, bad := range []float64{0, -1, 1e-3, 100, math.NaN(), math.Inf(1)} {
		if _, err := r.Read(x, 0, bad, 10); err == nil {
			t.Errorf("step %g was taken", bad)
		}
	}
	if _, err := r.Read(x, math.NaN(), 1, 10); err == nil {
		t.Error("a start that is no number was taken")
	}
	if y, err := r.Read(nil, 0, 1, 3); err != nil || len(y) != 3 {
		t.Errorf("of nothing: %v, %v", y, err)
	}
}
