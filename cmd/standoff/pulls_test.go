package main

import (
	"context"
	"fmt"
	"math"
	"os"
	"testing"

	"standoff/measure"
	"standoff/measure/rig"
	"standoff/measure/session"
)

func TestPulls(t *testing.T) {
	if os.Getenv("PULLS") == "" {
		t.Skip()
	}
	raw, _ := os.ReadFile("../../configs/" + os.Getenv("PULLS"))
	var b, d []float64
	for seed := range 12 {
		r, err := rig.Parse("x.yaml", raw)
		if err != nil {
			t.Fatal(err)
		}
		r.Virtual.Seed = uint64(seed + 100)
		rng := func(s float64) float64 { return s }
		_ = rng
		r.Virtual.TapeErrors = nil
		r.Virtual.TapeError = 0.0005
		n := func(k int) float64 { return gaussFor(seed*7 + k) }
		r.Virtual.Capsule.Setback = r.Capsule.Setback + 0.001*n(1)
		r.Virtual.Source.Radius = r.Source.Radius + 0.001*n(2)
		r.Air.Temperature += 0
		r.Virtual.Room.Size[0] += 0.3 * n(3)
		rec, err := openRecorder(context.Background(), r)
		if err != nil {
			t.Fatal(err)
		}
		f, err := session.OpenOrCreate(t.TempDir()+"/s", r, session.Options{})
		if err != nil {
			t.Fatal(err)
		}
		tk, err := newTaker(&env{ctx: context.Background(), voice: &voice{out: os.Stderr, err: os.Stderr, quiet: true}}, f, rec)
		if err != nil {
			t.Fatal(err)
		}
		tk.stand = atOnce{}
		if err := tk.all(r.Distances); err != nil {
			t.Fatal(err)
		}
		a, err := analyse(context.Background(), f, "x")
		if err != nil {
			t.Fatal(err)
		}
		c := a.result.Capsule
		tr := r.Virtual.Capsule
		line := fmt.Sprintf("%d %s/%s χ² %.2f unexpl %.4f alike %.1f gate %.1f", seed, c.Model, c.Body, a.result.Fit.ReducedChiSquare, a.result.Fit.Unexplained, a.result.Fit.Alike, 1e3*a.gate.Length)
		if c.GradientFraction.Resolved {
			u := *c.GradientFraction.Expanded / 2
			e := a.fit.Best().Acoustics.Beta - tr.GradientFraction
			b = append(b, e/u)
			line += fmt.Sprintf("  β %+.4f ± %.4f pull %+.2f", e, 2*u, e/u)
		}
		if c.PortSpacing.Resolved {
			u := *c.PortSpacing.Expanded / 2
			e := *c.PortSpacing.Value - tr.PortSpacing
			d = append(d, e/u)
			line += fmt.Sprintf("  d %+.2f ± %.2f mm pull %+.2f", 1e3*e, 2e3*u, e/u)
		}
		t.Log(line)
		f.Close()
	}
	rms := func(x []float64) float64 {
		var s float64
		for _, v := range x {
			s += v * v
		}
		return math.Sqrt(s / float64(len(x)))
	}
	t.Logf("rms pulls β %.2f (median %.2f)  d %.2f (median %.2f)", rms(b), measure.Median(b), rms(d), measure.Median(d))
}

func gaussFor(k int) float64 {
	u := math.Mod(float64(k)*0.61803398875+0.137, 1)
	v := math.Mod(float64(k)*0.7548776662+0.41, 1)
	return math.Sqrt(-2*math.Log(u)) * math.Cos(2*math.Pi*v)
}
