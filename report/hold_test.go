package report

import (
	"bytes"
	"encoding/json"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"standoff/fit"
	"standoff/measure"
)

// sampleBudget has the lines of the analysis, its sums by hand: root of 0.0042² +
// 0.0031² + … and so on.
func sampleBudget() fit.Budget {
	inf := fit.Freedom(math.Inf(1))
	b := fit.Budget{Lines: []fit.BudgetLine{
		{Source: "noise", Type: "A", Size: 0.00042, Unit: "relative", GradientFraction: 0.00021, PortSpacing: 0.00003, Freedom: 190},
		{Source: "unexplained", Type: "A", Size: 0.0031, Unit: "relative", GradientFraction: 0.0017, PortSpacing: 0.00031, Freedom: 190},
		{Source: "room", Type: "A", Size: 0.0021, Unit: "1/m", GradientFraction: 0.0009, PortSpacing: 0.00012, Freedom: 190},
		{Source: "tape", Type: "B", Size: 0.0005, Unit: "m", GradientFraction: 0.0028, PortSpacing: 0.00041, Freedom: inf},
		{Source: "setback", Type: "B", Size: 0.001, Unit: "m", GradientFraction: 0.0012, PortSpacing: 0.00022, Freedom: inf},
		{Source: "source radius", Type: "B", Size: 0.001, Unit: "m", GradientFraction: 0.0007, PortSpacing: 0.00042, Freedom: inf},
		{Source: "speed of sound", Type: "B", Size: 0.6, Unit: "m/s", GradientFraction: 0.0009, PortSpacing: 0.00005, Freedom: inf},
		{Source: "model form", Type: "B", Size: 1, Unit: "other models", GradientFraction: 0.0035, PortSpacing: 0.00067, Freedom: 8},
		{Source: "band", Type: "B", Size: 2500, Unit: "Hz", GradientFraction: 0.0024, PortSpacing: 0.00024, Freedom: 8},
		{Source: "method", Type: "B", Size: 0.0012, Unit: "1", GradientFraction: 0.000004, PortSpacing: 0.00016, Freedom: inf},
	}}
	b.GradientFraction = fit.BudgetSum{Standard: 0.0059, Freedom: 42.7, CoverageFactor: 2.018, Expanded: 0.0118}
	b.PortSpacing = fit.BudgetSum{Standard: 0.00104, Freedom: 34.6, CoverageFactor: 2.03, Expanded: 0.0021}
	return b
}

// parabola is a profile whose standard uncertainty is u.
func parabola(at, u float64) (p fit.Profile) {
	for t := -4.0; t <= 4; t += 0.5 {
		p.Value, p.Excess = append(p.Value, at+t*u), append(p.Excess, t*t)
	}
	return p
}

// oneSided rises above u only, on values a third of an octave apart.
func oneSided(u float64) (p fit.Profile) {
	for v := 0.001; v < 0.1; v *= 1.3 {
		p.Value, p.Excess = append(p.Value, v), append(p.Excess, 2.71*math.Pow(v/u, 4))
	}
	return p
}

func octavesFrom(lo float64, mixes ...float64) (out []fit.OctaveMix) {
	for _, m := range mixes {
		v := resolvedValue(m, 0.03, "1")
		if math.IsNaN(m) {
			v = fit.Value{Unit: "1", CoverageFactor: 2}
		}
		out = append(out, fit.OctaveMix{From: lo, To: 2 * lo, GradientFraction: v})
		lo *= 2
	}
	return out
}

// addEvidence completes a sample by what it is judged by.
func addEvidence(d *Data) {
	r := d.Result
	r.Budget = sampleBudget()
	r.Capsule.GradientFraction.CoverageFactor, r.Capsule.PortSpacing.CoverageFactor = 2.018, 2.03
	r.Profiles = fit.Profiles{GradientFraction: parabola(0.5031, 0.0041), PortSpacing: parabola(0.02641, 0.0008)}
	r.Octaves = octavesFrom(80, 0.512, 0.498, 0.505, 0.5, 0.52, math.NaN())
}

func unresolvedSpacing(d *Data) {
	d.Result.Capsule.PortSpacing = fit.Value{Unit: "m", CoverageFactor: 2, UpperLimit: value64(0.021)}
	d.Result.Profiles.PortSpacing = oneSided(0.021)
}

