package fit

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// Better is a list of distances of the same length that holds more: it makes the mean
// of ln u(mix) + ln u(spacing) over the capsules least, between two limits in m, with
// places that can be set with a tape and with neighbours at least a tenth apart. Noise
// is that of the dataset's nearest given place. It is found by exchanging one place at a
// time, from the list as it is, until no exchange helps; the same every time.
func (d *Dataset) Better(capsules []Capsule, nearest, farthest float64) []float64 {
	places := politePlaces(nearest, farthest)
	if len(places) < len(d.Points) || len(capsules) == 0 {
		return nil
	}
	var sheets []*sheet
	for _, c := range capsules {
		sheets = append(sheets, d.sheet(c, places))
	}
	score := func(list []int) float64 {
		var sum float64
		for _, s := range sheets {
			sum += s.score(list)
		}
		return sum
	}
	list := closest(places, d.Points)
	exchange(list, len(places), places, score)
	out := make([]float64, len(list))
	for i, at := range list {
		out[i] = places[at]
	}
	slices.Sort(out)
	return out
}

// Capsule is one that a list is meant for.
type Capsule struct {
	Model     Model
	Acoustics Acoustics
}

// politePlaces are places that people set: whole steps of 5 mm up to 60, of 10 up to
// 200, of 20 up to 400, of 50 beyond, in m, and the limits themselves.
func politePlaces(nearest, farthest float64) []float64 {
	out := []float64{nearest}
	add := func(from, to, step int) {
		for mm := from; mm < to; mm += step {
			if r := float64(mm) / 1e3; r > nearest*1.02 && r < farthest*0.98 {
				out = append(out, r)
			}
		}
	}
	add(5, 60, 5)
	add(60, 200, 10)
	add(200, 400, 20)
	add(400, 5001, 50)
	return append(out, farthest)
}

// apart is the least ratio of neighbours.
const apart = 1.1

// closest are distinct places near those of a list.
func closest(places []float64, points []Point) []int {
	var out []int
	for _, p := range points {
		best := -1
		for i, r := range places {
			if !slices.Contains(out, i) && (best < 0 || math.Abs(math.Log(r/p.Nominal)) < math.Abs(math.Log(places[best]/p.Nominal))) {
				best = i
			}
		}
		out = append(out, best)
	}
	return out
}

// exchange replaces one place at a time by the best that keeps its distance from the
// others.
func exchange(list []int, n int, places []float64, score func([]int) float64) {
	best := score(list)
	for range 12 {
		changed := false
		for i, was := range list {
			at := was
			for c := range n {
				list[i] = c
				if !fits(list, i, places) {
					continue
				}
				if s := score(list); s < best-1e-9 {
					best, at, changed = s, c, true
				}
			}
			list[i] = at
		}
		if !changed {
			return
		}
	}
}

func fits(list []int, i int, places []float64) bool {
	for k, other := range list {
		if k != i {
			a, b := places[other], places[list[i]]
			if math.Max(a, b) < apart*math.Min(a, b) {
				return false
			}
		}
	}
	return true
}

// sheet holds for every place and frequency what a joint fit needs of it, so that lists
// can be tried quickly: the response and its derivatives by mix, spacing, setback,
// radius and speed of sound, over the standard deviation of one quadrature.
type sheet struct {
	h     [][]complex128
	g     [5][][]complex128
	prior [5]float64 // 1/u², of setback, radius and speed
	tape  float64    // 1/u²
	hz    int
}

func (d *Dataset) sheet(c Capsule, places []float64) *sheet {
	work := *d
	work.Points = nil
	for _, r := range places {
		work.Points = append(work.Points, Point{Label: fmt.Sprint(r), Nominal: r, Tape: d.typicalTape(), Variance: d.Points[0].Variance})
	}
	p := newSeparable(work.ideal(c.Model, c.Acoustics), c.Model)
	x := p.start(c.Acoustics.Beta, c.Acoustics.Spacing)
	p.evaluate(x)
	s := &sheet{h: p.h, hz: len(d.Hz), tape: 1 / square(d.typicalTape())}
	s.g[0], s.g[1], s.g[2] = p.byMix(x), p.derivative(x, p.at.spacing, 2e-8), p.derivative(x, p.at.setback, 2e-8)
	if c.Model.Source == PistonSource {
		s.g[3] = p.derivative(x, p.at.radius, 2e-8)
	}
	s.g[4] = p.bySpeed(x, s.g[2], s.g[1], s.g[3])
	if s.g[3] == nil {
		s.g[3] = p.grid()
	}
	s.prior = [5]float64{0, 0, 1 / square(d.SetbackUncertainty), 1 / square(d.RadiusUncertainty), 1 / square(d.SpeedUncertainty)}
	return s
}

// score is ln u(mix) + ln u(spacing) of a list of places: of the inverse of the normal
// matrix, with S eliminated at each frequency, and one tape error for each place.
func (s *sheet) score(list []int) float64 {
	n := 5 + len(list)
	normal := mat.NewSymDense(n, nil)
	for k, v := range s.prior {
		normal.SetSym(k, k, v)
	}
	for i := range list {
		normal.SetSym(5+i, 5+i, s.tape)
	}
	cross := make([]complex128, n) // hᴴ·column
	for j := range s.hz {
		power := 0.0
		clear(cross)
		for i, at := range list {
			h := s.h[at][j]
			power += real(h)*real(h) + imag(h)*imag(h)
			for k := range s.g {
				cross[k] += cmplx.Conj(h) * s.g[k][at][j]
			}
			cross[5+i] = cmplx.Conj(h) * s.g[2][at][j]
		}
		s.addTo(normal, list, j, cross, power)
	}
	var chol mat.Cholesky
	if !chol.Factorize(normal) {
		return math.Inf(1)
	}
	c := mat.NewSymDense(n, nil)
	if chol.InverseTo(c) != nil {
		return math.Inf(1)
	}
	return 0.5 * (math.Log(c.At(0, 0)) + math.Log(c.At(1, 1)))
}

// addTo adds one frequency: Re(Σ ḡ_a·g_b − conj(hᴴg_a)·hᴴg_b/Σ|h|²), with S = 1.
func (s *sheet) addTo(normal *mat.SymDense, list []int, j int, cross []complex128, power float64) {
	dot := func(a, b complex128) float64 { return real(a)*real(b) + imag(a)*imag(b) }
	for a := range cross {
		for b := range a + 1 {
			normal.SetSym(a, b, normal.At(a, b)-dot(cross[a], cross[b])/power)
		}
	}
	for i, at := range list {
		own := s.g[2][at][j]
		for a := range 5 {
			ga := s.g[a][at][j]
			for b := range a + 1 {
				normal.SetSym(a, b, normal.At(a, b)+dot(ga, s.g[b][at][j]))
			}
			normal.SetSym(5+i, a, normal.At(5+i, a)+dot(own, ga))
		}
		normal.SetSym(5+i, 5+i, normal.At(5+i, 5+i)+dot(own, own))
	}
}
