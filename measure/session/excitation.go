package session

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"slices"

	"standoff/measure/wav"
)

// SetExcitation stores what was played, for a session whose sweep is not the
// rig's own. It is written once: the same again is fine, anything else is refused.
func (f *Folder) SetExcitation(samples []float32, rate int) error {
	f.mu.Lock()
	defer f.mu.Unlock()
	if len(samples) == 0 || rate <= 0 || rate > math.MaxInt32 {
		return fmt.Errorf("an excitation of %d samples at %d Hz is none", len(samples), rate)
	}
	return f.change(func(m *Manifest) error {
		if m.Excitation == nil {
			m.Excitation, _ = f.strayExcitation() // of an attempt that failed half-way
		}
		if m.Excitation != nil {
			return f.sameExcitation(*m.Excitation, samples, rate)
		}
		sum, _, err := place(f.disk, excitationName, true, func(w io.Writer) error {
			return wav.Encode(w, floatWAV(rate, [][]float32{samples}))
		})
		if err != nil {
			return cannot("store", f.Path(excitationName), err)
		}
		m.Excitation = &Excitation{SHA256: sum, SampleRate: rate}
		return nil
	})
}

func (f *Folder) sameExcitation(e Excitation, samples []float32, rate int) error {
	w, err := f.verified(excitationName, e.SHA256)
	if err != nil {
		return err
	}
	if w.SampleRate != rate || !slices.Equal(w.Samples[0], samples) {
		return hintedf("choose another folder for takes made with another sweep",
			"%s was made with another sweep than this one", f.dir)
	}
	return nil
}

// Excitation is what was played where that is not the rig's own sweep; ok is
// false where it is.
func (f *Folder) Excitation() (samples []float32, rate int, ok bool, err error) {
	m := f.Manifest()
	if m.Excitation == nil {
		return nil, 0, false, nil
	}
	w, err := f.verified(excitationName, m.Excitation.SHA256)
	if err != nil {
		return nil, 0, false, err
	}
	return w.Samples[0], w.SampleRate, true, nil
}

// strayExcitation is the entry for an excitation.wav that the manifest does not
// know; nil when there is none or it is not one.
func (f *Folder) strayExcitation() (*Excitation, error) {
	w, sum, err := f.readWAV(excitationName)
	if errors.Is(err, fs.ErrNotExist) {
		return nil, nil
	}
	if err == nil && w.Channels != 1 {
		err = fmt.Errorf("it has %d channels", w.Channels)
	}
	if err != nil {
		return nil, err
	}
	return &Excitation{SHA256: sum, SampleRate: w.SampleRate}, nil
}

func (f *Folder) adoptExcitation() (changed bool) {
	if f.man.Excitation != nil {
		return false
	}
	e, err := f.strayExcitation()
	if err != nil {
		f.notice("excitation-ignored", "", "%s is left out: %s", f.Path(excitationName), printable(err.Error()))
	}
	if e == nil {
		return false
	}
	f.man.Excitation = e
	f.notice("excitation-adopted", "", "%s was not in %s yet: taken up", f.Path(excitationName), manifestName)
	return true
}
