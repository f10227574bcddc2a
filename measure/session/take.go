package session

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"slices"
	"strings"
	"time"

	"standoff/measure"
	"standoff/measure/wav"
)

// NextNumber is the number of the next take at a distance: one more than the
// largest in the manifest and on disk, so no number is ever used twice.
func (f *Folder) NextNumber(label string) int {
	f.mu.Lock()
	defer f.mu.Unlock()
	return f.nextNumber(label)
}

func (f *Folder) nextNumber(label string) int {
	last := 0
	for _, t := range f.man.Takes {
		if strings.EqualFold(t.Distance, label) {
			last = max(last, t.Number)
		}
	}
	entries, _ := f.disk.ReadDir(takesDir) // an unreadable takes/ stops AddTake itself
	for _, e := range entries {
		// Without regard to case, as some file systems compare names.
		if l, n, ok := takeName(e.Name()); ok && strings.EqualFold(l, label) {
			last = max(last, n)
		}
	}
	return last + 1
}

// AddTake stores a recording as the next take at a distance, as 32-bit float with
// the loopback, if there is one, as second channel: first the file, then its
// entry, each synced before it gets its name. The source says where it came from.
//
// On an error the take's File tells what happened: empty, nothing was stored and
// the same recording can be added again; otherwise it is stored and in Takes,
// and only its entry is not on disk yet (the next change writes it, and the next
// opening finds the file).
func (f *Folder) AddTake(d measure.Distance, source string, rec *measure.Recording) (Take, error) {
	f.mu.Lock()
	defer f.mu.Unlock()
	if err := checkRecording(rec); err != nil {
		return Take{}, fmt.Errorf("take at %q: %w", d.Label, err)
	}
	if f.lock == nil {
		l, err := f.borrowLock()
		if err != nil {
			return Take{}, err
		}
		defer l.release()
	}
	t := newTake(d, f.nextNumber(d.Label), source, rec)
	if err := t.check(); err != nil {
		return Take{}, fmt.Errorf("take at %q: %w", d.Label, err)
	}
	stored, err := f.store(&t, rec)
	if !stored {
		return Take{}, cannot("store", f.Path(t.File), err)
	}
	f.man.Takes = append(f.man.Takes, t.clone())
	if err != nil {
		return t, hintedf(cureOf(err), "%s is stored, but might not outlast a power cut: %w", f.Path(t.File), bare(err))
	}
	if err := f.write(f.man); err != nil {
		return t, fmt.Errorf("%s is stored, but not entered: %w", f.Path(t.File), err)
	}
	return t, nil
}

func checkRecording(rec *measure.Recording) error {
	switch {
	case rec == nil || len(rec.Mic) == 0:
		return errors.New("nothing was recorded")
	case rec.Loopback != nil && len(rec.Loopback) != len(rec.Mic):
		return fmt.Errorf("loopback has %d samples and the microphone %d", len(rec.Loopback), len(rec.Mic))
	}
	return nil
}

func newTake(d measure.Distance, number int, source string, rec *measure.Recording) Take {
	t := Take{
		File: takeFile(d.Label, number), Distance: d.Label, Number: number, Metres: d.Metres,
		SHA256:  strings.Repeat("0", 64), // until the file is written
		Started: rec.Started.Round(0), SampleRate: rec.SampleRate, Channels: 1,
		Overflows: rec.Overflows, Underflows: rec.Underflows, Source: printable(source),
	}
	if rec.Loopback != nil {
		t.Channels = 2
	}
	if _, err := t.Started.MarshalJSON(); err != nil {
		t.Started = time.Time{} // a clock that is so wrong says nothing
	}
	return t
}

func (f *Folder) store(t *Take, rec *measure.Recording) (stored bool, err error) {
	samples := [][]float32{rec.Mic}
	if rec.Loopback != nil {
		samples = append(samples, rec.Loopback)
	}
	if err := f.disk.Mkdir(takesDir); err != nil {
		return false, err
	}
	t.SHA256, stored, err = place(f.disk, t.File, true, func(w io.Writer) error {
		return wav.Encode(w, floatWAV(rec.SampleRate, samples))
	})
	return stored, err
}

func floatWAV(rate int, samples [][]float32) *wav.File {
	return &wav.File{
		Format:  wav.Format{SampleRate: rate, Channels: len(samples), Bits: 32, Float: true},
		Samples: samples,
	}
}

// Judge enters a verdict on a take, in place of the one before.
func (f *Folder) Judge(file string, v Verdict) error {
	f.mu.Lock()
	defer f.mu.Unlock()
	if err := checkFlags(v.Flags); err != nil {
		return err
	}
	return f.change(func(m *Manifest) error {
		i := m.find(file)
		if i < 0 {
			return fmt.Errorf("%s has no take %s", f.dir, printable(file))
		}
		t := &m.Takes[i]
		t.Judged, t.Accepted, t.Flags = true, v.Accepted, slices.Clone(v.Flags)
		t.Quality, t.Reason = v.Quality, printable(v.Reason)
		return nil
	})
}

// Load reads a take back. A file that is not what was recorded is refused with
// an error that is ErrTakeChanged.
func (f *Folder) Load(t Take) (*measure.Recording, error) {
	if err := t.check(); err != nil {
		return nil, fmt.Errorf("%s: %w", f.dir, err)
	}
	w, err := f.verified(t.File, t.SHA256)
	if err != nil {
		return nil, err
	}
	if w.Channels != t.Channels || w.SampleRate != t.SampleRate {
		return nil, fmt.Errorf("%s has %d channels at %d Hz where %s says %d at %d Hz",
			f.Path(t.File), w.Channels, w.SampleRate, manifestName, t.Channels, t.SampleRate)
	}
	rec := &measure.Recording{SampleRate: w.SampleRate, Mic: w.Samples[0],
		Overflows: t.Overflows, Underflows: t.Underflows, Started: t.Started}
	if w.Channels == 2 {
		rec.Loopback = w.Samples[1]
	}
	return rec, nil
}

func (f *Folder) verified(name, sum string) (*wav.File, error) {
	w, now, err := f.readWAV(name)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, hintedf("put it back from a copy, or measure that distance again",
			"%s is missing, though %s lists it: %w", f.Path(name), manifestName, err)
	case now != "" && now != sum:
		return nil, hintedf("put it back from a copy, or measure that distance again",
			"%s has %w: SHA-256 was %s… and is %s…", f.Path(name), ErrTakeChanged, sum[:12], now[:12])
	case err != nil:
		return nil, cannot("read", f.Path(name), err)
	}
	return w, nil
}
