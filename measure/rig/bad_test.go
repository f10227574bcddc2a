package rig

import (
	"bytes"
	"errors"
	"fmt"
	"strings"
	"testing"
	"time"
)

// bad is a rig with something wrong in it, and what is said about it.
type bad struct{ text, want, hint string }

func check(t *testing.T, tests []bad) {
	t.Helper()
	for _, tt := range tests {
		_, err := Parse("rig.yaml", []byte(tt.text))
		switch {
		case err == nil:
			t.Errorf("no error for\n%s", tt.text)
		case err.Error() != tt.want || Hint(err) != tt.hint:
			t.Errorf("of\n%s\ngot  %s\nhint %s\nwant %s\nhint %s", show(tt.text), err, Hint(err), tt.want, tt.hint)
		}
	}
}

func TestBadFiles(t *testing.T) {
	const ok = "unit: {tag: RB-07}\naudio: {}\ndistances: [50mm, 20cm]\n"
	check(t, []bad{
		{"", "rig.yaml:1: the file is empty", "standoff new writes a rig to start from"},
		{"# nothing\n\n", "rig.yaml:1: the file is empty", "standoff new writes a rig to start from"},
		{"---\n", "rig.yaml:1: the file is empty", "standoff new writes a rig to start from"},
		{"- 50mm\n", "rig.yaml:1: a list where a block of keys is due", "write key: value lines, indented"},
		{"50mm", "rig.yaml:1: 50mm where a block of keys is due", "write key: value lines, indented"},
		{ok + "---\nunit: {tag: X}\n", "rig.yaml:4: a second YAML document begins here", "remove the line with ---"},
		{ok + "sweep:\n\tlevel: -20dBFS\n", "rig.yaml:5: a tab indents this line", "indent with spaces"},
		{ok + "sweep:\n  \tlevel: -20dBFS\n", "rig.yaml:5: a tab indents this line", "indent with spaces"},
		{ok + "sweep: {level: -20dBFS\n", "rig.yaml:4: not valid YAML: did not find expected ',' or '}'", "close the block with }"},
		{"unit: {tag: RB-07}\naudio: {}\ndistances: [50mm, 20cm\nair: {}\n", "rig.yaml:3: not valid YAML: did not find expected ',' or ']'", "close the list with ]"},
		{ok + "sweep:\n  from: 20Hz\n to: 20kHz\n", "rig.yaml:6: not valid YAML: did not find expected key", "keys of one block begin in one column"},
		{ok + "air: {}: 2\n", "rig.yaml:4: not valid YAML: mapping values are not allowed in this context", "indent keys of one block alike, and quote a value with a colon in it"},
		{ok + "sweep: from: 20Hz\n", "rig.yaml:4: not valid YAML: mapping values are not allowed in this context", "indent keys of one block alike, and quote a value with a colon in it"},
		{ok + "air:\n  humidity: %45\n", "rig.yaml:5: not valid YAML: found character that cannot start any token", "quote a value that begins with @, % or a backtick"},
		{"unit: {tag: RB-07}\n\nair: {humidity: \xe9}\n", "rig.yaml:3: the text is not UTF-8", "save the file as UTF-8"},
		{"\xff\xfeu\x00n\x00", "rig.yaml:1: the file is UTF-16", "save it as UTF-8"},
		{ok + "air: {humidity: 4\x005%}\n", "rig.yaml:4: control character 0x00", "remove it"},
		{ok + "air: &air {humidity: 45%}\n", "rig.yaml:4: air: anchors (&air) are not used in a rig", "remove it"},
		{ok + "air: *air\n", "rig.yaml:4: aliases (*air) are not used in a rig", "write the value itself"},
		{ok + "air: !!map {humidity: 45%}\n", "rig.yaml:4: air: tags (!!map) are not used in a rig", "remove it"},
		{ok + "air:\n  <<: {humidity: 45%}\n", "rig.yaml:5: air: merge keys (<<) are not used in a rig", "write the keys themselves"},
		{ok + "? [a]\n: 1\n", "rig.yaml:4: a key is not a plain word", "write key: value"},
		{ok + strings.Repeat("[", 30) + strings.Repeat("]", 30) + ": 1\n", "rig.yaml:4: a key is not a plain word", "write key: value"},
		{"air: " + strings.Repeat("[", 30) + strings.Repeat("]", 30), "rig.yaml:1: more than 16 levels in one another", "close the brackets, or indent less"},
		{ok + "air:\n  humidity: 45%\n  pressure: 101kPa\n  humidity: 40%\n", "rig.yaml:7: air.humidity: duplicate key, first in line 5", "remove one of them"},
	})
}

