package session

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"

	"standoff/measure"
	"standoff/measure/rig"
)

var (
	safeLabel = regexp.MustCompile(`^[A-Za-z0-9][A-Za-z0-9.+-]{0,63}$`)
	hexSum    = regexp.MustCompile(`^[0-9a-f]{64}$`)
	flagShape = regexp.MustCompile(`^[a-z0-9][a-z0-9-]{0,63}$`)
)

const (
	takesDir   = "takes"
	mostNumber = 1_000_000
)

// takeFile is where a take lies.
func takeFile(label string, number int) string {
	return fmt.Sprintf("%s/%s-%d.wav", takesDir, label, number)
}

// takeName takes a name inside takes/ apart. A name that takeFile does not make
// is not a take's.
func takeName(name string) (label string, number int, ok bool) {
	label, digits, _ := cutLast(strings.TrimSuffix(name, ".wav"), "-")
	number, err := strconv.Atoi(digits)
	ok = err == nil && checkName(label, number) == nil && takeFile(label, number) == takesDir+"/"+name
	return label, number, ok
}

func checkName(label string, number int) error {
	switch {
	case !safeLabel.MatchString(label):
		return fmt.Errorf("distance %q cannot be part of a file's name", label)
	case number < 1 || number > mostNumber:
		return fmt.Errorf("number %d is not from 1 to %d", number, mostNumber)
	}
	return nil
}

// check refuses a manifest with a value that leads astray later on.
func (m *Manifest) check() error {
	if err := rig.CheckTag(m.Tag); err != nil {
		return fmt.Errorf("tag: %w", err)
	}
	if !hexSum.MatchString(m.RigSHA256) {
		return fmt.Errorf("rig_sha256: %q is not a SHA-256", m.RigSHA256)
	}
	if e := m.Excitation; e != nil && (!hexSum.MatchString(e.SHA256) || e.SampleRate <= 0) {
		return fmt.Errorf("excitation: %q and %d Hz are not a SHA-256 and a sample rate", e.SHA256, e.SampleRate)
	}
	seen := map[string]bool{}
	for i := range m.Takes {
		t := &m.Takes[i]
		if err := t.check(); err != nil {
			return fmt.Errorf("takes[%d]: %w", i, err)
		}
		if seen[t.File] {
			return fmt.Errorf("takes[%d]: %s is in the list already", i, t.File)
		}
		seen[t.File] = true
	}
	return nil
}

func (t *Take) check() error {
	if err := checkName(t.Distance, t.Number); err != nil {
		return err
	}
	switch {
	case t.File != takeFile(t.Distance, t.Number):
		// So a path that leads anywhere else cannot be in a manifest.
		return fmt.Errorf("file %q is not %s", t.File, takeFile(t.Distance, t.Number))
	case !hexSum.MatchString(t.SHA256):
		return fmt.Errorf("sha256 %q is not a SHA-256", t.SHA256)
	case t.SampleRate <= 0:
		return fmt.Errorf("sample_rate_hz %d is not above 0", t.SampleRate)
	case t.Channels != 1 && t.Channels != 2:
		return fmt.Errorf("channels %d is not 1 or 2", t.Channels)
	case t.Overflows < 0 || t.Underflows < 0:
		return fmt.Errorf("%d overflows and %d underflows are not counts", t.Overflows, t.Underflows)
	case !(t.Metres > 0) || math.IsInf(t.Metres, 0):
		return fmt.Errorf("nominal_m %g is not a distance", t.Metres)
	}
	return checkFlags(t.Flags)
}

// checkFlags looks at the shape only: a later version may know more of them.
func checkFlags(flags []measure.Flag) error {
	for _, f := range flags {
		if !flagShape.MatchString(string(f)) {
			return fmt.Errorf("flag %q is not a word", f)
		}
	}
	return nil
}

// tidy takes control characters out of what is only printed.
func (m *Manifest) tidy() {
	for _, s := range []*string{&m.Version, &m.Serial, &m.Recorder} {
		*s = printable(*s)
	}
	for i := range m.Takes {
		t := &m.Takes[i]
		t.Source, t.Reason = printable(t.Source), printable(t.Reason)
	}
}
