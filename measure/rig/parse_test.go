package rig

import (
	"errors"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"

	"standoff/measure"
)

const smallest = `unit: {tag: RB-07}
audio: {backend: virtual}
distances: [50mm, 20cm]
`

func mustParse(t *testing.T, text string) *Rig {
	t.Helper()
	r, err := Parse("rig.yaml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// The values are those of the manual's table of defaults, in SI units.
func TestDefaults(t *testing.T) {
	got := mustParse(t, smallest)
	want := &Rig{
		Path:    "rig.yaml",
		Raw:     []byte(smallest),
		Unit:    Unit{Tag: "RB-07", Powering: "none"},
		Capsule: Capsule{Model: "auto", Body: "auto", Setback: 0.006, SetbackUncertainty: 0.001},
		Source:  Source{Kind: "piston", Radius: 0.017, RadiusUncertainty: 0.001, Polarity: "unknown"},
		Air:     measure.Air{Temperature: 294.15, TemperatureUncertainty: 1, Humidity: 0.45, Pressure: 101300},
		Sweep:   Sweep{From: 20, To: 20000, Duration: 5, Level: 0.1, Repeats: 2, Before: 0.6, After: 0.8},
		Audio:   Audio{Backend: "virtual", SampleRate: 48000, Clock: "auto", InputChannel: 1, OutputChannel: 1},
		Distances: []measure.Distance{
			{Label: "50mm", Metres: 0.05},
			{Label: "20cm", Metres: 0.2},
		},
		DistanceUncertainty: 0.0005,
		Fit:                 Fit{From: 80, To: 5000},
		Virtual: &Virtual{
			Seed:    1,
			Capsule: VirtualCapsule{Form: "phase-shift", Body: "sphere", Rear: "delay", GradientFraction: 0.5, PortSpacing: 0.027, Setback: 0.006, Sensitivity: 0.5, ResonanceQ: 0.7},
			Source:  VirtualSource{Radius: 0.017, HighPass: 90, RollOff: 16000, Second: 0.002, Third: 0.001},
			Room:    &VirtualRoom{Size: [3]float64{5, 4, 2.7}, Reflection: 0.5},
			Noise:   math.Pow(10, -95.0/20), HumFrequency: 50, Bits: 24, Latency: 0.012,
			TapeErrors: map[string]float64{},
		},
	}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("got\n%+v %+v\nwant\n%+v %+v", got, got.Virtual, want, want.Virtual)
	}
}

func TestEverythingGiven(t *testing.T) {
	got := mustParse(t, `
unit: {tag: SC-12, serial: 0193, claimed: cardioid, powering: phantom}
capsule: {model: summed, body: open, setback: 0.5in, setback_uncertainty: 2mm}
source: {kind: piston, radius: 2cm, radius_uncertainty: 0.5 mm, polarity: reversed}
air: {temperature: 68F, temperature_uncertainty: 1.8F, humidity: 30%, pressure: 980hPa}
sweep: {from: 50Hz, to: 10kHz, duration: 2s, level: -40dB, repeats: 3, before: 100ms, after: 1s}
audio: {backend: portaudio, sample_rate: 96000, clock: common, input: USB, output: "Line 1", input_channel: 3, output_channel: 2, loopback_channel: 4}
distances: [" 60 mm ", 1ft, "+2.5in"]
distance_uncertainty: 1mm
fit: {from: 100Hz, to: 6kHz, gate: 8ms}
mover: {command: [./slide, --to, "{distance_mm}"], settle: 2s}
virtual:
  seed: 18446744073709551615
  real_time: true
  capsule: {form: summed, body: open, rear: low-pass, gradient_fraction: 1, gradient_from: 300Hz, port_spacing: 30mm, setback: 5mm, sensitivity: -0.25, resonance: 9kHz, resonance_q: 2, high_pass: 20Hz}
  source: {radius: 15mm, high_pass: none, roll_off: none, second: 1%, third: -0.5%}
  room: none
  noise: none
  hum: {level: -60dBFS, frequency: 60Hz}
  bits: none
  latency: 3ms
  clock_offset: -20ppm
  loopback: true
  tape_errors: {6cm: -0.5mm, 1ft: 1mm}
  tape_error: 0.2mm
  faults:
    - {kind: wrong-distance, distance: 304.8mm, take: 2, amount: -10mm}
    - {kind: gain, amount: 2}
    - {kind: dropout}
`)
	wantVirtual := &Virtual{
		Seed: math.MaxUint64, RealTime: true,
		Capsule: VirtualCapsule{Form: "summed", Body: "open", Rear: "low-pass", GradientFraction: 1, GradientFrom: 300, PortSpacing: 0.03, Setback: 0.005, Sensitivity: -0.25, Resonance: 9000, ResonanceQ: 2, HighPass: 20},
		Source:  VirtualSource{Radius: 0.015, Second: 0.01, Third: -0.005},
		Hum:     0.001, HumFrequency: 60, Latency: 0.003, ClockOffset: -20e-6, Loopback: true,
		TapeErrors: map[string]float64{"60mm": -0.0005, "1ft": 0.001},
		TapeError:  0.0002,
		Faults:     []VirtualFault{{"1ft", 2, "wrong-distance", -0.01}, {"", 0, "gain", 2}, {"", 0, "dropout", 0}},
	}
	if !reflect.DeepEqual(got.Virtual, wantVirtual) {
		t.Errorf("virtual: got\n%+v\nwant\n%+v", got.Virtual, wantVirtual)
	}
	want := &Rig{
		Path: got.Path, Raw: got.Raw, Virtual: got.Virtual,
		Unit:      Unit{"SC-12", "0193", "cardioid", "phantom"},
		Capsule:   Capsule{"summed", "open", 0.0127, 0.002},
		Source:    Source{Kind: "piston", Radius: 0.02, RadiusUncertainty: 0.0005, Polarity: "reversed"},
		Air:       measure.Air{Temperature: got.Air.Temperature, TemperatureUncertainty: 1, Humidity: 0.3, Pressure: 98000},
		Sweep:     Sweep{50, 10000, 2, 0.01, 3, 0.1, 1},
		Audio:     Audio{"portaudio", 96000, "common", "USB", "Line 1", 3, 2, 4},
		Distances: []measure.Distance{{Label: "60mm", Metres: 0.06}, {Label: "1ft", Metres: 0.3048}, {Label: "2.5in", Metres: 0.0635}},

		DistanceUncertainty: 0.001,
		Fit:                 Fit{100, 6000, 0.008},
		Mover:               &Mover{[]string{"./slide", "--to", "{distance_mm}"}, 2},
	}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("got\n%+v\nwant\n%+v", got, want)
	}
	if math.Abs(got.Air.Temperature-293.15) > 1e-9 { // 68 °F is 20 °C
		t.Errorf("68F is %g K, want 293.15", got.Air.Temperature)
	}
}