// What crowds the pages of judgement, for the tests of the frame and of hostile input.
func crowdedEvidence() map[string]func(*Data) {
	long := strings.Repeat("a cause that takes long to name ", 6)
	return map[string]func(*Data){
		"older result": func(d *Data) {
			d.Result.Budget, d.Result.Profiles, d.Result.Octaves = fit.Budget{}, fit.Profiles{}, nil
		},
		"spacing not resolved": unresolvedSpacing,
		"nothing resolved": func(d *Data) {
			d.Result.Capsule.GradientFraction, d.Result.Capsule.PortSpacing = fit.Value{Unit: "1"}, fit.Value{Unit: "m"}
			d.Result.Profiles.PortSpacing.Excess = make([]float64, len(d.Result.Profiles.PortSpacing.Excess))
			d.Result.Octaves = octavesFrom(80, math.NaN(), math.NaN())
		},
		"one octave": func(d *Data) { d.Result.Octaves = octavesFrom(100, 0.5) },
		"one point": func(d *Data) {
			d.Result.Profiles = fit.Profiles{PortSpacing: fit.Profile{Value: []float64{0.02}, Excess: []float64{0}}}
		},
		"omni below": func(d *Data) { d.Result.Octaves = octavesFrom(20, 0.02, 0.1, 0.2, 0.31, 0.42, 0.47, 0.5, 0.5) },
		"not numbers": func(d *Data) {
			for i := range d.Result.Budget.Lines {
				l := &d.Result.Budget.Lines[i]
				l.Size, l.GradientFraction, l.PortSpacing, l.Freedom = math.NaN(), math.Inf(1), math.NaN(), fit.Freedom(math.NaN())
			}
			d.Result.Budget.GradientFraction = fit.BudgetSum{Standard: math.NaN(), Freedom: fit.Freedom(math.NaN()), CoverageFactor: math.NaN(), Expanded: math.Inf(1)}
			p := &d.Result.Profiles
			p.GradientFraction.Value[3], p.GradientFraction.Excess[5] = math.NaN(), math.Inf(1)
			p.PortSpacing.Value[0], p.PortSpacing.Excess[9] = math.Inf(-1), math.NaN()
			d.Result.Octaves = octavesFrom(80, 0.5, 0.4, 0.3, 0.2)
			for i, v := range []float64{math.NaN(), math.Inf(1), -5, 1e300} {
				o := &d.Result.Octaves[i]
				o.From, *o.GradientFraction.Expanded = v, v
			}
		},
		"huge": func(d *Data) {
			for i := range d.Result.Budget.Lines {
				l := &d.Result.Budget.Lines[i]
				l.Size, l.GradientFraction, l.PortSpacing, l.Freedom = 1e300, 1e200, 1e-300, 1e300
			}
			d.Result.Budget.PortSpacing = fit.BudgetSum{Standard: 1e300, Freedom: 1e300, CoverageFactor: 1e300, Expanded: 1e300}
			d.Result.Profiles = fit.Profiles{GradientFraction: parabola(1e4, 1e4), PortSpacing: parabola(1e300, 1)}
			d.Result.Octaves = octavesFrom(1e-4, make([]float64, 60)...)
		},
		"many sources": func(d *Data) {
			for range 40 {
				d.Result.Budget.Lines = append(d.Result.Budget.Lines, fit.BudgetLine{Source: long, Type: long, Size: 1234567, Unit: long, Freedom: 3})
			}
		},
	}
}

func TestBudgetOnThePage(t *testing.T) {
	d := sample(6)
	text := poppler(t, pdfOf(t, d), "pdftotext", "-layout")
	for _, want := range []string{
		"noise of the recordings", "what the model leaves unexplained", "on the spacing, mm", "reflections of the room", "distances by tape", "form of the model",
		"0.0028", "<0.0001", "0.31 %", "0.5 mm", "1 other", "to 2.5 kHz", "∞", "42", "2.02", "2.03", "0.0118", "effective degrees of freedom",
		"The mix is 0.503 ± 0.012 (k = 2.02), the spacing 26.4 ± 2.1 mm (k = 2.03).",
		"mix k = 2.02; spacing k = 2.03",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("the text lacks %q", want)
		}
	}
	if flat := strings.Join(strings.Fields(text), " "); !strings.Contains(flat, "Most of both ± comes from the form of the model (38 and 43 % of the variances).") {
		t.Error("the largest source is not named")
	}
}

// Two lines of 3 and 4 give shares of 9/25 and 16/25, however large the unit.
func TestShares(t *testing.T) {
	for _, scale := range []float64{1e-200, 1, 1e200} {
		got := shares([]fit.BudgetLine{{GradientFraction: 3 * scale}, {GradientFraction: 4 * scale}}, func(l fit.BudgetLine) float64 { return l.GradientFraction })
		if math.Abs(got[0]-0.36) > 1e-12 || math.Abs(got[1]-0.64) > 1e-12 {
			t.Errorf("scale %g: %v", scale, got)
		}
	}
	if got := mixShares(fit.Budget{Lines: make([]fit.BudgetLine, 2)}); got[0] != 0 || got[1] != 0 {
		t.Errorf("of nothing: %v", got)
	}
}

