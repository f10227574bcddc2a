//go:build linux

package main

import (
	"math"
	"path/filepath"
	"testing"

	"standoff/measure/session"
)

// The whole chain against numpy and scipy on the same recordings: deconvolution,
// gate, spectra, four models by variable projection (testdata/chain.py, which has
// the formulas anew). Both stop at their own tolerance, and the script takes the
// noise a little differently, so they agree to a small part of their ±.
func TestChainAgainstScipy(t *testing.T) {
	t.Parallel() // after all others, which may listen to an audio server
	if testing.Short() {
		t.Skip("takes some seconds")
	}
	py := python(t)
	dir := t.TempDir()
	into, sweep := filepath.Join(dir, "s"), filepath.Join(dir, "sweep.wav")
	rig := filepath.Join(configsDir(t), "virtual-cardioid.yaml")
	if code, _, e := standoff(t, "-q", "run", rig, "--into", into); code != exitDone {
		t.Fatalf("exit %d: %s", code, e)
	}
	if code, _, e := standoff(t, "-q", "sweep", rig, "--out", sweep); code != exitDone {
		t.Fatalf("exit %d: %s", code, e)
	}
	f, err := session.Open(into)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	a, err := analyse(t.Context(), f, "test")
	if err != nil {
		t.Fatal(err)
	}
	theirs := runScript(t, py, into, sweep, a)
	ours := a.fit.Best().Acoustics
	if math.Abs(ours.Beta-theirs.Mix) > 3e-4 {
		t.Errorf("mix %.5f, scipy %.5f", ours.Beta, theirs.Mix)
	}
	if math.Abs(ours.Spacing-theirs.Spacing) > 5e-5 {
		t.Errorf("spacing %.3f mm, scipy %.3f mm", 1e3*ours.Spacing, 1e3*theirs.Spacing)
	}
}
