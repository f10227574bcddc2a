package main

import (
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"

	"standoff/measure"
	"standoff/measure/rig"
)

// roomBench is a bench of which next to everything is drawn by chance.
type roomBench struct {
	rig           *rig.Rig
	beta, spacing float64
	text          string
}

// anyRoom draws a bench: pattern from subcardioid to figure-8, spacing 15 to 40 mm,
// source 8 to 25 mm known to ±1 mm, walls that reflect 0.3 to 0.75, 45 to 65 dB of
// signal over noise in the middle of the list, tape ±0.5 mm, setback ±1 mm, a rear
// path that delays or is a low-pass, a body or none.
func anyRoom(t *testing.T, seed uint64) roomBench {
	t.Helper()
	rng := rand.New(rand.NewPCG(seed, 23))
	between := func(a, b float64) float64 { return a + (b-a)*rng.Float64() }
	r, err := rig.Parse("rooms.yaml", []byte(studyRig))
	if err != nil {
		t.Fatal(err)
	}
	v := r.Virtual
	v.Seed = seed
	out := roomBench{rig: r, beta: between(0.25, 1), spacing: between(0.015, 0.04)}
	c := &v.Capsule
	c.GradientFraction, c.PortSpacing = out.beta, out.spacing
	c.Form, c.Body, c.Rear = "phase-shift", []string{"sphere", "open"}[rng.IntN(2)], []string{"delay", "low-pass"}[rng.IntN(2)]
	r.Source.Radius = between(0.008, 0.025)
	v.Source.Radius = r.Source.Radius + r.Source.RadiusUncertainty*rng.NormFloat64()
	c.Setback = r.Capsule.Setback + r.Capsule.SetbackUncertainty*rng.NormFloat64()
	v.TapeError = r.DistanceUncertainty
	v.Room.Size = [3]float64{between(3, 7), between(2.5, 5), between(2.2, 3)}
	v.Room.Reflection = between(0.3, 0.75)
	snr := between(45, 65)
	const middle = 0.03 / 0.226 // pressure at 220 mm, see package bench
	v.Noise = r.Sweep.Level * c.Sensitivity * middle / math.Sqrt2 * math.Pow(10, -snr/20)
	out.text = fmt.Sprintf("%s %-8s β %.3f d %.1f mm, source %.1f mm, room %.1f×%.1f×%.1f m of %.2f, %.0f dB",
		c.Body, c.Rear, out.beta, 1e3*out.spacing, 1e3*r.Source.Radius, v.Room.Size[0], v.Room.Size[1], v.Room.Size[2], v.Room.Reflection, snr)
	return out
}

func TestRooms(t *testing.T) {
	n := 3
	if s := os.Getenv("ROOMS"); s != "" {
		fmt.Sscan(s, &n)
	}
	var all tally
	for seed := range n {
		t.Run(fmt.Sprint(seed+1), func(t *testing.T) { all.add(t, anyRoom(t, uint64(seed)+1)) })
	}
	t.Logf("mix held %d of %d, rms pull %.2f, median error %.4f; spacing held %d of %d, rms pull %.2f",
		all.mixHeld, len(all.mixPull), rms(all.mixPull), measure.Median(all.mixErr), all.gapHeld, len(all.gapPull), rms(all.gapPull))
}

// tally is what many benches say together.
type tally struct {
	mixErr, mixPull, gapPull []float64
	mixHeld, gapHeld         int
}

func (all *tally) add(t *testing.T, b roomBench) {
	a := measured(t, b.rig, filepath.Join(t.TempDir(), "s"))
	c := a.result.Capsule
	line := fmt.Sprintf("%s: gate %.1f ms, unexpl %.4f, room %.4f, to %.0f, alike %.1f, %s/%s/%s", b.text, 1e3*a.gate.Length, a.result.Fit.Unexplained, a.result.Fit.Room, a.result.Fit.To, a.result.Fit.Alike, c.Model, c.Body, c.Rear)
	if !c.GradientFraction.Resolved {
		t.Error(line, "MIX NOT RESOLVED")
		return
	}
	off, u := *c.GradientFraction.Value-b.beta, *c.GradientFraction.Expanded
	line += fmt.Sprintf(" mix %+.4f ± %.4f (%.2f)", off, u, off/u)
	all.mixErr, all.mixPull = append(all.mixErr, math.Abs(off)), append(all.mixPull, off/u*2)
	if math.Abs(off) <= u {
		all.mixHeld++
	} else {
		line += " MISS"
	}
	if c.PortSpacing.Resolved {
		off, u := *c.PortSpacing.Value-b.spacing, *c.PortSpacing.Expanded
		line += fmt.Sprintf(" gap %+.2f ± %.2f (%.2f)", 1e3*off, 1e3*u, off/u)
		all.gapPull = append(all.gapPull, off/u*2)
		if math.Abs(off) <= u {
			all.gapHeld++
		} else {
			line += " MISS"
		}
	} else {
		line += " gap not resolved"
	}
	t.Log(line)
	for _, d := range a.result.Distances {
		if len(d.Flags) > 0 {
			t.Errorf("%s: %s has the flags %v: %v", b.text, d.Label, d.Flags, a.result.Warnings)
		}
	}
}
