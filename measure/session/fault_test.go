package session

import (
	"io"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"

	"standoff/measure"
)

// faults makes the writing operation with a given number fail, and with dead
// every one after it too, as when the process had ended there.
type faults struct {
	disk
	at, done int
	dead     bool
	err      error
	hit      string // the operation that failed first
	log      []string
}

func (d *faults) fails(op string) bool {
	d.done++
	d.log = append(d.log, op)
	if d.done == d.at {
		d.hit = op
	}
	return d.done == d.at || d.dead && d.done > d.at
}

func (d *faults) Mkdir(name string) error {
	if d.fails("mkdir") {
		return d.err
	}
	return d.disk.Mkdir(name)
}

func (d *faults) Create(name string) (writable, error) {
	if d.fails("create") {
		return nil, d.err
	}
	f, err := d.disk.Create(name)
	return &faultyFile{f, d}, err
}

func (d *faults) Rename(from, to string) error {
	if d.fails("rename " + to) {
		return d.err
	}
	return d.disk.Rename(from, to)
}

func (d *faults) Remove(name string) error {
	if d.fails("remove") {
		return d.err
	}
	return d.disk.Remove(name)
}

func (d *faults) SyncDir(name string) error {
	if d.fails("syncdir " + name) {
		return d.err
	}
	return d.disk.SyncDir(name)
}

type faultyFile struct {
	writable
	d *faults
}

func (f *faultyFile) Write(p []byte) (int, error) {
	if f.d.fails("write") {
		n, _ := f.writable.Write(p[:len(p)/2]) // a full disk takes what it can
		return n, f.d.err
	}
	return f.writable.Write(p)
}

func (f *faultyFile) Sync() error {
	if f.d.fails("sync") {
		return f.d.err
	}
	return f.writable.Sync()
}

func (f *faultyFile) Close() error {
	err := f.writable.Close()
	if f.d.fails("close") {
		return f.d.err
	}
	return err
}

// everyFault runs a scenario with its first, second, … writing operation failing,
// once alone and once with all that follow, until it goes through untouched.
func everyFault(t *testing.T, scenario func(t *testing.T, d *faults)) {
	t.Helper()
	for _, dead := range []bool{false, true} {
		hits := 0
		for at := 1; ; at++ {
			d := &faults{at: at, dead: dead, err: &os.PathError{Op: "write", Path: "x", Err: syscall.ENOSPC}}
			scenario(t, d)
			if t.Failed() {
				t.Fatalf("at operation %d (%s), dead %v", at, d.hit, dead)
			}
			if d.hit == "" {
				break
			}
			hits++
		}
		if hits < 5 {
			t.Fatalf("only %d operations could fail", hits)
		}
	}
}

func wrapIn(d *faults) func(disk) disk {
	return func(real disk) disk { d.disk = real; return d }
}

// TestOrderOfWriting is what a power cut would judge: content is synced before it
// gets its name, the name before anything says that it is there.
func TestOrderOfWriting(t *testing.T) {
	d := &faults{}
	f, err := openOrCreate(t.TempDir(), parse(t, rigText), usual, wrapIn(d))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	want := "create write sync close rename rig.yaml syncdir . mkdir syncdir . create write sync close rename session.json syncdir ."
	if got := strings.Join(d.log, " "); got != want {
		t.Errorf("creating: %s", got)
	}
	d.log = nil
	add(t, f, near, recording(1, 100, false))
	want = "mkdir create write sync close rename takes/30mm-1.wav syncdir takes create write sync close rename session.json syncdir ."
	if got := strings.Join(d.log, " "); got != want {
		t.Errorf("adding: %s", got)
	}
}