// with makes a rig whose fourth line and those after it are the given ones.
func with(lines string) string {
	return "unit: {tag: RB-07}\naudio: {backend: virtual}\ndistances: [50mm, 20cm]\n" + lines + "\n"
}

func TestBadKeys(t *testing.T) {
	check(t, []bad{
		{with("sweeps: {}"), "rig.yaml:4: sweeps: unknown key", "did you mean sweep?"},
		{with("sweep:\n  form: 20Hz"), "rig.yaml:5: sweep.form: unknown key", "did you mean from?"},
		{with("mover: {command: [x], wait: 1s}"), "rig.yaml:4: mover.wait: unknown key", "keys here: command, settle"},
		{with("virtual:\n  faults:\n    - {kind: clip}\n    - {kind: clip, tkae: 1}"), "rig.yaml:7: virtual.faults[1].tkae: unknown key", "did you mean take?"},
		{with("\"\": 1"), `rig.yaml:4: "": unknown key`, "keys here: unit, capsule, source, air, sweep, audio, distances, distance_uncertainty, fit, mover, virtual"},
		{"audio: {}\ndistances: [50mm, 20cm]\n", "rig.yaml:1: unit.tag: is required", "write unit: {tag: RB-07}"},
		{"# a rig\naudio: {}\nunit:\n  serial: x\ndistances: [50mm, 20cm]\n", "rig.yaml:3: unit.tag: is required", "write tag: RB-07"},
		{"unit: {tag: RB-07}\ndistances: [50mm, 20cm]\n", "rig.yaml:1: audio: is required", "write audio: {backend: portaudio}"},
		{"\nunit: {tag: RB-07}\naudio: {}\n", "rig.yaml:2: distances: is required", "write distances: [30mm, 60mm, 120mm, 240mm]"},
		{with("air:"), "rig.yaml:4: air: has no value", "give it one, or remove the key for its default"},
		{with("air: {humidity: }"), "rig.yaml:4: air.humidity: has no value", "give it one, or remove the key for its default"},
		{with("air: warm"), "rig.yaml:4: air: warm where a block of keys is due", "write key: value lines, indented"},
		{with("air: {humidity: [45%]}"), "rig.yaml:4: air.humidity: a list where a percentage such as 45% is due", ""},
		{with("mover: {command: ./slide}"), "rig.yaml:4: mover.command: ./slide where a list of program and arguments is due", `write command: ["./slide", "--to", "{distance_mm}"]`},
		{with("mover: {command: [slide, {to: x}]}"), "rig.yaml:4: mover.command[1]: a block of keys where text is due", ""},
		{with("mover: {command: [slide, \"{distance_cm}\"]}"), "rig.yaml:4: mover.command[1]: {distance_cm} is not replaced by anything", "possible is {distance_mm} {distance_label} {index}"},
		{with("mover: {settle: 1s}"), "rig.yaml:4: mover.command: is required", `write command: ["./slide", "--to", "{distance_mm}"]`},
	})
}

