package bench

import (
	"context"
	"encoding/csv"
	"math"
	"math/cmplx"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"standoff/measure"
	"standoff/measure/audio"
)

// plain is a sealed capsule in the open, a point source and nothing else: it gives
// back the excitation, 30/r (in mm) as large, later by r/c.
func plain() Config {
	return Config{SpeedOfSound: 343, Capsule: Capsule{Form: Summed, Body: Open, PortSpacing: 0.02, Sensitivity: 1}}
}

func open(t testing.TB, c Config) *Bench {
	t.Helper()
	b, err := New(c)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func request(excitation []float32, metres float64) audio.Request {
	d := measure.Distance{Label: strconv.FormatFloat(1000*metres, 'g', -1, 64) + "mm", Metres: metres}
	return audio.Request{Excitation: excitation, SampleRate: 48000, Distance: d, Number: 1}
}

func record(t testing.TB, b *Bench, req audio.Request) *measure.Recording {
	t.Helper()
	rec, err := b.Record(context.Background(), req)
	if err != nil {
		t.Fatal(err)
	}
	return rec
}

// transfer is the path of a bench for its capsule's centre at r: bins of 1 Hz up to
// 24 kHz.
func transfer(t testing.TB, c Config, r float64) []complex128 {
	t.Helper()
	b := open(t, c)
	if err := b.fits(r); err != nil {
		t.Fatal(err)
	}
	h, err := b.path(context.Background(), b.play([]float32{1}, 48000, 48000), r)
	if err != nil {
		t.Fatal(err)
	}
	return h
}

func decibels(h complex128) float64 { return 20 * math.Log10(cmplx.Abs(h)) }

func near(t testing.TB, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s: %.9g, want %.9g ± %.2g", what, got, want, tolerance)
	}
}

func nearComplex(t testing.TB, what string, got, want complex128, tolerance float64) {
	t.Helper()
	if !(cmplx.Abs(got-want) <= tolerance) {
		t.Errorf("%s: %.9g, want %.9g, apart by %.2g > %.2g", what, got, want, cmplx.Abs(got-want), tolerance)
	}
}

// table is a reference table without its header.
func table(t testing.TB, name string) [][]string {
	t.Helper()
	f, err := os.Open(filepath.Join("..", "..", "..", "testdata", "reference", "sphere", name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) < 2 {
		t.Fatalf("%s is empty", name)
	}
	return rows[1:]
}

func numbers(t testing.TB, fields []string) []float64 {
	t.Helper()
	out := make([]float64, len(fields))
	for i, s := range fields {
		v, err := strconv.ParseFloat(s, 64)
		if err != nil {
			t.Fatal(err)
		}
		out[i] = v
	}
	return out
}

// sine of amplitude a with whole periods in n samples.
func sine(n, periods int, a float64) []float32 {
	x := make([]float32, n)
	for i := range x {
		x[i] = float32(a * math.Sin(2*math.Pi*float64(i*periods%n)/float64(n)))
	}
	return x
}

// tone is the complex amplitude of the given number of periods in x.
func tone(x []float32, periods int) complex128 {
	var sum complex128
	for i, v := range x {
		sum += complex(float64(v), 0) * cmplx.Rect(1, -2*math.Pi*float64(i*periods%len(x))/float64(len(x)))
	}
	return sum * complex(2/float64(len(x)), 0)
}

func rms(x []float32) float64 {
	var s float64
	for _, v := range x {
		s += float64(v) * float64(v)
	}
	return math.Sqrt(s / float64(len(x)))
}
