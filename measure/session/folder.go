package session

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"path/filepath"
	"slices"
	"sync"
	"time"

	"standoff/measure"
	"standoff/measure/rig"
)

const (
	rigName        = "rig.yaml"
	sourceName     = "source.yaml"
	manifestName   = "session.json"
	excitationName = "excitation.wav"
)

// Folder is an open session. Its methods may be called from several
// goroutines, Close after all of them.
type Folder struct {
	dir  string
	disk disk
	rig  *rig.Rig
	now  func() time.Time
	lock *lock // nil when opened by Open

	mu      sync.Mutex
	man     Manifest
	notices []measure.Warning
}

// Dir is the folder's path, as given.
func (f *Folder) Dir() string { return f.dir }

// Rig is the session's rig, with the tag and serial that the session goes by.
func (f *Folder) Rig() *rig.Rig { return f.rig }

// Manifest is a copy of what session.json says.
func (f *Folder) Manifest() Manifest {
	f.mu.Lock()
	defer f.mu.Unlock()
	return f.man.clone()
}

// Takes are copies of all entries, in the order made.
func (f *Folder) Takes() []Take { return f.Manifest().Takes }

// Notices are what the user should know about how the folder was found.
func (f *Folder) Notices() []measure.Warning {
	f.mu.Lock()
	defer f.mu.Unlock()
	return slices.Clone(f.notices)
}

func (f *Folder) notice(code, hint, format string, args ...any) {
	w := measure.Warning{Code: code, Text: fmt.Sprintf(format, args...), Hint: hint}
	if !slices.Contains(f.notices, w) {
		f.notices = append(f.notices, w)
	}
}

// ID is eight hexadecimal digits of the SHA-256 over the hashes of rig,
// excitation and takes. It is the same on every machine and for a manifest that
// was rebuilt, and changes with every take.
func (f *Folder) ID() string {
	m := f.Manifest()
	lines := make([]string, 0, len(m.Takes))
	for _, t := range m.Takes {
		lines = append(lines, t.SHA256+" "+t.File+"\n")
	}
	slices.Sort(lines)
	h := sha256.New()
	fmt.Fprintf(h, "%s %s\n", f.rig.Hash(), rigName)
	if m.Excitation != nil {
		fmt.Fprintf(h, "%s %s\n", m.Excitation.SHA256, excitationName)
	}
	for _, line := range lines {
		io.WriteString(h, line)
	}
	return hex.EncodeToString(h.Sum(nil)[:4])
}

// Path is where a file of the session lies, given its slash-separated name.
func (f *Folder) Path(rel string) string { return filepath.Join(f.dir, filepath.FromSlash(rel)) }

// Close lets go of the folder. It may be called more than once.
func (f *Folder) Close() error {
	f.mu.Lock()
	defer f.mu.Unlock()
	var errs []error
	if f.lock != nil {
		errs = append(errs, f.lock.release())
		f.lock = nil
	}
	if f.disk != nil {
		errs = append(errs, f.disk.Close())
		f.disk = closedDisk{}
	}
	return errors.Join(errs...)
}

// change alters the manifest and writes it. On an error the manifest is as it
// was. A folder that was opened without the lock takes it for this moment, and
// reads first what others have written meanwhile.
func (f *Folder) change(alter func(*Manifest) error) error {
	if f.lock == nil {
		l, err := f.borrowLock()
		if err != nil {
			return err
		}
		defer l.release()
	}
	altered := f.man.clone()
	if err := alter(&altered); err != nil {
		return err
	}
	if err := f.write(altered); err != nil {
		return err
	}
	f.man = altered
	return nil
}

func (f *Folder) borrowLock() (*lock, error) {
	if _, closed := f.disk.(closedDisk); closed {
		return nil, fmt.Errorf("%s: %w", f.dir, fs.ErrClosed)
	}
	l, err := acquire(f.dir, f.now())
	if err != nil {
		return nil, err
	}
	if err := f.reload(); err != nil {
		l.release()
		return nil, err
	}
	return l, nil
}

// reload brings in what another process has written since.
func (f *Folder) reload() error {
	m, found, err := f.read()
	if err != nil {
		return err
	}
	if found {
		f.man = m
	}
	files, err := f.takeFiles()
	if err != nil {
		return err
	}
	f.adopt(files)
	return nil
}

func (f *Folder) read() (m Manifest, found bool, err error) {
	data, err := f.disk.ReadFile(manifestName, maxManifest)
	if errors.Is(err, fs.ErrNotExist) {
		return Manifest{}, false, nil
	}
	if err != nil {
		return Manifest{}, false, cannot("read", f.Path(manifestName), err)
	}
	m, err = decode(f.Path(manifestName), data)
	return m, err == nil, err
}

func (f *Folder) write(m Manifest) error {
	data, err := encode(m)
	if err != nil {
		return fmt.Errorf("cannot write %s: %w", f.Path(manifestName), err)
	}
	_, _, err = place(f.disk, manifestName, false, func(w io.Writer) error {
		_, err := io.Copy(w, bytes.NewReader(data))
		return err
	})
	if err != nil {
		return cannot("write", f.Path(manifestName), err)
	}
	return nil
}