// A default gives way where what is written leaves it no room.
func TestDefaultsGiveWay(t *testing.T) {
	r := mustParse(t, strings.Replace(smallest, "virtual}", "wav, sample_rate: 8000}", 1)+"sweep: {from: 100Hz}\n")
	if r.Sweep.To != 3600 || r.Fit.To != 3600 || r.Fit.From != 100 {
		t.Errorf("sweep to %g, fit %g to %g; want 3600, 100 to 3600", r.Sweep.To, r.Fit.From, r.Fit.To)
	}
	if r.Virtual != nil {
		t.Error("a rig of WAV files has a virtual bench that nobody wrote")
	}
	if r := mustParse(t, smallest+"source: {kind: point, radius: 17mm}\n"); r.Source.Radius != 0 || r.Source.RadiusUncertainty != 0 {
		t.Errorf("a point has a radius of %g ± %g", r.Source.Radius, r.Source.RadiusUncertainty)
	}
}

func TestHash(t *testing.T) {
	// FIPS 180-2, app. B.1: SHA-256 of "abc".
	const abc = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
	if got := (&Rig{Raw: []byte("abc")}).Hash(); got != abc {
		t.Errorf("hash of abc is %s", got)
	}
}

func TestLoad(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "a b.yaml")
	if err := os.WriteFile(path, []byte("\ufeff"+strings.ReplaceAll(smallest, "\n", "\r\n")), 0o600); err != nil {
		t.Fatal(err)
	}
	r, err := Load(path)
	if err != nil {
		t.Fatal(err)
	}
	if r.Path != path || len(r.Distances) != 2 {
		t.Errorf("got %+v", r)
	}
	if _, err := Load(filepath.Join(dir, "none.yaml")); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("a file that is not there: %v", err)
	}
	if _, err := Load(dir); err == nil {
		t.Error("a folder is read as a rig")
	}
}

