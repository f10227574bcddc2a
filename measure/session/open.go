package session

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"time"

	"standoff/measure/rig"
)

// Options are what a session notes besides the rig.
type Options struct {
	Version  string           // of the program
	Now      func() time.Time // nil: time.Now
	Tag      string           // instead of the rig's; "" leaves it
	Serial   string           // instead of the rig's; "" leaves it
	Recorder string           // what records, in a few words
}

// OpenOrCreate opens a folder to add takes, and makes it if it is new or empty.
// A folder begun with the same rig goes on, whatever became of the run before.
//
// Errors: *BusyError while another process has it, *RigChangedError when it was
// begun with another rig; a folder with other content, of another unit, or one
// that cannot be written to is refused with nothing changed in it.
func OpenOrCreate(dir string, r *rig.Rig, o Options) (*Folder, error) {
	return openOrCreate(dir, r, o, func(d disk) disk { return d })
}

func openOrCreate(dir string, r *rig.Rig, o Options, wrap func(disk) disk) (*Folder, error) {
	if r == nil {
		return nil, errors.New("a session needs a rig")
	}
	if o.Tag != "" {
		if err := rig.CheckTag(o.Tag); err != nil {
			return nil, &hinted{err, rig.TagRule}
		}
	}
	if o.Now == nil {
		o.Now = time.Now
	}
	if err := makeDir(dir); err != nil {
		return nil, err
	}
	f, err := enter(dir, o.Now, wrap)
	if err != nil {
		return nil, err
	}
	if err := f.begin(r, o); err != nil {
		f.Close()
		return nil, err
	}
	return f, nil
}

func makeDir(dir string) error {
	info, err := os.Stat(dir)
	switch {
	case err == nil && info.IsDir():
		return nil
	case err == nil:
		return fmt.Errorf("%s is a file, not a folder", dir)
	}
	if err := os.MkdirAll(dir, 0o777); err != nil {
		return cannot("make", dir, err)
	}
	parent, err := os.Open(filepath.Dir(filepath.Clean(dir)))
	if err != nil {
		return nil // it may be closed to us, and still hold the new folder
	}
	defer parent.Close()
	if err := syncDir(parent); err != nil {
		return cannot("make", dir, err)
	}
	return nil
}

func enter(dir string, now func() time.Time, wrap func(disk) disk) (*Folder, error) {
	root, err := os.OpenRoot(dir)
	if err != nil {
		return nil, cannot("open", dir, err)
	}
	return &Folder{dir: dir, disk: wrap(rootDisk{root}), now: now}, nil
}

func (f *Folder) begin(r *rig.Rig, o Options) (err error) {
	if err := f.refuseForeign(); err != nil {
		return err
	}
	if f.lock, err = acquire(f.dir, f.now()); err != nil {
		return err
	}
	f.noticeLock()
	m, found, err := f.read()
	if err != nil {
		return err
	}
	if err := f.settleRig(r, m, found); err != nil {
		return err
	}
	changed, err := f.settleUnit(r, o, &m, found)
	if err != nil {
		return err
	}
	f.man = m
	f.removeTemps()
	return f.complete(changed)
}
