package session

import (
	"bytes"
	"errors"
	"io"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"time"

	"standoff/measure"
)

func TestTakeIsWhatWasRecorded(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	for seed, loopback := range []bool{false, true} {
		rec := recording(seed, 3000, loopback)
		take := add(t, f, inch, rec)
		if tree(t, dir)[take.File] != take.SHA256 {
			t.Errorf("%s has another hash", take.File)
		}
		got, err := f.Load(take)
		if err != nil {
			t.Fatal(err)
		}
		same(t, got, rec)
		want := Take{File: take.File, Distance: "2.5in", Number: seed + 1, Metres: 0.0635, SHA256: take.SHA256, Started: rec.Started,
			SampleRate: 48000, Channels: seed + 1, Overflows: rec.Overflows, Underflows: rec.Underflows, Source: "virtual bench"}
		if !reflect.DeepEqual(take, want) {
			t.Errorf("got  %+v\nwant %+v", take, want)
		}
	}
	for i, take := range reopen(t, dir).Takes() {
		if want := f.Takes()[i]; take.SHA256 != want.SHA256 || take.Number != want.Number || take.Judged {
			t.Errorf("came back as %+v", take)
		}
	}
}

func TestTakesThatAreNone(t *testing.T) {
	f := create(t, t.TempDir())
	rate0 := recording(1, 10, false)
	rate0.SampleRate = 0
	odd := recording(1, 10, true)
	odd.Loopback = odd.Loopback[:9]
	lost := recording(1, 10, false)
	lost.Overflows = -1
	for name, c := range map[string]struct {
		d   measure.Distance
		rec *measure.Recording
	}{
		"nil": {near, nil}, "empty": {near, &measure.Recording{SampleRate: 48000}}, "rate": {near, rate0}, "loopback": {near, odd},
		"counts": {near, lost}, "no distance": {measure.Distance{Label: "30mm"}, recording(1, 10, false)},
		"NaN":  {measure.Distance{Label: "30mm", Metres: math.NaN()}, recording(1, 10, false)},
		"path": {measure.Distance{Label: "../30mm", Metres: 0.03}, recording(1, 10, false)},
		"none": {measure.Distance{Metres: 0.03}, recording(1, 10, false)},
	} {
		if take, err := f.AddTake(c.d, "", c.rec); err == nil || take.File != "" {
			t.Errorf("%s: stored as %s, %v", name, take.File, err)
		}
	}
	if n := len(tree(t, f.Path("takes"))); n != 0 || len(f.Takes()) != 0 {
		t.Errorf("%d files, %d takes", n, len(f.Takes()))
	}
	wild := recording(1, 10, false)
	wild.Started = time.Date(20000, 1, 1, 0, 0, 0, 0, time.UTC)
	add(t, f, near, wild) // a wrong clock loses no take
}

func TestNumberIsNeverUsedTwice(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	add(t, f, near, recording(1, 10, false))
	put(t, filepath.Join(dir, "takes", "30mm-7.wav"), "somebody's")
	if n := f.NextNumber("30mm"); n != 8 {
		t.Errorf("next number %d", n)
	}
	if n := f.NextNumber("90mm"); n != 1 {
		t.Errorf("next number %d", n)
	}
	put(t, filepath.Join(dir, "takes", "90MM-4.wav"), "") // the same name on some systems
	if n := f.NextNumber("90mm"); n != 5 {
		t.Errorf("next number %d", n)
	}
	add(t, f, near, recording(2, 10, false))
	os.Remove(filepath.Join(dir, "takes", "30mm-8.wav"))
	if take := add(t, f, near, recording(3, 10, false)); take.Number != 9 {
		t.Errorf("number %d", take.Number)
	}
	if get(t, filepath.Join(dir, "takes", "30mm-7.wav")) != "somebody's" {
		t.Error("overwritten")
	}
}

