package rig

import (
	"bytes"
	"errors"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"regexp"
	"strings"
	"testing"
	"unicode"
)

// FuzzParse holds every file to one of two ends: a rig in which all is possible,
// or errors with a line of that file and a message of one line.
func FuzzParse(f *testing.F) {
	paths, _ := filepath.Glob("../../configs/*.yaml")
	for _, path := range paths {
		raw, err := os.ReadFile(path)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(raw)
	}
	f.Add(Starter())
	f.Add([]byte(smallest))
	f.Fuzz(func(t *testing.T, raw []byte) {
		before := bytes.Clone(raw)
		r, err := Parse("rig.yaml", raw)
		if err == nil {
			possible(t, r)
		} else {
			tellable(t, raw, r, err)
		}
		again, err2 := Parse("rig.yaml", raw)
		if !reflect.DeepEqual(r, again) || !reflect.DeepEqual(err, err2) || !bytes.Equal(raw, before) {
			t.Fatalf("not the same twice: %v and %v", err, err2)
		}
	})
}

func tellable(t *testing.T, raw []byte, r *Rig, err error) {
	var errs Errors
	if r != nil || !errors.As(err, &errs) || len(errs) == 0 {
		t.Fatalf("rig %v with error %T %v", r, err, err)
	}
	lines := 1 + len(regexp.MustCompile("\r\n|\n|\r|\u0085|\u2028|\u2029").FindAll(raw, -1))
	last := 1
	for _, e := range errs {
		if e.Line < last || e.Line > lines {
			t.Fatalf("line %d after %d, of %d lines: %v", e.Line, last, lines, e)
		}
		last = e.Line
		if text := e.Error() + e.Hint; e.Reason == "" || len(text) > 2000 || strings.ContainsFunc(text, unicode.IsControl) {
			t.Fatalf("not a message of one line: %q", text)
		}
	}
}

var (
	asFileName = regexp.MustCompile(`^[0-9][0-9a-z.]{0,30}$`)
	asFolder   = regexp.MustCompile(`^[A-Za-z0-9._-]{1,64}$`)
)

// possible states the limits once more, without asking the reader.
func possible(t *testing.T, r *Rig) {
	if !asFolder.MatchString(r.Unit.Tag) || strings.Trim(r.Unit.Tag, ".") == "" {
		t.Errorf("tag %q", r.Unit.Tag)
	}
	inside(t, "sweep", 1, r.Sweep.From, r.Sweep.To, 0.4500001*float64(r.Audio.SampleRate))
	inside(t, "fit", r.Sweep.From, r.Fit.From, r.Fit.To, r.Sweep.To)
	inside(t, "level", 1e-5, r.Sweep.Level, 1)
	inside(t, "duration", 0.5, r.Sweep.Duration, 60)
	inside(t, "repeats", 1, float64(r.Sweep.Repeats), 20)
	inside(t, "silences", 0, r.Sweep.Before+r.Sweep.After, 60)
	inside(t, "sample rate", 8000, float64(r.Audio.SampleRate), 192000)
	inside(t, "temperature", 233.149, r.Air.Temperature, 333.151)
	inside(t, "humidity", 0, r.Air.Humidity, 1)
	inside(t, "pressure", 50e3, r.Air.Pressure, 120e3)
	inside(t, "number of distances", 2, float64(len(r.Distances)), 64)
	if r.Audio.LoopbackChannel == r.Audio.InputChannel || r.Sweep.From >= r.Sweep.To || r.Fit.From >= r.Fit.To {
		t.Errorf("%+v %+v %+v", r.Audio, r.Sweep, r.Fit)
	}
	for i, d := range r.Distances {
		inside(t, d.Label, max(0.001, r.Capsule.Setback), d.Metres, 20)
		if !asFileName.MatchString(d.Label) {
			t.Errorf("label %q", d.Label)
		}
		for _, other := range r.Distances[:i] {
			if other.Label == d.Label || math.Abs(other.Metres-d.Metres) < 0.9e-6 {
				t.Errorf("%v twice", d)
			}
		}
	}
	if r.Audio.Backend == "virtual" && r.Virtual == nil {
		t.Error("a virtual rig without a bench")
	}
	finite(t, reflect.ValueOf(*r))
}

// inside wants the values in rising order; NaN never is.
func inside(t *testing.T, what string, values ...float64) {
	for i := 1; i < len(values); i++ {
		if !(values[i-1] <= values[i]) {
			t.Errorf("%s: not in order: %v", what, values)
		}
	}
}

// finite looks at all numbers, however deep.
func finite(t *testing.T, v reflect.Value) {
	switch v.Kind() {
	case reflect.Float64:
		if x := v.Float(); math.IsNaN(x) || math.IsInf(x, 0) {
			t.Errorf("%v in the rig", x)
		}
	case reflect.Struct:
		for i := range v.NumField() {
			finite(t, v.Field(i))
		}
	case reflect.Pointer:
		if !v.IsNil() {
			finite(t, v.Elem())
		}
	case reflect.Map:
		for _, key := range v.MapKeys() {
			finite(t, v.MapIndex(key))
		}
	case reflect.Slice, reflect.Array:
		for i := range v.Len() {
			finite(t, v.Index(i))
		}
	}
}