// What people see first has to be right: the starter and every rig in configs.
func TestShippedRigs(t *testing.T) {
	paths, err := filepath.Glob("../../configs/*.yaml")
	if err != nil || len(paths) < 5 {
		t.Fatalf("found %v (%v), want five rigs or more", paths, err)
	}
	for _, path := range append(paths, "starter.yaml") {
		t.Run(filepath.Base(path), func(t *testing.T) {
			r, err := Load(path)
			if err != nil {
				t.Fatal(err)
			}
			for i, line := range strings.Split(string(r.Raw), "\n") {
				if n := len([]rune(line)); n > 80 {
					t.Errorf("line %d has %d characters", i+1, n)
				}
				checkComment(t, r, i+1, line)
			}
			f := readForTest(r.Raw)
			for _, key := range f.asked {
				optional := key == "mover" || key == "source.from" || key == "virtual" && r.Audio.Backend != "virtual"
				if !optional && !f.has(key) {
					t.Errorf("%s is not written out", key)
				}
			}
		})
	}
}

// checkComment wants a word to every key that is not the name of a section.
func checkComment(t *testing.T, r *Rig, number int, line string) {
	key, value, ok := strings.Cut(line, ":")
	if !ok || strings.HasPrefix(line, "# ") || strings.TrimSpace(value) == "" || strings.Contains(key, "#") {
		return
	}
	if !strings.Contains(value, "#") && key != "distances" { // whose comment stands above it
		t.Errorf("%s:%d: %s has no comment", r.Path, number, key)
	}
}

// TestStarterStatesDefaults compares the starter with a rig that leaves all to
// the defaults, and its commented blocks with what the reader knows.
func TestStarterStatesDefaults(t *testing.T) {
	text := string(Starter())
	got := mustParse(t, text)
	want := mustParse(t, `unit: {tag: RB-07, claimed: figure-8}
audio: {}
distances: [30mm, 40mm, 2.5in, 90mm, 140mm, 220mm, 350mm, 600mm]
`)
	want.Raw = got.Raw
	if !reflect.DeepEqual(got, want) {
		t.Errorf("the starter is\n%+v\nthe defaults are\n%+v", got, want)
	}

	full := uncomment(text)
	given := mustParse(t, full)
	virtual := mustParse(t, smallest).Virtual
	if !reflect.DeepEqual(given.Virtual, virtual) {
		t.Errorf("the starter's virtual bench is\n%+v\nthe default is\n%+v", given.Virtual, virtual)
	}
	if given.Mover == nil || given.Mover.Settle != 1 {
		t.Errorf("the starter's mover is %+v", given.Mover)
	}
	f := readForTest([]byte(full))
	for _, key := range f.asked {
		if !f.has(key) && key != "source.from" { // which takes the place of others
			t.Errorf("the starter does not show %s", key)
		}
	}
}

// uncomment takes the # from the optional blocks; prose has one space after it.
func uncomment(text string) string {
	must, optional, _ := strings.Cut(text, "# ---- optional")
	lines := strings.Split("# "+optional, "\n")
	for i, l := range lines {
		if !strings.HasPrefix(l, "# ") || strings.HasPrefix(l, "#  ") {
			lines[i] = strings.TrimPrefix(l, "#")
		}
	}
	return must + strings.Join(lines, "\n")
}

func TestStarterIsACopy(t *testing.T) {
	clear(Starter())
	if !slices.Contains(Starter(), ':') {
		t.Error("a caller can spoil the starter")
	}
}

// The limits themselves are allowed.
func TestEdges(t *testing.T) {
	for _, text := range []string{
		"unit: {tag: R}\naudio: {}\ndistances: [6mm, 20m]\n", // as near as the setback
		"unit: {tag: R}\naudio: {}\ndistances: [0.25in, 20m]\ncapsule: {setback: 6.35mm}\n",
		smallest + "sweep: {to: 21.6kHz}\n",
		smallest + "sweep: {from: 100Hz, to: 4kHz}\nfit: {from: 100Hz, to: 4kHz}\n",
		smallest + "sweep: {duration: 0.5s, level: 0dBFS, repeats: 20}\n",
		smallest + "air: {humidity: 0%}\n",
		"unit: {tag: _" + strings.Repeat("x", 63) + "}\naudio: {loopback_channel: 2}\ndistances: [50mm, 60mm]\n",
	} {
		if _, err := Parse("rig.yaml", []byte(text)); err != nil {
			t.Error(err)
		}
	}
}
