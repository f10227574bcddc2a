package report

import (
	"bytes"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"standoff/fit"
	"standoff/measure"
)

func value64(v float64) *float64 { return &v }

func resolvedValue(v, u float64, unit string) fit.Value {
	return fit.Value{Value: value64(v), Expanded: value64(u), CoverageFactor: 2, Resolved: true, Unit: unit}
}

// sample is a made-up report of a cardioid by the formula |1 + β/(jkr)|.
func sample(distances int) *Data {
	agrees := true
	d := &Data{
		Tag: "SC-12", Serial: "2207", Powering: "phantom", Version: "9.9", Session: "0badcafe",
		Measured: time.Date(2026, 12, 1, 10, 30, 0, 0, time.FixedZone("", 3600)),
		Conditions: Conditions{TemperatureC: 21, HumidityPercent: 45, PressureKPa: 101.3, SourceKind: "piston", SourceRadius: 0.017, SourceRadiusExpanded: 0.002,
			SweepFrom: 20, SweepTo: 20000, SweepDuration: 5, SweepLevelDBFS: -20, Repeats: 2, SampleRate: 48000, Recorder: "virtual bench", DistanceUncertainty: 0.0005},
		Result: &fit.Result{
			Capsule: fit.CapsuleResult{Model: "phase-shift", Body: "sphere", GradientFraction: resolvedValue(0.5031, 0.0118, "1"),
				PortSpacing: resolvedValue(0.02641, 0.0021, "m"), Setback: resolvedValue(0.0062, 0.0008, "m"), SourceRadius: resolvedValue(0.0171, 0.0012, "m"),
				Pattern: "cardioid", Claimed: "cardioid", Agrees: &agrees},
			Polarity: "normal",
			Fit: fit.FitSummary{From: 80, To: 5000, ReducedChiSquare: 1.04, Points: 312, Gate: 0.0058, GateReason: "first reflection 5.8 ms after the direct sound",
				Clock: "common", Status: "converged", SpeedOfSound: 344, SpeedExpanded: 1.2, Unexplained: 0.0031, Alike: 1.4},
			Models:    []fit.Candidate{{Model: "phase-shift", Body: "sphere", GradientFraction: 0.5031, PortSpacing: 0.0264, ReducedChiSquare: 1.04, Chosen: true, Why: "fits best"}},
			RiseTable: fit.RiseTable{Distances: []float64{0.05, 0.1}, Frequencies: []float64{100}, DB: [][]float64{{14.9, 9.27}}, Expanded: [][]float64{{0.3, 0.2}}},
		},
		Curves: &fit.Curves{},
	}
	addEvidence(d)
	for i := range distances {
		r := 0.03 * math.Pow(20, float64(i)/math.Max(float64(distances-1), 1))
		addDistance(d, string(rune('a'+i%26))+"mm", r)
	}
	return d
}

func addDistance(d *Data, label string, r float64) {
	curve := fit.RiseCurve{Label: label, Distance: r, Used: true, Corner: 0.5 * 344 / (2 * math.Pi * r)}
	response := Response{Label: label, Metres: r, Used: true}
	for f := 20.0; f < 20000; f *= 1.03 {
		rise := 10 * math.Log10(1+math.Pow(0.5*344/(2*math.Pi*f*r), 2))
		curve.LineHz, curve.LineDB = append(curve.LineHz, f), append(curve.LineDB, rise)
		curve.LineExpanded = append(curve.LineExpanded, 0.1)
		response.Hz, response.DB = append(response.Hz, f), append(response.DB, rise-20*math.Log10(r))
		response.Degrees, response.Expanded = append(response.Degrees, 0), append(response.Expanded, 0.2)
	}
	for f := 100.0; f < 4000; f *= 1.26 {
		rise := 10 * math.Log10(1+math.Pow(0.5*344/(2*math.Pi*f*r), 2))
		curve.Hz, curve.DB = append(curve.Hz, f), append(curve.DB, rise+0.1)
		curve.Expanded, curve.Residual = append(curve.Expanded, 0.2), append(curve.Residual, 0.1)
	}
	impulse := Impulse{Label: label, Metres: r, Used: true, GateFrom: -0.0008, GateTo: 0.0058}
	for t := -0.002; t < 0.01; t += 2e-5 {
		impulse.Seconds, impulse.Value = append(impulse.Seconds, t), append(impulse.Value, math.Exp(-math.Abs(t)*8000))
	}
	d.Curves.Rise = append(d.Curves.Rise, curve)
	d.Curves.Levels = append(d.Curves.Levels, fit.LevelCurve{Hz: 1000 * r, LineM: []float64{0.03, 0.6}, LineDB: []float64{30, 4}, M: []float64{0.1}, DB: []float64{20}, Expanded: []float64{0.3}, FreeFieldDB: []float64{30, 4}})
	d.Responses = append(d.Responses, response)
	d.Impulses = append(d.Impulses, impulse)
	d.Result.Distances = append(d.Result.Distances, fit.DistanceResult{Label: label, Nominal: r, Fitted: r + 0.0003, FittedExpanded: 0.0008, Used: true,
		Flags: []measure.Flag{}, Alone: fit.Alone{GradientFraction: resolvedValue(0.5, 0.02, "1"), PortSpacing: fit.Value{Unit: "m"}}, Misfit: 1})
	d.Result.Takes = append(d.Result.Takes, fit.TakeResult{File: "takes/" + label + "-1.wav", Distance: label, Number: 1, Accepted: true, PeakDB: -12, SNRDB: 70, Arrival: 0.012})
}

