package lsq_test

import (
	"math"
	"slices"
	"testing"

	"standoff/fit/lsq"
)

// A parameter that enters only below the rounding error of the residuals has
// no effect, although differences of it are not exactly zero.
func TestRoundingIsNoEffect(t *testing.T) {
	p := line([]float64{1, 3, 2, 5, 4})
	with := lsq.Problem{M: 5, Residuals: func(dst, x []float64) {
		p.Residuals(dst, x[:2])
		for i := range dst {
			dst[i] += 1e-19 * x[2] * float64(i*i)
			dst[i] = (dst[i] + 1e3*x[2]) - 1e3*x[2] // leaves noise
		}
	}}
	r := solve(t, with, []float64{0, 0, 1e-3}, lsq.Settings{})
	if r.Status != lsq.NoEffect || !slices.Equal(r.Insensitive, []int{2}) {
		t.Errorf("%v, insensitive %v", r.Status, r.Insensitive)
	}
	wantClose(t, "b", r.X[1], 0.8, 1e-8)
}

// With the sizes of the parameters known an effect of 1e-12 of another's is none.
func TestScaleJudgesEffect(t *testing.T) {
	p := lsq.Problem{M: 2, Residuals: func(dst, x []float64) { dst[0], dst[1] = x[0]-3, 1e-12*x[1] }}
	start := []float64{1, 1}
	r := solve(t, p, start, lsq.Settings{Scale: []float64{1, 1}})
	if r.Status != lsq.NoEffect || !slices.Equal(r.Insensitive, []int{1}) {
		t.Errorf("size 1: %v, insensitive %v", r.Status, r.Insensitive)
	}
	r = solve(t, p, start, lsq.Settings{Scale: []float64{1, 1e12}})
	if !r.Status.Good() || len(r.Insensitive) != 0 {
		t.Errorf("size 1e12: %v, insensitive %v", r.Status, r.Insensitive)
	}
}

// A start that happens to be next to zero does not make differences useless.
func TestStartNextToZero(t *testing.T) {
	r := solve(t, line([]float64{1, 3, 2, 5, 4}), []float64{1e-20, -1e-20}, lsq.Settings{})
	wantClose(t, "a", r.X[0], 1.4, 1e-9)
	wantClose(t, "b", r.X[1], 0.8, 1e-9)
	if !r.Status.Good() {
		t.Errorf("status %v", r.Status)
	}
}

// At the edge of the region where r is finite differences look inwards.
func TestDifferencesBesideNaN(t *testing.T) {
	for _, side := range []float64{1, -1} {
		p := lsq.Problem{M: 1, Residuals: func(dst, x []float64) {
			if dst[0] = math.Exp(side*x[0]) - math.E; side*x[0] > 2 {
				dst[0] = math.Inf(1)
			}
		}}
		r := solve(t, p, []float64{side * 2}, lsq.Settings{})
		wantClose(t, "x", r.X[0], side, 1e-9)
		if !r.Status.Good() {
			t.Errorf("status %v", r.Status)
		}
	}
}

// A start without finite neighbours has no derivative.
func TestIsolatedStart(t *testing.T) {
	p := lsq.Problem{M: 1, Residuals: func(dst, x []float64) {
		if dst[0] = 1; x[0] != 3 {
			dst[0] = math.NaN()
		}
	}}
	if _, err := lsq.Solve(p, []float64{3}, lsq.Settings{}); err == nil {
		t.Error("no error")
	}
}
