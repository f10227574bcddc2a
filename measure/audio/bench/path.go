package bench

import (
	"context"
	"fmt"
	"math"
)

// referenceDistance is where a far response of 1 comes back at its own level.
const referenceDistance = 0.03

// pathKey says what a transfer function depends on, besides the configuration.
type pathKey struct {
	distance float64
	rate, n  int
}

// paths keeps transfer functions, the oldest first.
type paths struct {
	keys []pathKey
	kept map[pathKey][]complex128
	bins int // in all
}

// binsKept bounds the memory to some 64 MB.
const binsKept = 4 << 20

func (p *paths) add(key pathKey, h []complex128) {
	for len(p.keys) > 0 && p.bins+len(h) > binsKept {
		p.bins -= len(p.kept[p.keys[0]])
		delete(p.kept, p.keys[0])
		p.keys = p.keys[1:]
	}
	if p.kept == nil {
		p.kept = map[pathKey][]complex128{}
	}
	p.kept[key] = h
	p.keys = append(p.keys, key)
	p.bins += len(h)
}

// path is the transfer function from loudspeaker voltage to converter for the
// capsule's centre at r, in the bins of what is played.
func (b *Bench) path(ctx context.Context, p *played, r float64) ([]complex128, error) {
	key := pathKey{r, p.rate, p.fft.Len()}
	if h, ok := b.paths.kept[key]; ok {
		return h, nil
	}
	rate, n := float64(p.rate), p.fft.Len()
	step := rate / float64(n)
	at := b.cfg.Capsule.newField(n/2 + 1)
	b.addDirect(at, r, step)
	if err := b.addRoom(ctx, at, r, rate, p.fft); err != nil {
		return nil, err
	}
	h := at.front // it is read before it is written
	for i := 1; i < len(h); i++ {
		f := float64(i) * step
		k := 2 * math.Pi * f / b.cfg.SpeedOfSound
		h[i] = referenceDistance * b.cfg.Capsule.output(f, k, at.at(i)) * b.electric(f)
	}
	h[0] = 0 // no microphone transmits a level
	h[n/2] = complex(real(h[n/2]), 0)
	b.paths.add(key, h)
	return h, nil
}

// How near the capsule's front may come to the source, m and relative to its
// reach, and how far it may go in a free field.
const (
	nearest         = 0.1e-3
	nearestRelative = 0.01
	farthest        = 1000.0
)

// fits refuses places at which the capsule would stand in the loudspeaker or in a
// wall. Written so that NaN is refused as well.
func (b *Bench) fits(r float64) error {
	front := b.cfg.Capsule.reach()
	if !(r-front >= math.Max(0.99*nearest, nearestRelative*front)) {
		return fmt.Errorf("virtual bench: with its centre at %.1f mm the capsule, which reaches %.1f mm ahead, stands in the loudspeaker", 1e3*r, 1e3*front)
	}
	if r > farthest {
		return fmt.Errorf("virtual bench: %.4g m is farther than %g m", r, farthest)
	}
	if room := b.cfg.Room; room != nil && !room.holds(r) {
		return fmt.Errorf("virtual bench: %.2f m do not fit into the room: at most %.2f m do", r, room.longest())
	}
	return nil
}