func TestFaultsWhileCreating(t *testing.T) {
	everyFault(t, func(t *testing.T, d *faults) {
		dir := filepath.Join(t.TempDir(), "s")
		f, err := openOrCreate(dir, parse(t, rigText), usual, wrapIn(d))
		if err == nil {
			f.Close()
		} else if text := err.Error(); !strings.Contains(text, syscall.ENOSPC.Error()) || strings.Contains(text, tempPrefix) || Hint(err) == "" {
			t.Errorf("error %q, hint %q", text, Hint(err))
		}
		g := create(t, dir)
		defer g.Close()
		if get(t, filepath.Join(dir, "rig.yaml")) != rigText || len(g.Takes()) != 0 {
			t.Error("not a new session")
		}
	})
}

// TestFaultsWhileAdding: whatever fails, earlier takes stay, a take is stored as
// a whole or not at all, and the folder opens.
func TestFaultsWhileAdding(t *testing.T) {
	first, second, third := recording(1, 4000, false), recording(2, 30000, true), recording(3, 100, false)
	everyFault(t, func(t *testing.T, d *faults) {
		dir := t.TempDir()
		g := create(t, dir)
		add(t, g, near, first)
		if err := g.Judge("takes/30mm-1.wav", Verdict{Accepted: true}); err != nil {
			t.Fatal(err)
		}
		g.Close()

		at := d.at
		d.at = 1 << 30 // opening goes well
		f, err := openOrCreate(dir, parse(t, rigText), usual, wrapIn(d))
		if err != nil {
			t.Fatal(err)
		}
		d.at, d.done = at, 0
		take, err := f.AddTake(near, "bench", second)
		stored := take.File != ""
		if stored != (len(f.Takes()) == 2) || !stored && err == nil {
			t.Errorf("stored %v with %d takes and error %v", stored, len(f.Takes()), err)
		}
		if err != nil && Hint(err) == "" {
			t.Errorf("no hint for %v", err)
		}
		wantTakes(t, dir, stored, first, second)
		if !d.dead {
			for name := range tree(t, dir) {
				if isTemp(filepath.Base(name)) {
					t.Errorf("%s is left behind", name)
				}
			}
			d.at = 1 << 30
			// The same folder goes on, with a number of its own.
			add(t, f, near, third)
			f.Close()
			h := reopen(t, dir)
			takes := h.Takes()
			rec, err := h.Load(takes[len(takes)-1])
			if err != nil || len(h.Notices()) != 0 || len(rec.Mic) != len(third.Mic) {
				t.Errorf("%d takes afterwards, notices %v, %v", len(takes), h.Notices(), err)
			}
			if stored && (len(takes) != 3 || takes[1].Overflows != second.Overflows || takes[1].Source != "bench") {
				t.Errorf("the entry was lost: %+v", takes)
			}
		}
		f.Close()
		create(t, dir).Close()
	})
}

// blind lists no takes, as when somebody puts one there at the last moment.
type blind struct{ disk }

func (d blind) ReadDir(name string) ([]os.DirEntry, error) {
	if name == takesDir {
		return nil, nil
	}
	return d.disk.ReadDir(name)
}

func TestTakeReplacesNothing(t *testing.T) {
	dir := t.TempDir()
	f, err := openOrCreate(dir, parse(t, rigText), usual, func(d disk) disk { return blind{d} })
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	put(t, filepath.Join(dir, "takes", "30mm-1.wav"), "somebody's")
	take, err := f.AddTake(near, "", recording(1, 100, false))
	wants(t, err, "30mm-1.wav", "exists")
	if take.File != "" || get(t, filepath.Join(dir, "takes", "30mm-1.wav")) != "somebody's" {
		t.Error("replaced")
	}
}

// wantTakes looks at a folder as the next program to open it would.
func wantTakes(t *testing.T, dir string, stored bool, first, second *measure.Recording) {
	t.Helper()
	f := reopen(t, dir)
	defer f.Close()
	want := []*measure.Recording{first}
	if stored {
		want = append(want, second)
	}
	takes := f.Takes()
	if len(takes) != len(want) {
		t.Fatalf("%d takes, want %d", len(takes), len(want))
	}
	if !takes[0].Accepted {
		t.Error("the verdict is lost")
	}
	for i, take := range takes {
		rec, err := f.Load(take)
		if err != nil {
			t.Fatal(err)
		}
		if len(rec.Mic) != len(want[i].Mic) || rec.Mic[17] != want[i].Mic[17] {
			t.Errorf("%s is another take", take.File)
		}
	}
}