func TestBadValues(t *testing.T) {
	check(t, []bad{
		{with("capsule: {setback: 6}"), "rig.yaml:4: capsule.setback: 6 has no unit", "write 6mm"},
		{with("source: {radius: 0.017}"), "rig.yaml:4: source.radius: 0.017 has no unit", "write 0.017m"},
		{with("sweep: {level: -20}"), "rig.yaml:4: sweep.level: -20 has no unit", "write -20dBFS"},
		{with("sweep: {level: 3dBFS}"), "rig.yaml:4: sweep.level: 3dBFS is more than 0dBFS", "possible is -100dBFS to 0dBFS"},
		{with("sweep: {duration: 5mm}"), "rig.yaml:4: sweep.duration: mm is not a unit of time", "units are s, ms"},
		{with("sweep: {duration: 2min}"), "rig.yaml:4: sweep.duration: min is not a unit of time", "units are s, ms"},
		{with("sweep: {duration: 0.1s}"), "rig.yaml:4: sweep.duration: 0.1s is less than 0.5s", "possible is 0.5s to 60s"},
		{with("sweep: {repeats: 0}"), "rig.yaml:4: sweep.repeats: 0 is not from 1 to 20", "possible is 1 to 20"},
		{with("sweep: {repeats: two}"), "rig.yaml:4: sweep.repeats: two is not a whole number", "possible is 1 to 20"},
		{with("sweep: {repeats: 1e1}"), "rig.yaml:4: sweep.repeats: 1e1 is not a whole number", "possible is 1 to 20"},
		{with("air: {temperature: .nan}"), "rig.yaml:4: air.temperature: .nan is not a finite number", "write it like 21C"},
		{with("air: {temperature: 21°C}"), "rig.yaml:4: air.temperature: °C is not a unit of temperature", "units are C, F, K"},
		{with("air: {humidity: 145%}"), "rig.yaml:4: air.humidity: 145% is more than 100%", "possible is 0% to 100%"},
		{with("air: {pressure: 101325}"), "rig.yaml:4: air.pressure: 101325 has no unit", "write 101325Pa"},
		{with("capsule: {body: cube}"), "rig.yaml:4: capsule.body: cube is not one of auto, open, sphere", "possible is auto"},
		{with("capsule: {model: phaseshift}"), "rig.yaml:4: capsule.model: phaseshift is not one of auto, summed, phase-shift", "did you mean phase-shift?"},
		{"unit: {tag: ..}\naudio: {}\ndistances: [50mm, 20cm]\n", "rig.yaml:1: unit.tag: .. cannot name a folder", TagRule},
		{"unit: {tag: a/b}\naudio: {}\ndistances: [50mm, 20cm]\n", "rig.yaml:1: unit.tag: a/b cannot name a folder", TagRule},
		{"unit: {tag: R, claimed: bidirectional}\naudio: {}\ndistances: [50mm, 20cm]\n", "rig.yaml:1: unit.claimed: bidirectional is not one of omni, subcardioid, cardioid, supercardioid, hypercardioid, figure-8", "possible is omni"},
		{"unit: {tag: R, serial: \"a\\nb\"}\naudio: {}\ndistances: [50mm, 20cm]\n", "rig.yaml:1: unit.serial: has a control character or a line break", "write it in one line"},
		{with("fit: {gate: long}"), "rig.yaml:4: fit.gate: long is not a time", "write it like auto or 1ms"},
		{with("virtual: {real_time: yes}"), "rig.yaml:4: virtual.real_time: yes is not one of true, false", "possible is true"},
		{with("virtual: {seed: -1}"), "rig.yaml:4: virtual.seed: -1 is not a whole number from 0 to 2^64-1", "write seed: 1"},
		{with("virtual: {room: {size: [5m, 4m]}}"), "rig.yaml:4: virtual.room.size: 2 in the list where at least 3 are due", "write size: [5m, 4m, 2.7m]"},
		{with("virtual: {capsule: {sensitivity: 0}}"), "rig.yaml:4: virtual.capsule.sensitivity: 0 would be silence", "the fault dead makes a silent take"},
		{with("virtual: {capsule: {gradient_from: 300Hz}}"), "rig.yaml:4: virtual.capsule.gradient_from: phase-shift has one diaphragm, whose mix is the same at all frequencies", "write form: summed, or gradient_from: none"},
		{with("virtual: {capsule: {form: summed, gradient_from: 300}}"), "rig.yaml:4: virtual.capsule.gradient_from: 300 has no unit", "write 300Hz"},
		{with("virtual: {capsule: {gradient_fraction: 50%}}"), "rig.yaml:4: virtual.capsule.gradient_fraction: 50% is not a number without unit", "as a fraction: 50% is 0.5"},
		{with("virtual: {faults: [{kind: burn}]}"), "rig.yaml:4: virtual.faults[0].kind: burn is not one of clip, dropout, dead, wrong-distance, reversed, gain", "possible is clip"},
		{with("virtual: {faults: [{kind: clip, amount: 2}]}"), "rig.yaml:4: virtual.faults[0].amount: the fault clip has no amount", "remove it"},
		{with("virtual: {faults: [{kind: wrong-distance}]}"), "rig.yaml:4: virtual.faults[0].amount: is required", "write amount: 20mm"},
		{with("virtual: {faults: [{kind: clip, distance: 51mm}]}"), "rig.yaml:4: virtual.faults[0].distance: 51mm is not one of the distances", "distances are 50mm, 20cm"},
		{with("virtual: {tape_errors: {30mm: 1mm}}"), "rig.yaml:4: virtual.tape_errors.30mm: 30mm is not one of the distances", "distances are 50mm, 20cm"},
		{with("virtual:\n  tape_errors:\n    50mm: 1mm\n    5cm: 1mm"), "rig.yaml:7: virtual.tape_errors.5cm: a second error for 50mm", "remove one of them"},
		{with("virtual:\n  tape_errors: {50mm: -48mm}"), "rig.yaml:4: virtual: at 50mm the true capsule would touch the source", "mind port_spacing, setback, tape_errors and faults, or leave out 50mm"},
		{with("virtual:\n  faults: [{kind: wrong-distance, amount: -48mm}]"), "rig.yaml:4: virtual: at 50mm the true capsule would touch the source", "mind port_spacing, setback, tape_errors and faults, or leave out 50mm"},
	})
}

