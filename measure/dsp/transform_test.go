package dsp

import (
	"encoding/csv"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// reference reads a table of testdata/reference/dsp, which scipy wrote; words
// become NaN.
func reference(t testing.TB, file string) [][]float64 {
	t.Helper()
	f, err := os.Open(filepath.Join("..", "..", "testdata", "reference", "dsp", file))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out [][]float64
	for _, row := range rows[1:] {
		values := make([]float64, len(row))
		for i, text := range row {
			if values[i], err = strconv.ParseFloat(text, 64); err != nil {
				values[i] = math.NaN()
			}
		}
		out = append(out, values)
	}
	return out
}

const referenceRate = 8000

func referenceSignal(t testing.TB) []float64 {
	var x []float64
	for _, row := range reference(t, "signal.csv") {
		x = append(x, row[0])
	}
	return x
}

func TestDTFTAgainstScipy(t *testing.T) {
	x := referenceSignal(t)
	for _, row := range reference(t, "dtft.csv") {
		got := DTFT(x, referenceRate, 37.25, row[:1])[0]
		if want := complex(row[1], row[2]); cmplx.Abs(got-want) > 1e-8 {
			t.Errorf("%g Hz: %.10g, scipy %.10g", row[0], got, want)
		}
	}
}

// On the bins of a transform the DTFT is the transform.
func TestDTFTAgainstFFT(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for _, n := range []int{1, 2, 63, 64, 65, 1000, 20000} {
		x := make([]float64, n)
		for i := range x {
			x[i] = rng.NormFloat64()
		}
		var hz []float64
		for i := 0; i <= n/2; i += max(n/37, 1) {
			hz = append(hz, 48000*float64(i)/float64(n))
		}
		coef := fourier.NewFFT(n).Coefficients(nil, x)
		for i, got := range DTFT(x, 48000, 0, hz) {
			if want := coef[i*max(n/37, 1)]; cmplx.Abs(got-want) > 1e-10*math.Sqrt(float64(n)) {
				t.Errorf("%d samples, %g Hz: %v, FFT %v", n, hz[i], got, want)
			}
		}
	}
}

func TestPowerDensityAgainstScipy(t *testing.T) {
	x := referenceSignal(t)
	for _, row := range reference(t, "welch.csv") {
		got := PowerDensity(x, referenceRate, int(row[0]), row[1:2])[0]
		if math.Abs(got/row[2]-1) > 1e-8 {
			t.Errorf("segments of %g, %g Hz: %.10g, scipy %.10g", row[0], row[1], got, row[2])
		}
	}
}

// White noise of variance σ² has the density σ² at every frequency, and a
// signal shorter than a segment has none that could be told.
func TestPowerDensityOfWhiteNoise(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 4))
	x := make([]float64, 200000)
	for i := range x {
		x[i] = 7 + 0.3*rng.NormFloat64()
	}
	hz := []float64{100, 1234.5, 5000, 12000, 23000}
	for i, p := range PowerDensity(x, 48000, 256, hz) {
		near(t, "density at "+strconv.Itoa(int(hz[i])), p/0.09, 1, 0.15) // 1560 segments: ±3 %
	}
	if PowerDensity(x[:100], 48000, 101, hz) != nil || PowerDensity(x, 48000, 4, hz) != nil {
		t.Error("a density from less than a segment")
	}
}

func TestEnvelopeAgainstScipy(t *testing.T) {
	got := Envelope(referenceSignal(t), referenceRate, 600, 1500)
	want := reference(t, "envelope.csv")
	if len(got) != len(want) {
		t.Fatalf("%d samples, want %d", len(got), len(want))
	}
	for i, row := range want {
		if math.Abs(got[i]-row[0]) > 1e-9 {
			t.Fatalf("sample %d: %.12g, scipy %.12g", i, got[i], row[0])
		}
	}
}

// A tone burst with a smooth envelope has that envelope, and PeakAt finds its
// fractional middle.
func TestEnvelopeOfATone(t *testing.T) {
	const middle, width = 700.3, 60.0
	x := make([]float64, 1400)
	shape := func(i int) float64 { return math.Exp(-math.Pow((float64(i)-middle)/width, 2)) }
	for i := range x {
		x[i] = shape(i) * math.Sin(2*math.Pi*3000/48000*float64(i)+1)
	}
	env := Envelope(x, 48000, 1000, 6000)
	best := 0
	for i, v := range env {
		near(t, "envelope", v, shape(i), 1e-3)
		if v > env[best] {
			best = i
		}
	}
	near(t, "middle", PeakAt(env, best), middle, 0.01)
}

func TestPeakAt(t *testing.T) {
	parabola := make([]float64, 9)
	for i := range parabola {
		parabola[i] = 3 - math.Pow(float64(i)-4.3, 2)
	}
	near(t, "vertex", PeakAt(parabola, 4), 4.3, 1e-12)
	near(t, "first", PeakAt(parabola, 0), 0, 0)
	near(t, "last", PeakAt(parabola, 8), 8, 0)
	near(t, "flat", PeakAt(make([]float64, 5), 2), 2, 0)
}

func TestWindowsAgainstScipy(t *testing.T) {
	hann, gate := Hann(48), Gate(32, 7, 16)
	seen := 0
	for _, row := range reference(t, "windows.csv") {
		i, w := int(row[3]), gate
		if row[1] == 48 {
			w = hann
		}
		near(t, "window", w[i], row[4], 1e-11)
		seen++
	}
	if seen != 48+32 {
		t.Errorf("%d samples compared", seen)
	}
}

// Closed forms: Σ hann = n/2, Σ hann² = 3n/8 (F. J. Harris, Proc. IEEE 66, 51
// (1978), from memory: equivalent noise bandwidth 1.5 bins); half a cosine period
// over m samples sums to m/2, its square to 3m/8.
func TestWindowSums(t *testing.T) {
	for _, n := range []int{8, 50, 1024} {
		var sum float64
		for _, v := range Hann(n) {
			sum += v
		}
		near(t, "sum of Hann", sum, float64(n)/2, 1e-9)
		near(t, "squares of Hann", SumSquares(Hann(n)), 3*float64(n)/8, 1e-9)
		near(t, "noise bandwidth", float64(n)*SumSquares(Hann(n))/(sum*sum), 1.5, 1e-9)
	}
	for _, p := range [][3]int{{100, 20, 40}, {60, 20, 40}, {10, 0, 0}, {30, 2, 5}} {
		n, rise, fall := p[0], p[1], p[2]
		w := Gate(n, rise, fall)
		var sum float64
		for _, v := range w {
			sum += v
		}
		near(t, "sum of a gate", sum, float64(n)-float64(rise+fall)/2, 1e-9)
		near(t, "squares of a gate", SumSquares(w), float64(n)-5*float64(rise+fall)/8, 1e-9)
	}
}
