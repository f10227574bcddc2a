package bench

import (
	"math"
	"slices"
	"testing"

	"standoff/measure"
)

func noRoom() Config {
	c := good()
	c.Room = nil
	return c
}

// spoiled makes takes 1 and 2 at 30 mm and take 1 at 100 mm, with a fault and
// without.
func spoiled(t *testing.T, f Fault) (with, without [3]*measure.Recording) {
	c := noRoom()
	clean := open(t, c)
	c.Faults = []Fault{f}
	faulty := open(t, c)
	for i, at := range []struct {
		metres float64
		number int
	}{{0.03, 1}, {0.03, 2}, {0.1, 1}} {
		req := request(sweepLike(12000), at.metres)
		req.Number = at.number
		with[i], without[i] = record(t, faulty, req), record(t, clean, req)
	}
	return with, without
}

// one is a fault that hits take 2 at 30 mm alone.
func one(t *testing.T, kind string, amount float64) (with, without *measure.Recording) {
	t.Helper()
	a, b := spoiled(t, Fault{Distance: "30mm", Take: 2, Kind: kind, Amount: amount})
	for _, i := range []int{0, 2} {
		if !slices.Equal(a[i].Mic, b[i].Mic) || !slices.Equal(a[i].Loopback, b[i].Loopback) {
			t.Errorf("%s at 30mm, take 2, also hit take %d of the three", kind, i)
		}
	}
	if slices.Equal(a[1].Mic, b[1].Mic) {
		t.Fatalf("%s did nothing", kind)
	}
	if kind != Dropout && !slices.Equal(a[1].Loopback, b[1].Loopback) {
		t.Errorf("%s hit the loopback", kind)
	}
	return a[1], b[1]
}

func TestFaultClip(t *testing.T) {
	with, without := one(t, Clip, 0)
	full := 0
	for i, v := range with.Mic {
		if v == -1 || v > 0.9999 {
			full++
		}
		if math.Abs(float64(without.Mic[i])) > 1e-3 && (v > 0) != (without.Mic[i] > 0) {
			t.Fatal("clipping changed a sign")
		}
	}
	if full < 100 {
		t.Errorf("%d samples at full scale", full)
	}
}

func TestFaultDropout(t *testing.T) {
	with, without := one(t, Dropout, 0)
	for _, pair := range [][2][]float32{{with.Mic, without.Mic}, {with.Loopback, without.Loopback}} {
		lost := 0
		for i := range pair[0] {
			if pair[0][i] != pair[1][i] {
				lost++
				if pair[0][i] != 0 || i < 6000 || i >= 6256 {
					t.Fatalf("sample %d is %g", i, pair[0][i])
				}
			}
		}
		if lost < 240 {
			t.Errorf("%d samples were lost", lost)
		}
	}
}

func TestFaultDead(t *testing.T) {
	with, _ := one(t, Dead, 0)
	// −120 dBFS, and half a step of 24 bits from the converter.
	near(t, "rms", rms(with.Mic), math.Hypot(1e-6, math.Exp2(-24)), 4e-8)
}

func TestFaultReversed(t *testing.T) {
	with, without := one(t, Reversed, 0)
	for i := range with.Mic {
		near(t, "sum", float64(with.Mic[i]+without.Mic[i]), 0, math.Exp2(-20)) // dither
	}
}

func TestFaultGain(t *testing.T) {
	with, without := one(t, Gain, 0.25)
	for i := range with.Mic {
		near(t, "remainder", float64(with.Mic[i])-0.25*float64(without.Mic[i]), 0, math.Exp2(-20))
	}
}

// 20 mm farther away is what the microphone hears there, but for noise and dither.
func TestFaultWrongDistance(t *testing.T) {
	with, _ := one(t, WrongDistance, 0.02)
	there := record(t, open(t, noRoom()), request(sweepLike(12000), 0.05))
	for i := range with.Mic {
		near(t, "remainder", float64(with.Mic[i]-there.Mic[i]), 0, 2e-4)
	}
}

// Without a distance every one is hit, without a take every one.
func TestFaultEverywhere(t *testing.T) {
	for f, want := range map[Fault][3]bool{
		{Kind: Gain, Amount: 2}:                             {true, true, true},
		{Kind: Gain, Amount: 2, Distance: "30mm"}:           {true, true, false},
		{Kind: Gain, Amount: 2, Take: 1}:                    {true, false, true},
		{Kind: Gain, Amount: 2, Distance: "100mm", Take: 2}: {false, false, false},
	} {
		with, without := spoiled(t, f)
		for i := range want {
			if hit := !slices.Equal(with[i].Mic, without[i].Mic); hit != want[i] {
				t.Errorf("%+v, take %d of three: hit is %v", f, i, hit)
			}
		}
	}
}

func TestTape(t *testing.T) {
	c := good()
	c.TapeErrors = map[string]float64{"30mm": 0.0013}
	c.Faults = []Fault{{Distance: "30mm", Take: 2, Kind: WrongDistance, Amount: 0.1}}
	b := open(t, c)
	place := measure.Distance{Label: "30mm", Metres: 0.03}
	near(t, "true distance", b.TrueDistance(place, 1), 0.03+0.0013+0.006, 1e-15)
	near(t, "in the faulty take", b.TrueDistance(place, 2), 0.1373, 1e-15)
	near(t, "elsewhere", b.TrueDistance(measure.Distance{Label: "100mm", Metres: 0.1}, 1), 0.106, 1e-15)

	c.TapeError = 0.0005
	b = open(t, c)
	const n = 2000
	var squares float64
	for i := range n {
		e := b.TapeErrorAt(string(rune(0x100 + i)))
		squares += e * e
	}
	near(t, "standard deviation", math.Sqrt(squares/n)/0.0005, 1, 4/math.Sqrt(2*n))
	if b.TrueDistance(place, 1) != b.TrueDistance(place, 3) {
		t.Error("the tape's error changes from take to take")
	}
}
