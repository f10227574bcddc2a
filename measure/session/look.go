package session

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"time"

	"standoff/measure/rig"
)

// Open opens a session to analyse it. It writes nothing by itself and works in a
// folder that cannot be written to, or that a run is adding to. Takes that the
// manifest does not know are taken up in memory.
func Open(dir string) (*Folder, error) {
	info, err := os.Stat(dir)
	if err != nil {
		return nil, cannot("open", dir, err)
	}
	if !info.IsDir() {
		return nil, fmt.Errorf("%s is a file, not a session folder", dir)
	}
	f, err := enter(dir, time.Now, func(d disk) disk { return d })
	if err != nil {
		return nil, err
	}
	if err := f.look(); err != nil {
		f.Close()
		return nil, err
	}
	return f, nil
}

func (f *Folder) look() error {
	// The list of files first: what a run adds meanwhile is then at worst missed,
	// and never taken for something that the manifest does not know.
	files, err := f.takeFiles()
	if err != nil {
		return err
	}
	m, found, err := f.read()
	if err != nil {
		return err
	}
	raw, err := f.disk.ReadFile(rigName, rig.MaxBytes)
	if errors.Is(err, fs.ErrNotExist) && (found || len(files) > 0) {
		return hintedf("put the rig back into it", "%s: %s is missing", f.dir, rigName)
	}
	if errors.Is(err, fs.ErrNotExist) || err == nil && !found && len(files) == 0 {
		return fmt.Errorf("%s is not a session folder: it has no %s", f.dir, manifestName)
	}
	if err != nil {
		return cannot("read", f.Path(rigName), err)
	}
	r, err := rig.ParseWith(f.Path(rigName), raw, f.includedSource)
	if err != nil {
		return err
	}
	f.man = m
	if !found {
		f.man = f.rebuilt(r)
	} else if m.RigSHA256 != r.Hash() {
		f.notice("rig-edited", "", "%s was edited after the session was begun: it counts as it is now", f.Path(rigName))
	}
	f.setRig(r, f.man)
	f.adopt(files)
	return nil
}

// rebuilt is a manifest for a folder that has lost its own.
func (f *Folder) rebuilt(r *rig.Rig) Manifest {
	m := Manifest{Schema: Schema, RigSHA256: r.Hash(), Tag: r.Unit.Tag, Serial: r.Unit.Serial}
	if info, err := f.disk.Lstat(rigName); err == nil {
		m.Created = info.ModTime()
	}
	f.notice("manifest-rebuilt", "", "%s is missing: the takes are listed from their files", f.Path(manifestName))
	return m
}