// ±1.96 standard uncertainties of a parabola are 95 %: 0.5031 ∓ 0.0080.
func TestHoldAnswer(t *testing.T) {
	d := sample(6)
	for _, p := range []struct {
		change func(*Data)
		want   []string
	}{
		{func(*Data) {}, []string{"exclude a mix below 0.495 or above 0.511 and a spacing below 24.8 or above 28.0 mm (95 %)", "5 octaves tell a mix each, and agree with the joint one within ±."}},
		{unresolvedSpacing, []string{"the spacing not resolved (below 21.0 mm, 95 % one-sided)", "exclude a mix below 0.495 or above 0.511 (95 %)"}},
		{func(d *Data) { d.Result.Octaves = octavesFrom(80, 0.1, 0.5) }, []string{"1 of 2 octaves agree", "80 Hz to 160 Hz says 0.10 ± 0.03 (k = 2)"}},
		{func(d *Data) { d.Result.Octaves = octavesFrom(80, 0.5) }, []string{"One octave tells a mix by itself, and agrees"}},
	} {
		addEvidence(d)
		p.change(d)
		answer := holdAnswer(d)
		for _, want := range p.want {
			if !strings.Contains(answer, want) {
				t.Errorf("lacks %q: %s", want, answer)
			}
		}
	}
	if text := poppler(t, pdfOf(t, sample(6)), "pdftotext", "-layout"); !strings.Contains(text, "Left out: 1 octave whose mix is not resolved") {
		t.Error("nobody says that an octave is left out")
	}
}

// A result from before there were budgets, profiles and octaves is read and drawn.
func TestOlderResult(t *testing.T) {
	d := sample(3)
	d.Result = &fit.Result{}
	if err := json.Unmarshal([]byte(`{"schema":"standoff/result/1","capsule":{"gradient_fraction":{"value":0.5,"expanded":0.01,"coverage_factor":2,"resolved":true,"unit":"1"}}}`), d.Result); err != nil {
		t.Fatal(err)
	}
	text := strings.Join(strings.Fields(poppler(t, pdfOf(t, d), "pdftotext", "-layout")), " ")
	for _, want := range []string{"holds no uncertainty budget", "holds no profiles", "0.500 ± 0.010 (k = 2)"} {
		if !strings.Contains(text, want) {
			t.Errorf("lacks %q", want)
		}
	}
}

// The plots of their own come with the others.
func TestPlotsOfEvidence(t *testing.T) {
	plots, err := Plots(sample(4), DefaultStyle())
	if err != nil {
		t.Fatal(err)
	}
	names := map[string]string{}
	for _, p := range plots {
		var b bytes.Buffer
		if err := p.WriteSVG(&b); err != nil {
			t.Fatal(err)
		}
		names[p.Name] = b.String()
	}
	for name, want := range map[string]string{"profile-mix": "misfit above the least", "profile-spacing": "spacing, mm", "octaves": "Left out: 1 octave"} {
		if !strings.Contains(names[name], want) {
			t.Errorf("%s lacks %q", name, want)
		}
	}
}

// TestLook writes the pages where a person can look at them; STANDOFF_LOOK names the
// folder.
func TestLook(t *testing.T) {
	dir := os.Getenv("STANDOFF_LOOK")
	if dir == "" {
		t.Skip("STANDOFF_LOOK is not set")
	}
	cases := crowdedEvidence()
	cases["plain"] = func(*Data) {}
	cases["models"] = func(d *Data) {
		for _, m := range []string{"summed", "phase-shift", "phase-shift", "summed", "phase-shift"} {
			d.Result.Models = append(d.Result.Models, fit.Candidate{Model: m, Body: "open", Rear: "low-pass", GradientFraction: 0.49, PortSpacing: 0.027, ReducedChiSquare: 3.2, Why: "does not fit: its misfit is 41 above the best"})
		}
		d.Result.Warnings = []measure.Warning{}
	}
	for name, change := range cases {
		d := sample(8)
		change(d)
		file := filepath.Join(dir, strings.ReplaceAll(name, " ", "-"))
		if err := os.WriteFile(file+".pdf", pdfOf(t, d), 0o666); err != nil {
			t.Fatal(err)
		}
		if out, err := exec.Command("pdftoppm", "-r", "80", "-png", file+".pdf", file).CombinedOutput(); err != nil {
			t.Fatal(err, string(out))
		}
	}
}
