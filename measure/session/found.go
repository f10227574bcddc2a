package session

import (
	"bytes"
	"cmp"
	"errors"
	"fmt"
	"io/fs"
	"path"
	"slices"
	"strings"
	"time"

	"standoff/measure/wav"
)

const (
	maxTake  = 1 << 30 // bytes: 23 minutes of two channels at 96 kHz
	oldAfter = time.Hour
)

// derived are the names that this program writes next to the takes.
var derived = []string{"responses", "plots", "result.json", "responses.csv", "report.pdf"}

// bySystem are files that a desktop leaves in every folder that it shows.
var bySystem = []string{".DS_Store", "Thumbs.db", "desktop.ini"}

// refuseForeign keeps a new session out of a folder that is something else.
func (f *Folder) refuseForeign() error {
	entries, err := f.disk.ReadDir(".")
	if err != nil {
		return cannot("read", f.dir, err)
	}
	has := func(name string) bool {
		return slices.ContainsFunc(entries, func(e fs.DirEntry) bool { return e.Name() == name })
	}
	if has(manifestName) {
		return nil
	}
	known := slices.Concat(bySystem, []string{lockName, rigName, sourceName, takesDir})
	if has(rigName) {
		known = slices.Concat(known, derived, []string{excitationName})
	}
	var others []string
	for _, e := range entries {
		if !isTemp(e.Name()) && !slices.Contains(known, e.Name()) {
			others = append(others, e.Name())
		}
	}
	if len(others) == 0 && has(takesDir) && !has(rigName) {
		others = f.inTakes()
	}
	if len(others) == 0 {
		return nil
	}
	return hintedf("choose an empty folder, or a new name", "%s holds other files: %s", f.dir, few(others))
}

// inTakes lists what is in takes/ where no rig.yaml says whose takes they are.
func (f *Folder) inTakes() []string {
	entries, err := f.disk.ReadDir(takesDir)
	if err != nil {
		return []string{takesDir}
	}
	var names []string
	for _, e := range entries {
		if !isTemp(e.Name()) && !slices.Contains(bySystem, e.Name()) {
			names = append(names, path.Join(takesDir, e.Name()))
		}
	}
	return names
}

func few(names []string) string {
	const most = 3
	shown := make([]string, 0, most)
	for _, n := range names[:min(len(names), most)] {
		shown = append(shown, printable(n))
	}
	text := strings.Join(shown, ", ")
	if more := len(names) - most; more > 0 {
		text += fmt.Sprintf(" and %d more", more)
	}
	return text
}

// removeTemps clears away what runs that were cut off left half-written. A young
// one may belong to a program that writes a derived file right now.
func (f *Folder) removeTemps() {
	for _, dir := range []string{".", takesDir, "responses", "plots"} {
		entries, err := f.disk.ReadDir(dir)
		if err != nil {
			continue // not there, or complete will say so
		}
		for _, e := range entries {
			info, err := e.Info()
			if err == nil && isTemp(e.Name()) && info.Mode().IsRegular() && f.now().Sub(info.ModTime()) > oldAfter {
				_ = f.disk.Remove(path.Join(dir, e.Name()))
			}
		}
	}
}

// takeFiles are the names in takes/ that end like a recording.
func (f *Folder) takeFiles() ([]fs.FileInfo, error) {
	entries, err := f.disk.ReadDir(takesDir)
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return nil, cannot("read", f.Path(takesDir), err)
	}
	var files []fs.FileInfo
	for _, e := range entries {
		if info, err := e.Info(); err == nil && strings.EqualFold(path.Ext(e.Name()), ".wav") && !isTemp(e.Name()) {
			files = append(files, info)
		}
	}
	return files, nil
}

// adopt enters what lies in the folder and is not in the manifest: what was
// renamed into place just before a crash, or whose manifest is lost.
func (f *Folder) adopt(files []fs.FileInfo) (changed bool) {
	slices.SortStableFunc(files, func(a, b fs.FileInfo) int {
		_, x, _ := takeName(a.Name())
		_, y, _ := takeName(b.Name())
		return cmp.Or(a.ModTime().Compare(b.ModTime()), cmp.Compare(x, y))
	})
	for _, info := range files {
		name := path.Join(takesDir, info.Name())
		if f.man.find(name) >= 0 {
			continue
		}
		t, err := f.takeFrom(info)
		if err != nil {
			f.notice("take-ignored", "", "%s is left out: %s", f.Path(printable(name)), printable(err.Error()))
			continue
		}
		f.man.Takes = append(f.man.Takes, t)
		f.notice("take-adopted", "", "%s was not in %s yet: taken up, not judged", f.Path(name), manifestName)
		changed = true
	}
	return f.adoptExcitation() || changed
}

func (f *Folder) takeFrom(info fs.FileInfo) (Take, error) {
	label, number, ok := takeName(info.Name())
	if !ok {
		return Take{}, errors.New("it does not have the name of a take")
	}
	for _, d := range f.rig.Distances {
		if d.Label != label {
			continue
		}
		t := Take{File: takeFile(label, number), Distance: label, Number: number, Metres: d.Metres, Started: info.ModTime()}
		w, sum, err := f.readWAV(t.File)
		if err != nil {
			return Take{}, err
		}
		t.SHA256, t.SampleRate, t.Channels = sum, w.SampleRate, w.Channels
		return t, t.check()
	}
	return Take{}, fmt.Errorf("%s is not one of the rig's distances", label)
}

// readWAV reads a file once, so that the sum is of what was decoded.
func (f *Folder) readWAV(name string) (w *wav.File, sum string, err error) {
	data, err := f.disk.ReadFile(name, maxTake)
	if err != nil {
		return nil, "", bare(err)
	}
	sum = sumOf(data)
	w, err = wav.Decode(bytes.NewReader(data))
	if err == nil && len(w.Samples) != w.Channels {
		err = fmt.Errorf("%d of %d channels", len(w.Samples), w.Channels)
	}
	return w, sum, err
}