func TestChangedTakeIsRefused(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	take := add(t, f, near, recording(1, 500, false))
	path := filepath.Join(dir, take.File)
	raw := []byte(get(t, path))
	for _, at := range []int{0, 30, len(raw) / 2, len(raw) - 1} {
		bad := bytes.Clone(raw)
		bad[at] ^= 4
		put(t, path, string(bad))
		_, err := f.Load(take)
		wants(t, err, path, "changed since it was recorded", take.SHA256[:12])
		if !errors.Is(err, ErrTakeChanged) {
			t.Errorf("%v is not ErrTakeChanged", err)
		}
	}
	os.Remove(path)
	_, err := f.Load(take)
	wants(t, err, path, "is missing")
	if _, err := f.Load(Take{File: "../../etc/passwd"}); err == nil {
		t.Error("loaded a path that leads out")
	}
}

func TestVerdict(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	take := add(t, f, near, recording(1, 50, false))
	v := Verdict{Flags: []measure.Flag{measure.Silent}, Reason: "nothing\x1b[2J arrived",
		Quality: Quality{PeakDBFS: math.Inf(-1), SNRDB: math.NaN(), ArrivalS: 0.25}}
	if err := f.Judge(take.File, v); err != nil {
		t.Fatal(err)
	}
	got := reopen(t, dir).Takes()[0]
	q := got.Quality
	if !got.Judged || got.Accepted || len(got.Flags) != 1 || got.Flags[0] != measure.Silent ||
		!math.IsNaN(q.PeakDBFS) || !math.IsNaN(q.SNRDB) || q.ArrivalS != 0.25 || strings.ContainsRune(got.Reason, 0x1b) {
		t.Errorf("came back as %+v", got)
	}
	v = Verdict{Accepted: true, Quality: Quality{-6.5, 61, 0.001}}
	if err := f.Judge(take.File, v); err != nil {
		t.Fatal(err)
	}
	if got := reopen(t, dir).Takes()[0]; !got.Accepted || len(got.Flags) != 0 || got.Quality != v.Quality || got.Reason != "" {
		t.Errorf("came back as %+v", got)
	}
	wants(t, f.Judge("takes/30mm-2.wav", v), "no take takes/30mm-2.wav")
	wants(t, f.Judge(take.File, Verdict{Flags: []measure.Flag{"\n"}}), "not a word")
	copied := f.Takes()
	copied[0].Flags = append(copied[0].Flags, measure.Hum)
	copied[0].File = "x"
	if f.Takes()[0].File != take.File {
		t.Error("Takes hands out the manifest itself")
	}
}

func TestVerdictsFromTwoSides(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	add(t, f, near, recording(1, 50, false))
	reader := reopen(t, dir)
	add(t, f, near, recording(2, 50, false))
	if err := reader.Judge("takes/30mm-1.wav", Verdict{Accepted: true}); err == nil || Hint(err) == "" {
		t.Fatalf("wrote into a folder that a run holds: %v", err)
	}
	f.Close()
	// The reader has not seen the second take: its writing must not lose it.
	if err := reader.Judge("takes/30mm-1.wav", Verdict{Accepted: true}); err != nil {
		t.Fatal(err)
	}
	if take := add(t, reader, near, recording(3, 50, false)); take.Number != 3 {
		t.Errorf("number %d", take.Number)
	}
	takes := reopen(t, dir).Takes()
	if len(takes) != 3 || !takes[0].Accepted || takes[1].Underflows != 0 || takes[1].Overflows != 2 {
		t.Errorf("takes %+v", takes)
	}
}

func TestExcitation(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	if _, _, ok, err := f.Excitation(); ok || err != nil {
		t.Errorf("an excitation, %v", err)
	}
	x := recording(5, 700, false).Mic
	id := f.ID()
	for range 2 {
		if err := f.SetExcitation(x, 96000); err != nil {
			t.Fatal(err)
		}
	}
	if f.ID() == id {
		t.Error("the id does not know the excitation")
	}
	other := append([]float32{0.5}, x[1:]...)
	wants(t, f.SetExcitation(other, 96000), "another sweep")
	wants(t, f.SetExcitation(x, 48000), "another sweep")
	if f.SetExcitation(nil, 48000) == nil || f.SetExcitation(x, 0) == nil {
		t.Error("took nothing for an excitation")
	}
	got, rate, ok, err := reopen(t, dir).Excitation()
	if err != nil || !ok || rate != 96000 || !reflect.DeepEqual(got, x) {
		t.Errorf("came back with %d samples at %d Hz, %v", len(got), rate, err)
	}
	put(t, filepath.Join(dir, "excitation.wav"), "RIFF")
	_, _, _, err = f.Excitation()
	wants(t, err, "excitation.wav has changed since it was recorded")
}