func pdfOf(t *testing.T, d *Data) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := Write(&b, d, DefaultStyle()); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// poppler runs one of its tools on a PDF.
func poppler(t *testing.T, pdf []byte, tool string, args ...string) string {
	t.Helper()
	path, err := exec.LookPath(tool)
	if err != nil {
		if os.Getenv("CI") == "true" {
			t.Fatal(tool + " is not installed (Debian: poppler-utils)")
		}
		t.Skip(tool + " is not installed")
	}
	file := filepath.Join(t.TempDir(), "r.pdf")
	if err := os.WriteFile(file, pdf, 0o666); err != nil {
		t.Fatal(err)
	}
	out, err := exec.Command(path, append(append([]string{}, args...), file, "-")[:len(args)+1+map[bool]int{true: 1}[tool == "pdftotext"]]...).CombinedOutput()
	if err != nil {
		t.Fatalf("%s: %v\n%s", tool, err, out)
	}
	return string(out)
}

func TestTextOfThePages(t *testing.T) {
	text := poppler(t, pdfOf(t, sample(5)), "pdftotext", "-layout")
	for _, want := range []string{
		"What is this microphone near a source?", "How much low end does each distance add?", "What did the microphone hear at each distance?",
		"How does the level fall with distance?", "What pattern is it?", "Was the room kept out?", "Can these numbers be trusted?", "What was recorded?",
		"SC-12", "serial 2207", "1 December 2026, 10:30 +01:00", "0.503", "± 0.012", "26.4", "± 2.1 mm", "claimed cardioid: agrees",
		"page 1 of 9", "page 9 of 9", "What do the data hold?", "session 0badcafe", "−6.0", "21.0 °C", "Phantom power", "±",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("the text lacks %q", want)
		}
	}
	if n := strings.Count(text, "\f"); n != 9 {
		t.Errorf("%d pages, want 9", n)
	}
}

func TestFontsAreEmbedded(t *testing.T) {
	for _, line := range strings.Split(strings.TrimSpace(poppler(t, pdfOf(t, sample(3)), "pdffonts")), "\n")[2:] {
		if !strings.Contains(line, "Identity-H") || !strings.Contains(line, "yes") {
			t.Errorf("not embedded: %s", line)
		}
	}
}

func TestDocumentInformation(t *testing.T) {
	info := poppler(t, pdfOf(t, sample(3)), "pdfinfo")
	for _, want := range []string{"Near-field report SC-12", "standoff 9.9", "Proximity effect of SC-12, serial 2207", "A4"} {
		if !strings.Contains(info, want) {
			t.Errorf("pdfinfo lacks %q:\n%s", want, info)
		}
	}
}

