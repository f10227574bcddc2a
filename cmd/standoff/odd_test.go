package main

import (
	"path/filepath"
	"slices"
	"testing"

	"standoff/measure"
	"standoff/measure/rig"
)

// A distance that does not belong is found, named and kept from the result; the
// others keep no flag. An error of 12 mm is already heard in the arrival; smaller
// ones, and all of them without a common clock, only the fit can tell.
func TestOddDistances(t *testing.T) {
	t.Parallel() // after all others, which may listen to an audio server
	for _, c := range []struct {
		name, at string
		fault    rig.VirtualFault
		free     bool
		flag     measure.Flag
	}{
		{"12 mm, common clock", "90mm", rig.VirtualFault{Kind: "wrong-distance", Amount: 0.012}, false, measure.DistanceMismatch},
		{"5 mm, common clock", "63mm", rig.VirtualFault{Kind: "wrong-distance", Amount: 0.005}, false, measure.DistanceMismatch},
		{"12 mm, free clock", "90mm", rig.VirtualFault{Kind: "wrong-distance", Amount: 0.012}, true, measure.DistanceMismatch},
		{"5 mm at the nearest, free clock", "30mm", rig.VirtualFault{Kind: "wrong-distance", Amount: 0.005}, true, measure.DistanceMismatch},
		{"0.8 dB", "140mm", rig.VirtualFault{Kind: "gain", Amount: 1.096}, false, measure.LevelJump},
		{"-1.5 dB at the farthest", "600mm", rig.VirtualFault{Kind: "gain", Amount: 0.841}, false, measure.LevelJump},
		{"6 dB", "40mm", rig.VirtualFault{Kind: "gain", Amount: 2}, false, measure.LevelJump},
		{"nothing, free clock", "", rig.VirtualFault{}, true, ""},
	} {
		t.Run(c.name, func(t *testing.T) {
			w := worlds[0]
			r := w.meet(t, 5)
			if c.free {
				r.Audio.Clock = "free"
			}
			for _, d := range r.Distances {
				if d.Label == c.at {
					c.fault.Distance = d.Label
					r.Virtual.Faults = append(r.Virtual.Faults, c.fault)
				}
			}
			a := measured(t, r, filepath.Join(t.TempDir(), "s"))
			for _, d := range a.result.Distances {
				want := []measure.Flag{}
				if c.free {
					want = append(want, measure.Unsynchronised)
				}
				if d.Label == c.at {
					want = append(want, c.flag)
				}
				if !slices.Equal(d.Flags, want) {
					t.Errorf("%s has the flags %v, want %v", d.Label, d.Flags, want)
				}
			}
			for _, warning := range a.result.Warnings {
				t.Logf("%s: %s", warning.Code, warning.Text)
			}
			mix, gap := a.result.Capsule.GradientFraction, a.result.Capsule.PortSpacing
			if !mix.Resolved || !gap.Resolved {
				t.Fatal("not resolved")
			}
			t.Logf("mix %+.4f ± %.4f, spacing %+.2f ± %.2f mm", *mix.Value-w.beta, *mix.Expanded, 1e3*(*gap.Value-w.spacing), 1e3**gap.Expanded)
			if off := *mix.Value - w.beta; off > *mix.Expanded || off < -*mix.Expanded {
				t.Errorf("the mix is off by %.4f, ± %.4f", off, *mix.Expanded)
			}
			if off := *gap.Value - w.spacing; off > *gap.Expanded || off < -*gap.Expanded {
				t.Errorf("the spacing is off by %.2f mm, ± %.2f mm", 1e3*off, 1e3**gap.Expanded)
			}
		})
	}
}
