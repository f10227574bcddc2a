package session

import (
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"standoff/measure"
)

func TestNewFolder(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "out", "RB-07")
	f := create(t, dir)
	if got := get(t, filepath.Join(dir, "rig.yaml")); got != rigText {
		t.Errorf("rig.yaml is not the rig byte for byte: %q", got)
	}
	m := f.Manifest()
	if m.Schema != "standoff/session/1" || m.Tag != "RB-07" || m.Serial != "0193" || m.Version != "0.1.0" ||
		m.Recorder != "virtual bench" || !m.Created.Equal(noon) || len(m.Takes) != 0 {
		t.Errorf("manifest %+v", m)
	}
	if len(f.Notices()) != 0 {
		t.Errorf("notices %v", f.Notices())
	}
	if err := f.Close(); err != nil {
		t.Fatal(err)
	}
	if err := f.Close(); err != nil {
		t.Errorf("closing twice: %v", err)
	}
	for name := range tree(t, dir) {
		if strings.HasPrefix(name, ".") {
			t.Errorf("%s is left behind", name)
		}
	}
}

func TestGoesOn(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	first, second := recording(1, 900, false), recording(2, 800, true)
	a := add(t, f, near, first)
	f.Close()
	before := tree(t, dir)

	f = create(t, dir)
	if n := f.NextNumber("30mm"); n != 2 {
		t.Errorf("next number %d", n)
	}
	b := add(t, f, near, second)
	f.Close()
	after := tree(t, dir)
	if a.File != "takes/30mm-1.wav" || b.File != "takes/30mm-2.wav" || after[a.File] != before[a.File] || after[a.File] != a.SHA256 {
		t.Errorf("%s %s: the first take is not what it was", a.File, b.File)
	}
	g := reopen(t, dir)
	for i, want := range []*measure.Recording{first, second} {
		got, err := g.Load(g.Takes()[i])
		if err != nil {
			t.Fatal(err)
		}
		same(t, got, want)
	}
	if len(g.Notices()) != 0 {
		t.Errorf("notices %v", g.Notices())
	}
}

func TestAnotherRig(t *testing.T) {
	dir := t.TempDir()
	create(t, dir).Close()
	before := tree(t, dir)
	_, err := OpenOrCreate(dir, parse(t, strings.Replace(rigText, "2.5in", "60mm", 1)), usual)
	var changed *RigChangedError
	if !errors.As(err, &changed) || changed.Dir != dir || Hint(err) == "" {
		t.Fatalf("%T %v, hint %q", err, err, Hint(err))
	}
	wants(t, err, "\n@@ -4 +4 @@\n-distances: [30mm, 2.5in, 90mm]\n+distances: [30mm, 60mm, 90mm]", "+++ rig.yaml")
	if strings.Contains(err.Error(), "backend") {
		t.Errorf("shows lines that are the same: %v", err)
	}
	if after := tree(t, dir); len(after) != len(before) || after["session.json"] != before["session.json"] {
		t.Error("the refusal changed the folder")
	}
}

func TestForeignFolderIsRefused(t *testing.T) {
	for name, files := range map[string][]string{
		"notes":         {"notes.txt"},
		"rig and notes": {"rig.yaml", "notes.txt"},
		"takes alone":   {"takes/30mm-1.wav"},
		"report alone":  {"report.pdf"},
	} {
		dir := t.TempDir()
		for _, f := range files {
			put(t, filepath.Join(dir, f), rigText)
		}
		before := tree(t, dir)
		_, err := OpenOrCreate(dir, parse(t, rigText), usual)
		wants(t, err, "holds other files", filepath.Base(files[len(files)-1]))
		if after := tree(t, dir); len(after) != len(before) {
			t.Errorf("%s: left %v", name, after)
		}
	}
	file := filepath.Join(t.TempDir(), "x")
	put(t, file, "")
	_, err := OpenOrCreate(file, parse(t, rigText), usual)
	wants(t, err, "is a file")
	_, err = Open(file)
	wants(t, err, "is a file")
	_, err = Open(t.TempDir())
	wants(t, err, "is not a session folder")
	_, err = Open(filepath.Join(t.TempDir(), "none"))
	if !errors.Is(err, os.ErrNotExist) {
		t.Errorf("missing folder: %v", err)
	}
}

func TestFolderThatHoldsOnlyItsRig(t *testing.T) {
	dir := t.TempDir()
	put(t, filepath.Join(dir, "rig.yaml"), rigText)
	put(t, filepath.Join(dir, ".DS_Store"), "")
	add(t, create(t, dir), near, recording(1, 10, false))
}