// Values that the data do not hold are never printed as numbers.
func TestNotResolved(t *testing.T) {
	d := sample(3)
	d.Result.Capsule.PortSpacing = fit.Value{Unit: "m", UpperLimit: value64(0.021), CoverageFactor: 2}
	d.Result.Capsule.GradientFraction = fit.Value{Unit: "1", CoverageFactor: 2}
	d.Result.Capsule.Pattern, d.Result.Capsule.Agrees = "", nil
	text := poppler(t, pdfOf(t, d), "pdftotext", "-layout")
	for _, want := range []string{"not resolved", "below 21", "no pattern can be said"} {
		if !strings.Contains(text, want) {
			t.Errorf("the text lacks %q", want)
		}
	}
	if strings.Contains(text, "0.503 ±") {
		t.Error("a value that is not resolved is printed")
	}
}

func TestSameBytes(t *testing.T) {
	if a, b := pdfOf(t, sample(8)), pdfOf(t, sample(8)); !bytes.Equal(a, b) {
		t.Error("two reports of the same data differ")
	} else if len(a) > 1<<20 {
		t.Errorf("%d bytes", len(a))
	}
}

// Hostile input neither panics nor fails, and stays inside the frame (which the
// text shows by its ellipsis).
func TestHostileInput(t *testing.T) {
	long := strings.Repeat("Ünïcødé Ωмега ", 9)
	cases := map[string]func(*Data){
		"long tag":     func(d *Data) { d.Tag, d.Serial = long, long },
		"control":      func(d *Data) { d.Tag, d.Serial = "a\x00b\nc\u202e", "\U0001F3A4" },
		"nothing":      func(d *Data) { *d = Data{Result: &fit.Result{}} },
		"no curves":    func(d *Data) { d.Curves = nil },
		"NaN":          spoilWith(math.NaN()),
		"Inf":          spoilWith(math.Inf(1)),
		"-Inf":         spoilWith(math.Inf(-1)),
		"huge":         spoilWith(1e300),
		"unused":       func(d *Data) { d.Result.Distances[0].Used = false },
		"many takes":   func(d *Data) { d.Result.Takes = append(make([]fit.TakeResult, 300), d.Result.Takes...) },
		"warnings":     func(d *Data) { d.Result.Warnings = make([]measure.Warning, 40) },
		"long reasons": func(d *Data) { d.Result.Takes[0].Reason = long + long },
		"one word":     func(d *Data) { d.Result.Warnings = []measure.Warning{{Text: strings.Repeat("x", 5000)}} },
	}
	for name, spoil := range crowdedEvidence() {
		cases[name] = spoil
	}
	for name, spoil := range cases {
		t.Run(name, func(t *testing.T) {
			d := sample(4)
			spoil(d)
			pdf := pdfOf(t, d)
			text := poppler(t, pdf, "pdftotext", "-layout")
			if name == "long tag" && !strings.Contains(text, "…") {
				t.Error("a long tag was not cut")
			}
			plots, err := Plots(d, DefaultStyle())
			if err != nil {
				t.Fatal(err)
			}
			for _, p := range plots {
				if err := p.WriteSVG(&bytes.Buffer{}); err != nil {
					t.Errorf("%s: %v", p.Name, err)
				}
			}
		})
	}
	for _, n := range []int{0, 1, 2, 30} {
		pdfOf(t, sample(n))
	}
}

func spoilWith(v float64) func(*Data) {
	return func(d *Data) {
		c := &d.Curves.Rise[1]
		c.DB[2], c.LineDB[3], c.Residual[1], c.Expanded[4], c.Corner = v, v, v, v, v
		r := &d.Responses[1]
		r.DB[5], r.Expanded[6], r.Hz[7] = v, v, v
		d.Impulses[0].Value[3], d.Impulses[0].Seconds[0] = v, v
		d.Result.RiseTable.DB[0][0] = v
		d.Result.Fit.ReducedChiSquare, d.Result.Fit.Gate = v, v
		d.Result.Distances[0].Fitted = v
		d.Result.Capsule.GradientFraction = resolvedValue(v, v, "1")
		d.Curves.Levels[0].LineDB[0] = v
	}
}

func TestPNG(t *testing.T) {
	plots, err := Plots(sample(4), DefaultStyle())
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range plots {
		var b bytes.Buffer
		if err := p.WritePNG(&b); err != nil || !bytes.HasPrefix(b.Bytes(), []byte("\x89PNG")) {
			t.Errorf("%s: %v", p.Name, err)
		}
	}
}
