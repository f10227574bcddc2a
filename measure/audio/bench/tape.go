package bench

import (
	"fmt"
	"hash/fnv"
	"math/rand/v2"

	"standoff/measure"
)

// TrueDistance is the distance in m from the source's reference plane to the
// capsule's centre in one take: nominal distance, the tape's error at this
// label, the setback behind the grille, and what a fault adds.
func (b *Bench) TrueDistance(d measure.Distance, take int) float64 {
	r := d.Metres + b.TapeErrorAt(d.Label) + b.cfg.Capsule.Setback
	for _, f := range b.faults(d.Label, take) {
		if f.Kind == WrongDistance {
			r += f.Amount
		}
	}
	return r
}

// TapeErrorAt is the true minus the nominal distance of a label in m: the error
// given for it and the random one. All takes at a label share it, because the
// stand stays where it is between them.
func (b *Bench) TapeErrorAt(label string) float64 {
	random := b.random("tape", label, 0).NormFloat64()
	return b.cfg.TapeErrors[label] + b.cfg.TapeError*random
}

// faults that hit a take.
func (b *Bench) faults(label string, take int) []Fault {
	var out []Fault
	for _, f := range b.cfg.Faults {
		if (f.Distance == "" || f.Distance == label) && (f.Take == 0 || f.Take == take) {
			out = append(out, f)
		}
	}
	return out
}

// random is a source of random numbers for one purpose in one take. The same
// seed, purpose, label and number give the same numbers, in whatever order the
// takes are made.
func (b *Bench) random(purpose, label string, take int) *rand.Rand {
	h := fnv.New64a()
	fmt.Fprintf(h, "%s\x00%s\x00%d", purpose, label, take)
	return rand.New(rand.NewPCG(b.cfg.Seed, h.Sum64()))
}