func TestBadDistances(t *testing.T) {
	list := func(entries string) string {
		return "unit: {tag: RB-07}\naudio: {}\ndistances: " + entries + "\n"
	}
	long := func(n int) string {
		all := make([]string, n)
		for i := range all {
			all[i] = fmt.Sprintf("%dmm", i+10)
		}
		return "[" + strings.Join(all, ", ") + "]"
	}
	check(t, []bad{
		{list("[50mm, 20cm, 60]"), "rig.yaml:3: distances[2]: 60 has no unit", "write 60mm"},
		{list("[50mm, 0.6]"), "rig.yaml:3: distances[1]: 0.6 has no unit", "write 0.6m"},
		{list("[50mm, 20cm, 5mm]"), "rig.yaml:3: distances[2]: 5mm is nearer than the setback of 6mm", "begin farther away, or correct capsule.setback"},
		{"capsule:\n  setback: 1in\n" + list("\n  - 50mm\n  - 2cm\n  - 20cm"), "rig.yaml:7: distances[1]: 2cm is nearer than the setback of 1in", "begin farther away, or correct capsule.setback"},
		{list("[50mm, 20cm, 50mm]"), "rig.yaml:3: distances[2]: 50mm is in the list already, as 50mm", "remove one; sweep.repeats sets the takes at each distance"},
		{list("[50mm, 20cm, 5 cm]"), "rig.yaml:3: distances[2]: 5 cm is in the list already, as 50mm", "remove one; sweep.repeats sets the takes at each distance"},
		{list("[63.5mm, 20cm, 2.5in]"), "rig.yaml:3: distances[2]: 2.5in is in the list already, as 63.5mm", "remove one; sweep.repeats sets the takes at each distance"},
		{list("[50mm, NaN]"), "rig.yaml:3: distances[1]: NaN is not a finite number", "write it like 50mm"},
		{list("[50mm, .inf]"), "rig.yaml:3: distances[1]: .inf is not a finite number", "write it like 50mm"},
		{list("[50mm, -30mm]"), "rig.yaml:3: distances[1]: -30mm is less than 1mm", "possible is 1mm to 20m"},
		{list("[50mm, 21m]"), "rig.yaml:3: distances[1]: 21m is more than 20m", "possible is 1mm to 20m"},
		{list("[50mm, 50dB]"), "rig.yaml:3: distances[1]: dB is not a unit of length", "units are mm, m, cm, in, ft"},
		{list("[50mm, \"0,2m\"]"), "rig.yaml:3: distances[1]: 0,2m has a decimal comma", "write 0.2m"},
		{list("[50mm, ]"), "rig.yaml:3: distances: 1 in the list where at least 2 are due", "write distances: [30mm, 60mm, 120mm]"},
		{list("[50mm, ~]"), "rig.yaml:3: distances[1]: ~ where a length such as 50mm is due", ""},
		{list("[]"), "rig.yaml:3: distances: the list is empty", "write distances: [30mm, 60mm, 120mm]"},
		{list("50mm"), "rig.yaml:3: distances: 50mm where a list of lengths is due", "write distances: [30mm, 60mm, 120mm]"},
		{list("{near: 50mm}"), "rig.yaml:3: distances: a block of keys where a list of lengths is due", "write distances: [30mm, 60mm, 120mm]"},
		{list(long(65)), "rig.yaml:3: distances: 65 in the list where at most 64 are possible", ""},
	})
	if _, err := Parse("rig.yaml", []byte(list(long(64)))); err != nil {
		t.Errorf("64 distances: %v", err)
	}
}

