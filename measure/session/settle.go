package session

import (
	"bytes"
	"cmp"
	"errors"
	"io"
	"io/fs"

	"standoff/measure/rig"
)

func (f *Folder) noticeLock() {
	if f.lock.missing {
		f.notice("no-lock", "let nothing else write into it", "the file system of %s has no locks", f.dir)
	}
	if h := f.lock.cutOff; h != nil {
		f.notice("cut-off", "", "the run before (process %d on %s) was cut off; what it had recorded is here", h.PID, h.Host)
	}
}

// settleRig makes sure that rig.yaml is the rig.
func (f *Folder) settleRig(r *rig.Rig, m Manifest, found bool) error {
	raw, err := f.disk.ReadFile(rigName, rig.MaxBytes)
	switch {
	case err == nil && !bytes.Equal(raw, r.Raw):
		return rigChanged(f.dir, f.Path(rigName), r.Path, raw, r.Raw)
	case err == nil:
		if err := f.settleSource(r); err != nil {
			return err
		}
		if found && m.RigSHA256 != r.Hash() {
			return &RigChangedError{Dir: f.dir}
		}
		return nil
	case !errors.Is(err, fs.ErrNotExist):
		return cannot("read", f.Path(rigName), err)
	case found && m.RigSHA256 != r.Hash():
		return hintedf("use the rig that it was begun with", "%s was begun with another rig, and its %s is gone", f.dir, rigName)
	case found:
		f.notice("rig-restored", "", "%s was missing and has been put back", f.Path(rigName))
	}
	_, _, err = place(f.disk, rigName, true, func(w io.Writer) error {
		_, err := w.Write(r.Raw)
		return err
	})
	if err != nil {
		return cannot("write", f.Path(rigName), err)
	}
	return f.settleSource(r)
}

// settleSource keeps the file that the rig's source.from names beside the rig, so that
// the folder can be read wherever it goes.
func (f *Folder) settleSource(r *rig.Rig) error {
	if r.Source.From == "" {
		return nil
	}
	raw, err := f.disk.ReadFile(sourceName, rig.MaxBytes)
	switch {
	case err == nil && !bytes.Equal(raw, r.Source.Raw):
		return rigChanged(f.dir, f.Path(sourceName), r.Source.From, raw, r.Source.Raw)
	case err == nil:
		return nil
	case !errors.Is(err, fs.ErrNotExist):
		return cannot("read", f.Path(sourceName), err)
	}
	_, _, err = place(f.disk, sourceName, true, func(w io.Writer) error {
		_, err := w.Write(r.Source.Raw)
		return err
	})
	if err != nil {
		return cannot("write", f.Path(sourceName), err)
	}
	return nil
}

// includedSource is that file, whatever the rig calls it.
func (f *Folder) includedSource(string) (string, []byte, error) {
	raw, err := f.disk.ReadFile(sourceName, rig.MaxBytes)
	return f.Path(sourceName), raw, err
}

// settleUnit makes sure that all takes are of one unit.
func (f *Folder) settleUnit(r *rig.Rig, o Options, m *Manifest, found bool) (changed bool, err error) {
	if !found {
		*m = Manifest{Schema: Schema, Version: printable(o.Version), Created: f.now(), RigSHA256: r.Hash(),
			Tag: cmp.Or(o.Tag, r.Unit.Tag), Serial: printable(cmp.Or(o.Serial, r.Unit.Serial)), Recorder: printable(o.Recorder)}
		changed = true
	}
	const hint = "choose another folder for another unit"
	if o.Tag != "" && o.Tag != m.Tag {
		return false, hintedf(hint, "%s is of unit %s, not %s", f.dir, m.Tag, o.Tag)
	}
	if o.Serial = printable(o.Serial); o.Serial != "" && m.Serial == "" {
		m.Serial, changed = o.Serial, true
	}
	if o.Serial != "" && o.Serial != m.Serial {
		return false, hintedf(hint, "%s is of the unit with serial %q, not %q", f.dir, m.Serial, o.Serial)
	}
	f.setRig(r, *m)
	return changed, nil
}

func (f *Folder) setRig(r *rig.Rig, m Manifest) {
	own := *r
	own.Unit.Tag, own.Unit.Serial = m.Tag, m.Serial
	f.rig = &own
}

// complete makes what is missing and takes up what is not in the manifest.
func (f *Folder) complete(changed bool) error {
	if err := f.disk.Mkdir(takesDir); err != nil {
		return cannot("make", f.Path(takesDir), err)
	}
	if err := f.disk.SyncDir("."); err != nil {
		return cannot("write into", f.dir, err)
	}
	files, err := f.takeFiles()
	if err != nil {
		return err
	}
	if adopted := f.adopt(files); !adopted && !changed {
		return nil
	}
	return f.write(f.man)
}