func TestDerivedFiles(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	add(t, f, near, recording(1, 50, false))
	r := reopen(t, dir) // while the run has it
	text := func(s string) func(io.Writer) error {
		return func(w io.Writer) error { _, err := io.WriteString(w, s); return err }
	}
	for _, name := range []string{"result.json", "responses.csv", "report.pdf", "plots/a b.svg", "responses/30mm.wav"} {
		for _, s := range []string{"first", "second"} {
			if err := r.WriteFile(name, text(s)); err != nil {
				t.Fatal(err)
			}
		}
		if got := get(t, r.Path(name)); got != "second" {
			t.Errorf("%s is %q", name, got)
		}
	}
	broken := errors.New("no figure")
	err := r.WriteFile("report.pdf", func(w io.Writer) error { io.WriteString(w, "half"); return broken })
	if !errors.Is(err, broken) || get(t, r.Path("report.pdf")) != "second" {
		t.Errorf("half-written: %v", err)
	}
	before := tree(t, dir)
	for _, name := range []string{"takes/30mm-1.wav", "takes", "Takes/30mm-1.wav", "rig.yaml", "RIG.yaml", "session.json", "session.json.",
		"excitation.wav", "", ".", "..", "../x", "/etc/x", "plots/../rig.yaml", "plots//x", "plots/", `takes\30mm-1.wav`, `..\x`, "C:x",
		"rig.yaml ", ".standoff-lock", "a/b/c", "./rig.yaml", "x\x00"} {
		if r.WriteFile(name, text("x")) == nil {
			t.Errorf("%q was written", name)
		}
	}
	if after := tree(t, dir); !reflect.DeepEqual(before, after) {
		t.Errorf("before %v\nafter %v", before, after)
	}
}

func TestLinksLeadNowhere(t *testing.T) {
	dir, outside := t.TempDir(), t.TempDir()
	f := create(t, dir)
	take := add(t, f, near, recording(1, 50, false))
	put(t, filepath.Join(outside, "x"), "mine")
	link := func(to, name string) {
		if err := os.Symlink(to, filepath.Join(dir, name)); err != nil {
			t.Skip(err)
		}
	}
	link(outside, "plots")
	link("takes", "responses")
	write := func(w io.Writer) error { _, err := io.WriteString(w, "x"); return err }
	for _, name := range []string{"plots/x", "responses/30mm-1.wav"} {
		wants(t, f.WriteFile(name, write), "is not a directory")
	}
	os.Rename(filepath.Join(dir, take.File), filepath.Join(outside, "take.wav"))
	link(filepath.Join(outside, "take.wav"), take.File)
	if _, err := f.Load(take); err == nil {
		t.Error("loaded a take from outside")
	}
	if got := get(t, filepath.Join(outside, "x")); got != "mine" {
		t.Errorf("written to outside: %q", got)
	}
	f.Close()
	link(filepath.Join(outside, "x"), lockName)
	_, err := OpenOrCreate(dir, parse(t, rigText), usual)
	wants(t, err, "not a regular file")
}

func TestAfterClose(t *testing.T) {
	f := create(t, t.TempDir())
	take := add(t, f, near, recording(1, 50, false))
	f.Close()
	_, err1 := f.AddTake(near, "", recording(2, 50, false))
	_, err2 := f.Load(take)
	err3 := f.Judge(take.File, Verdict{})
	err4 := f.WriteFile("result.json", func(io.Writer) error { return nil })
	for i, err := range []error{err1, err2, err3, err4} {
		if !errors.Is(err, os.ErrClosed) {
			t.Errorf("call %d: %v", i+1, err)
		}
	}
}