func TestBadCombinations(t *testing.T) {
	check(t, []bad{
		{with("sweep: {to: 22kHz}"), "rig.yaml:4: sweep.to: 22kHz is more than 0.45 of the sample rate of 48000Hz", "write 21.6kHz"},
		{with("sweep: {from: 5kHz, to: 200Hz}"), "rig.yaml:4: sweep.from: leaves no band to the sweep: from 5kHz to 200Hz", "write sweep.from below sweep.to"},
		{with("sweep:\n  from: 100Hz\nfit:\n  from: 80Hz"), "rig.yaml:7: fit.from: 80Hz is below the sweep, which begins at 100Hz", "write 100Hz"},
		{with("sweep:\n  to: 4kHz\nfit:\n  to: 5kHz"), "rig.yaml:7: fit.to: 5kHz is above the sweep, which ends at 4kHz", "write 4kHz"},
		{with("fit: {from: 6kHz}"), "rig.yaml:4: fit.from: leaves no band to the fit: from 6kHz to 5kHz", "write fit.from below fit.to"},
		{with("sweep: {from: 6kHz}"), "rig.yaml:4: sweep.from: leaves no band to the fit: from 6kHz to 5kHz", "write fit.from below fit.to"},
		{"unit: {tag: R}\naudio:\n  input_channel: 2\n  loopback_channel: 2\ndistances: [50mm, 20cm]\n", "rig.yaml:4: audio.loopback_channel: 2 is the microphone's channel too", "write the input that the cable from the output goes to, or none"},
	})
}