func TestFaultsWhileJudging(t *testing.T) {
	everyFault(t, func(t *testing.T, d *faults) {
		dir := t.TempDir()
		g := create(t, dir)
		add(t, g, near, recording(1, 100, false))
		g.Close()
		at := d.at
		d.at = 1 << 30
		f, err := openOrCreate(dir, parse(t, rigText), usual, wrapIn(d))
		if err != nil {
			t.Fatal(err)
		}
		defer f.Close()
		d.at, d.done = at, 0
		err = f.Judge("takes/30mm-1.wav", Verdict{Accepted: true})
		if f.Takes()[0].Judged != (err == nil) {
			t.Errorf("judged %v after %v", f.Takes()[0].Judged, err)
		}
		if got := reopen(t, dir).Takes(); len(got) != 1 || err == nil && !got[0].Accepted {
			t.Errorf("takes %+v after %v", got, err)
		}
	})
}

func TestFaultsWhileSettingTheExcitation(t *testing.T) {
	x := recording(4, 400, false).Mic
	everyFault(t, func(t *testing.T, d *faults) {
		dir := t.TempDir()
		create(t, dir).Close()
		at := d.at
		d.at = 1 << 30
		f, err := openOrCreate(dir, parse(t, rigText), usual, wrapIn(d))
		if err != nil {
			t.Fatal(err)
		}
		d.at, d.done = at, 0
		if err = f.SetExcitation(x, 48000); err != nil && !d.dead {
			if err := f.SetExcitation(x, 48000); err != nil {
				t.Errorf("the second attempt: %v", err)
			}
		}
		f.Close()
		g := create(t, dir)
		defer g.Close()
		if err := g.SetExcitation(x, 48000); err != nil {
			t.Errorf("the next run: %v", err)
		}
		if got, _, ok, err := g.Excitation(); !ok || err != nil || len(got) != len(x) {
			t.Errorf("%d samples, %v", len(got), err)
		}
	})
}

func TestFaultsWhileWritingDerivedFiles(t *testing.T) {
	everyFault(t, func(t *testing.T, d *faults) {
		dir := t.TempDir()
		create(t, dir).Close()
		put(t, filepath.Join(dir, "plots", "a.svg"), "old")
		at := d.at
		d.at = 1 << 30
		f, err := openOrCreate(dir, parse(t, rigText), usual, wrapIn(d))
		if err != nil {
			t.Fatal(err)
		}
		defer f.Close()
		d.at, d.done = at, 0
		err = f.WriteFile("plots/a.svg", func(w io.Writer) error { _, err := io.WriteString(w, "new"); return err })
		got := get(t, filepath.Join(dir, "plots", "a.svg"))
		if got != "new" && (err == nil || got != "old") {
			t.Errorf("%q after %v", got, err)
		}
	})
}

func TestReadOnlyFolder(t *testing.T) {
	if os.Getuid() == 0 {
		t.Skip("root may write everywhere")
	}
	dir := t.TempDir()
	f := create(t, dir)
	take := add(t, f, near, recording(1, 100, false))
	f.Close()
	for _, d := range []string{dir, filepath.Join(dir, "takes")} {
		if err := os.Chmod(d, 0o555); err != nil {
			t.Fatal(err)
		}
		t.Cleanup(func() { os.Chmod(d, 0o777) })
	}
	r := reopen(t, dir)
	if _, err := r.Load(take); err != nil {
		t.Error(err)
	}
	_, err := OpenOrCreate(dir, parse(t, rigText), usual)
	wants(t, err, "cannot write into "+dir, "permission denied")
	err = r.WriteFile("result.json", func(io.Writer) error { return nil })
	wants(t, err, "cannot write "+filepath.Join(dir, "result.json"))
	if !strings.Contains(Hint(err), "can be written to") {
		t.Errorf("hint %q", Hint(err))
	}
}
