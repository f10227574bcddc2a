package fit

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"testing"
)

// The contributions of all causes add up to the covariance that the solver gives,
// and each grows with its own cause only.
func TestContributionsAddUp(t *testing.T) {
	m := Model{Form: PhaseShift, Body: Open, Source: PistonSource}
	d := world(m, Acoustics{Beta: 0.5, Spacing: 0.025}, 3)
	d.Unexplained = 0.002
	j, err := FitModel(d, m)
	if err != nil {
		t.Fatal(err)
	}
	var all spread
	for _, p := range j.parts {
		all = all.plus(p)
	}
	for _, c := range []struct {
		name      string
		got, want float64
	}{{"mix", all.beta, j.BetaSE * j.BetaSE}, {"spacing", all.spacing, j.SpacingSE * j.SpacingSE}, {"both", all.both, j.covariance[0][1]}} {
		if math.Abs(c.got/c.want-1) > 1e-6 {
			t.Errorf("%s: the parts add up to %g, the covariance is %g", c.name, c.got, c.want)
		}
	}
	for c, p := range j.parts {
		if (cause(c) == byRoom || cause(c) == byClock) && p.beta != 0 {
			t.Errorf("cause %d contributes %g where none was told", c, p.beta)
		}
		if cause(c) != byRoom && cause(c) != byClock && !(p.beta > 0) {
			t.Errorf("cause %d contributes nothing", c)
		}
	}
}

// A law of propagation must give what moving one cause does: with the setback told
// wrong by its own uncertainty the mix moves by what the budget says of it.
func TestContributionIsWhatAnErrorDoes(t *testing.T) {
	m := Model{Form: PhaseShift, Body: Open, Source: PistonSource}
	d := world(m, Acoustics{Beta: 0.5, Spacing: 0.025}, 3)
	moved := map[cause]func(*Dataset){
		bySetback: func(d *Dataset) { d.Setback += d.SetbackUncertainty },
		byRadius:  func(d *Dataset) { d.Radius += d.RadiusUncertainty },
		bySpeed:   func(d *Dataset) { d.Speed += d.SpeedUncertainty },
	}
	here, err := FitModel(d, m)
	if err != nil {
		t.Fatal(err)
	}
	for c, move := range moved {
		other := *d
		move(&other)
		there, err := FitModel(&other, m)
		if err != nil {
			t.Fatal(err)
		}
		// The covariance is that of data whose variance was raised to match the misfit.
		raised := math.Max(here.ReducedChiSquare(), 1) * here.Alike
		got, want := math.Abs(there.Acoustics.Beta-here.Acoustics.Beta), math.Sqrt(here.parts[c].beta)
		if math.Abs(got/want-1) > 0.1*raised {
			t.Errorf("cause %d: the mix moves by %.3g, the budget says %.3g (raised by %.2f)", c, got, want, raised)
		}
	}
}

// What was put in comes out: residuals with a relative part and a part like a room's.
func TestLeftoversAreTold(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 5))
	made := func(u, rho float64) (r []residue) {
		for i := range 8 {
			distance := 0.03 * math.Pow(20, float64(i)/7)
			for range 60 {
				x := residue{noise: 1e-8, response: 1 / (distance * distance), level: 1}
				v := x.noise + u*u*x.response + rho*rho
				x.square = v / 2 * (math.Pow(rng.NormFloat64(), 2) + math.Pow(rng.NormFloat64(), 2))
				r = append(r, x)
			}
		}
		return r
	}
	for _, c := range []struct{ u, rho float64 }{{0.003, 0}, {0.02, 0}, {0.001, 0.02}, {0.01, 0.1}} {
		u, rho := leftovers(made(c.u, c.rho))
		// 480 complex values tell one standard deviation to 1/√960 ≈ 3 %; two of
		// them, one from the near and one from the far half, to some 6 %.
		if math.Abs(u/c.u-1) > 0.2 || math.Abs(rho-c.rho) > 0.2*c.rho {
			t.Errorf("put in %g and %g, told %g and %g", c.u, c.rho, u, rho)
		}
	}
}

func TestFreedomAsJSON(t *testing.T) {
	for in, want := range map[Freedom]string{Freedom(math.Inf(1)): "null", 8: "8"} {
		b, err := json.Marshal(in)
		if err != nil || string(b) != want {
			t.Errorf("%v is written %s, %v", in, b, err)
		}
		var back Freedom
		if err := json.Unmarshal(b, &back); err != nil || back != in {
			t.Errorf("%s is read as %v, %v", b, back, err)
		}
	}
}