func TestUnit(t *testing.T) {
	dir := t.TempDir()
	o := usual
	o.Tag, o.Serial = "RB-08", "0200"
	f, err := OpenOrCreate(dir, parse(t, rigText), o)
	if err != nil {
		t.Fatal(err)
	}
	if u := f.Rig().Unit; u.Tag != "RB-08" || u.Serial != "0200" {
		t.Errorf("unit %+v", u)
	}
	f.Close()
	if u := create(t, dir).Rig().Unit; u.Tag != "RB-08" { // nothing said: as it was begun
		t.Errorf("unit %+v", u)
	}
	if u := reopen(t, dir).Rig().Unit; u.Tag != "RB-08" || u.Serial != "0200" {
		t.Errorf("unit %+v", u)
	}
	for _, c := range []struct{ tag, serial, want string }{
		{"RB-09", "", "is of unit RB-08, not RB-09"}, {"RB-08", "1", `serial "0200", not "1"`}, {"../x", "", "cannot name a folder"},
	} {
		dir2 := t.TempDir()
		if err := os.CopyFS(dir2, os.DirFS(dir)); err != nil {
			t.Fatal(err)
		}
		os.Remove(filepath.Join(dir2, lockName))
		o.Tag, o.Serial = c.tag, c.serial
		_, err := OpenOrCreate(dir2, parse(t, rigText), o)
		wants(t, err, c.want)
	}
}

func TestID(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	ids := map[string]bool{f.ID(): true}
	for i, d := range []measure.Distance{near, inch, near} {
		add(t, f, d, recording(i, 50, false))
		ids[f.ID()] = true
	}
	if len(ids) != 4 || len(f.ID()) != 8 {
		t.Errorf("ids %v", ids)
	}
	id := f.ID()
	if err := f.Judge("takes/30mm-1.wav", Verdict{Accepted: true}); err != nil || f.ID() != id {
		t.Errorf("a verdict changed the id: %v", err)
	}
	f.Close()
	os.Remove(filepath.Join(dir, "session.json"))
	if got := reopen(t, dir).ID(); got != id {
		t.Errorf("rebuilt %s, was %s", got, id)
	}
}

func TestEditedRig(t *testing.T) {
	dir := t.TempDir()
	create(t, dir).Close()
	edited := rigText + "air: {temperature: 25C}\n"
	put(t, filepath.Join(dir, "rig.yaml"), edited)
	f := reopen(t, dir)
	if codes(f.Notices()) != "rig-edited" || f.Rig().Hash() != parse(t, edited).Hash() {
		t.Errorf("notices %v", f.Notices())
	}
	_, err := OpenOrCreate(dir, parse(t, edited), usual)
	wants(t, err, "was edited after the session was begun")
	_, err = OpenOrCreate(dir, parse(t, rigText), usual)
	wants(t, err, "-air: {temperature: 25C}")
	os.Remove(filepath.Join(dir, "rig.yaml"))
	_, err = Open(dir)
	wants(t, err, "rig.yaml is missing")
	_, err = OpenOrCreate(dir, parse(t, edited), usual)
	wants(t, err, "begun with another rig")
	if g := create(t, dir); codes(g.Notices()) != "rig-restored" || get(t, filepath.Join(dir, "rig.yaml")) != rigText {
		t.Errorf("notices %v", g.Notices())
	}
}

// TestFirstSchema opens the folder in testdata, which this program has not written.
func TestFirstSchema(t *testing.T) {
	dir := t.TempDir()
	if err := os.CopyFS(dir, os.DirFS("testdata/first/folder")); err != nil {
		t.Fatal(err)
	}
	f := reopen(t, dir)
	if len(f.Notices()) != 0 || len(f.Takes()) != 2 {
		t.Fatalf("%d takes, notices %v", len(f.Takes()), f.Notices())
	}
	for i, take := range f.Takes() {
		rec, err := f.Load(take)
		if err != nil {
			t.Fatal(err)
		}
		for n, v := range rec.Mic {
			if want := float32(n%200-100) / 32768; v != want || i == 1 && rec.Loopback[n] != -want {
				t.Fatalf("%s: sample %d is %g", take.File, n, v)
			}
		}
	}
	if err := f.Judge("takes/2.5in-1.wav", Verdict{Flags: []measure.Flag{measure.Xrun}}); err != nil {
		t.Fatal(err)
	}
	text := get(t, filepath.Join(dir, "session.json"))
	for _, kept := range []string{`"exact": 1234567890123456789`, `"humour": "dry"`, `"started": "2025-03-04T09:31:00+01:00"`} {
		if !strings.Contains(text, kept) {
			t.Errorf("%s was lost", kept)
		}
	}
}
