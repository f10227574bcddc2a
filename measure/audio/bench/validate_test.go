package bench

import (
	"go/parser"
	"go/token"
	"math"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

func TestImpossibleConfigurations(t *testing.T) {
	nan := math.NaN()
	for want, spoil := range map[string]func(*Config){
		"speed of sound 0":                       func(c *Config) { c.SpeedOfSound = 0 },
		"noise NaN":                              func(c *Config) { c.Noise = nan },
		"hum frequency 0":                        func(c *Config) { c.Hum = 0.1 },
		"bits 20":                                func(c *Config) { c.Bits = 20 },
		"latency -1":                             func(c *Config) { c.Latency = -1 },
		"clock offset 0.1":                       func(c *Config) { c.ClockOffset = 0.1 },
		"tape error of 30mm +Inf":                func(c *Config) { c.TapeErrors = map[string]float64{"30mm": math.Inf(1)} },
		"tape error -1":                          func(c *Config) { c.TapeError = -1 },
		"form double":                            func(c *Config) { c.Capsule.Form = "double" },
		"body  is not one of":                    func(c *Config) { c.Capsule.Body = "" },
		"rear  is not one of":                    func(c *Config) { c.Capsule.Rear = "" },
		"gradient fraction 1.1":                  func(c *Config) { c.Capsule.GradientFraction = 1.1 },
		"use the form summed":                    func(c *Config) { c.Capsule.GradientFraction = 0.019 },
		"gradient is whole -1":                   func(c *Config) { c.Capsule.Form, c.Capsule.GradientFrom = Summed, -1 },
		"a gradient that fades needs two":        func(c *Config) { c.Capsule.GradientFrom = 300 },
		"port spacing 0":                         func(c *Config) { c.Capsule.PortSpacing = 0 },
		"setback NaN":                            func(c *Config) { c.Capsule.Setback = nan },
		"sensitivity 0":                          func(c *Config) { c.Capsule.Sensitivity = 0 },
		"resonance -5":                           func(c *Config) { c.Capsule.Resonance = -5 },
		"quality factor of the resonance 0":      func(c *Config) { c.Capsule.ResonanceQ = 0 },
		"high-pass of the capsule 0.01":          func(c *Config) { c.Capsule.HighPass = 0.01 },
		"source radius -1":                       func(c *Config) { c.Source.Radius = -1 },
		"high-pass of the source":                func(c *Config) { c.Source.HighPass = nan },
		"roll-off of the source":                 func(c *Config) { c.Source.RollOff = 1e9 },
		"second harmonic 0.5":                    func(c *Config) { c.Source.Second = 0.5 },
		"third harmonic -0.5":                    func(c *Config) { c.Source.Third = -0.5 },
		"reflection factor 1":                    func(c *Config) { c.Room.Reflection = 1 },
		"width of the room 0":                    func(c *Config) { c.Room.Size[1] = 0 },
		"fault 1: kind smoke":                    func(c *Config) { c.Faults = []Fault{{Kind: "smoke"}} },
		"fault 2: amount 0":                      func(c *Config) { c.Faults = []Fault{{Kind: Dead}, {Kind: Gain}} },
		"fault 1: take -1":                       func(c *Config) { c.Faults = []Fault{{Kind: Dead, Take: -1}} },
		"amount NaN is not within -10 to 10":     func(c *Config) { c.Faults = []Fault{{Kind: WrongDistance, Amount: nan}} },
		"virtual bench: speed of sound 0 is not": func(c *Config) { c.SpeedOfSound = 0 },
	} {
		c := good()
		spoil(&c)
		if b, err := New(c); err == nil || b != nil || !strings.Contains(err.Error(), want) {
			t.Errorf("error %v, want %q", err, want)
		}
	}
	if _, err := New(Config{}); err == nil || strings.Count(err.Error(), "\n") < 3 {
		t.Errorf("nothing at all: %v", err)
	}
}

func TestPossibleConfigurations(t *testing.T) {
	for what, change := range map[string]func(*Config){
		"good":     func(*Config) {},
		"reversed": func(c *Config) { c.Capsule.Sensitivity = -0.5 },
		"no filters": func(c *Config) {
			c.Capsule.Resonance, c.Capsule.ResonanceQ, c.Capsule.HighPass, c.Source = 0, 0, 0, Source{}
		},
		"free field":            func(c *Config) { c.Room = nil },
		"dead room":             func(c *Config) { c.Room.Reflection = 0 },
		"summed omni":           func(c *Config) { c.Capsule.Form, c.Capsule.Rear, c.Capsule.GradientFraction = Summed, "", 0 },
		"fading":                func(c *Config) { c.Capsule.Form, c.Capsule.GradientFrom = Summed, 300 },
		"nearly omni":           func(c *Config) { c.Capsule.GradientFraction = leastPhaseShift },
		"figure-8, low-pass":    func(c *Config) { c.Capsule.Rear, c.Capsule.GradientFraction = LowPass, 1 },
		"amount that is unused": func(c *Config) { c.Faults = []Fault{{Kind: Clip, Amount: math.NaN()}} },
	} {
		c := good()
		change(&c)
		if _, err := New(c); err != nil {
			t.Errorf("%s: %v", what, err)
		}
	}
}

// The bench makes sound from geometry: what measures and fits must not be in it, or a
// wrong formula could agree with itself.
func TestWhatIsImported(t *testing.T) {
	files, err := filepath.Glob("*.go")
	if err != nil || len(files) < 5 {
		t.Fatalf("%d files, %v", len(files), err)
	}
	for _, path := range files {
		if strings.HasSuffix(path, "_test.go") {
			continue
		}
		f, err := parser.ParseFile(token.NewFileSet(), path, nil, parser.ImportsOnly)
		if err != nil {
			t.Fatal(err)
		}
		for _, spec := range f.Imports {
			name, _ := strconv.Unquote(spec.Path.Value)
			first, _, _ := strings.Cut(name, "/")
			ours := slices.Contains([]string{"standoff/measure", "standoff/measure/audio"}, name)
			standard := !strings.Contains(first, ".") && first != "standoff"
			if !ours && !standard && !strings.HasPrefix(name, "gonum.org/v1/gonum/") {
				t.Errorf("%s imports %s", path, name)
			}
		}
	}
}