// All errors are told, by line, and each once: what follows from another error
// is not told.
func TestSeveralErrors(t *testing.T) {
	_, err := Parse("r.yaml", []byte("unit: {tag: R}\nfit: {to: 30kHz}\nsweep: {to: 5mm}\naudio: {clock: common}\ndistances: [1mm, 50]\ncapsule: {setback: 6}\nAir: {}\n"))
	want := `r.yaml:3: sweep.to: mm is not a unit of frequency
r.yaml:5: distances[1]: 50 has no unit
r.yaml:6: capsule.setback: 6 has no unit
r.yaml:7: Air: unknown key`
	if err == nil || err.Error() != want {
		t.Errorf("got\n%v\nwant\n%s", err, want)
	}
	var first *Error
	if !errors.As(err, &first) || first.Line != 3 || first.Key != "sweep.to" || first.File != "r.yaml" {
		t.Errorf("the first error is %+v", first)
	}
	_, err = Parse("r.yaml", []byte(strings.Repeat("x: 1\n", 14)))
	if lines := strings.Split(err.Error(), "\n"); len(lines) != 11 || lines[10] != "r.yaml: and 3 more" {
		t.Errorf("of 13 errors these are told:\n%v", err)
	}
}

// Files made to hurt are refused quickly.
func TestHostileFiles(t *testing.T) {
	nested := "a0: &a0 [x, x, x, x, x, x, x, x, x, x]\n"
	bomb := &bytes.Buffer{}
	bomb.WriteString(nested)
	for i := 1; bomb.Len() < MaxBytes-200; i++ {
		fmt.Fprintf(bomb, "a%d: &a%d [%s]\n", i, i, strings.Repeat(fmt.Sprintf("*a%d, ", i-1), 9))
	}
	for name, tt := range map[string]struct{ text, want string }{
		"1 MB of nested aliases": {bomb.String(), "rig.yaml:1: a0: anchors (&a0) are not used in a rig"},
		"more than 1 MB":         {nested + strings.Repeat("#", MaxBytes), "rig.yaml:1: the file has more than 1048576 bytes"},
		"brackets":               {strings.Repeat("[", MaxBytes), "rig.yaml:1: not valid YAML: exceeded max depth of 10000"},
		"half the brackets":      {strings.Repeat(strings.Repeat("[", 5000)+strings.Repeat("]", 5000)+"\n", 50), "rig.yaml:2: not valid YAML: did not find expected <document start>"},
		"many keys":              {keys(MaxBytes / 20), "rig.yaml:1: audio: is required"},
		"one long key":           {strings.Repeat("k", MaxBytes-10) + ": 1", "rig.yaml:1: not valid YAML"},
		"many distances":         {"audio: {}\nunit: {tag: R}\ndistances: [" + strings.Repeat("5,", MaxBytes/2-40) + "]", "rig.yaml:3: distances: 524248 in the list"},
		"many faults":            {"audio: {}\nunit: {tag: R}\ndistances: [50mm, 60mm]\nvirtual: {faults: [" + strings.Repeat("{},", MaxBytes/3-40) + "]}", "rig.yaml:4: virtual.faults: 349485 in the list"},
		"many tape errors":       {"audio: {}\nunit: {tag: R}\ndistances: [50mm, 60mm]\nvirtual: {tape_errors: {" + strings.ReplaceAll(keys(MaxBytes/40), "\n", ",") + "}}", "rig.yaml:4: virtual.tape_errors: 26214 errors"},
	} {
		t.Run(name, func(t *testing.T) {
			start := time.Now()
			_, err := Parse("rig.yaml", []byte(tt.text))
			if err == nil || !strings.HasPrefix(err.Error(), tt.want) {
				t.Errorf("got %.300v, want %s …", err, tt.want)
			}
			if took := time.Since(start); took > time.Minute { // generous: for slow and busy machines
				t.Errorf("took %v", took)
			} else {
				t.Logf("took %v", took)
			}
		})
	}
}

func keys(n int) string {
	var b strings.Builder
	for i := range n {
		fmt.Fprintf(&b, "key%d: 1\n", i)
	}
	return b.String()
}
