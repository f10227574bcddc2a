package fit

import (
	"runtime"
	"testing"
)

// BenchmarkJointSphere is one joint fit with the sphere body at 8 distances, from a
// scan over the whole range, on one core. No more than 2 s are wanted.
func BenchmarkJointSphere(b *testing.B) {
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	m := Model{Form: PhaseShift, Body: Sphere, Source: PistonSource}
	d := world(m, Acoustics{Beta: 0.5, Spacing: 0.027}, 1)
	for b.Loop() {
		if _, err := FitModel(d, m); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkAnalyse is everything that the analysis does with spectra: all models,
// leftovers, band, profiles, octaves, each distance alone; on one core.
func BenchmarkAnalyse(b *testing.B) {
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	d := world(Model{Form: PhaseShift, Body: Sphere, Source: PistonSource}, Acoustics{Beta: 0.5, Spacing: 0.027}, 1)
	var models []Model
	for _, body := range []string{Sphere, Open} {
		models = append(models, Model{PhaseShift, body, PistonSource, Delay}, Model{PhaseShift, body, PistonSource, LowPass}, Model{Summed, body, PistonSource, ""})
	}
	for b.Loop() {
		a, err := Analyse(d, models, "", nil)
		if err != nil {
			b.Fatal(err)
		}
		a.Result()
	}
}
