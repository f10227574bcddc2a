package session

import (
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"time"
)

const goodTake = `{"file":"takes/30mm-1.wav","distance":"30mm","number":1,"nominal_m":0.03,"sha256":"` + zeros + `","sample_rate_hz":48000,"channels":1}`
const zeros = "0000000000000000000000000000000000000000000000000000000000000000"

func manifestWith(takes string) string {
	return `{"schema":"standoff/session/1","tag":"RB-07","rig_sha256":"` + zeros + `","takes":[` + takes + `]}`
}

func TestHostileManifests(t *testing.T) {
	swap := func(old, new string) string {
		if !strings.Contains(goodTake, old) {
			t.Fatalf("no %s to swap", old)
		}
		return manifestWith(strings.Replace(goodTake, old, new, 1))
	}
	if _, err := decode("session.json", []byte("\ufeff"+manifestWith(goodTake))); err != nil {
		t.Fatalf("the good one: %v", err)
	}
	for name, c := range map[string]struct{ text, want string }{
		"empty":         {"", "broken: unexpected end"},
		"cut":           {manifestWith(goodTake)[:200], "session.json:1:200: broken: unexpected end"},
		"line":          {"{\n \"schema\": \"standoff/session/1\",\n  ?}", "session.json:3:3: broken: invalid character '?'"},
		"not an object": {"[]", "session.json:1:1: broken:"},
		"null":          {"null", `not the manifest of a session: its schema is ""`},
		"other file":    {`{"schema":"standoff/result/1"}`, "not the manifest of a session"},
		"later":         {`{"schema":"standoff/session/2","takes":7}`, "made by a later version"},
		"schema 0":      {`{"schema":"standoff/session/0"}`, "not the manifest"},
		"kind":          {"{\"schema\":\"standoff/session/1\",\n\"takes\":[{\"number\":\"one\"}]}", "session.json:2:24: broken: takes.number cannot be a string"},
		"quality":       {manifestWith(strings.Replace(goodTake, "{", `{"quality":[1],`, 1)), "quality"},
		"tag":           {strings.Replace(manifestWith(goodTake), "RB-07", "../RB-07", 1), "tag:"},
		"rig":           {strings.Replace(manifestWith(goodTake), zeros, "0", 1), "rig_sha256"},
		"excitation":    {strings.Replace(manifestWith(goodTake), `"tag"`, `"excitation":{},"tag"`, 1), "excitation"},
		"null take":     {manifestWith("null"), "takes[0]"},
		"twice":         {manifestWith(goodTake + "," + goodTake), "takes[1]: takes/30mm-1.wav is in the list already"},
		"up":            {swap("takes/30mm-1.wav", "takes/../../30mm-1.wav"), "takes[0]: file"},
		"absolute":      {swap("takes/30mm-1.wav", "/etc/passwd"), "takes[0]: file"},
		"backslash":     {swap("takes/30mm-1.wav", `takes\\30mm-1.wav`), "takes[0]: file"},
		"elsewhere":     {swap("takes/30mm-1.wav", "rig.yaml"), "takes[0]: file"},
		"label":         {strings.ReplaceAll(manifestWith(goodTake), "30mm", "../30mm"), "cannot be part of a file's name"},
		"dots":          {strings.ReplaceAll(manifestWith(goodTake), "30mm", ".."), "cannot be part of a file's name"},
		"number":        {swap(`"number":1`, `"number":-1`), "number -1"},
		"hash":          {swap(zeros, strings.Repeat("Z", 64)), "sha256"},
		"rate":          {swap("48000", "0"), "sample_rate_hz"},
		"channels":      {swap(`"channels":1`, `"channels":9`), "channels 9"},
		"distance":      {swap("0.03", "-1"), "nominal_m"},
		"flag":          {swap(`"channels"`, `"flags":["\u001b[2J"],"channels"`), "is not a word"},
	} {
		_, err := decode("session.json", []byte(c.text))
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", name, err, c.want)
		}
		if err != nil && strings.ContainsAny(err.Error(), "\n\x1b") {
			t.Errorf("%s: %q is not one harmless line", name, err)
		}
	}
	_, err := decode("session.json", []byte(`{"schema":`))
	wants(t, err, "broken")
	if !strings.Contains(Hint(err), "the takes are still there") {
		t.Errorf("hint %q", Hint(err))
	}
}

// TestCure does what the hint for a broken manifest says.
func TestCure(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	first, second := recording(1, 100, true), recording(2, 100, false)
	add(t, f, near, first)
	add(t, f, inch, second)
	f.Close()
	path := filepath.Join(dir, "session.json")
	text := get(t, path)
	put(t, path, text[:len(text)/2])
	_, err := Open(dir)
	wants(t, err, path, "broken")
	_, err = OpenOrCreate(dir, parse(t, rigText), usual)
	wants(t, err, path, "broken")
	if err := os.Rename(path, filepath.Join(t.TempDir(), "away")); err != nil {
		t.Fatal(err)
	}
	check := func(f *Folder) {
		t.Helper()
		if len(f.Takes()) != 2 {
			t.Fatalf("%d takes, notices %v", len(f.Takes()), f.Notices())
		}
		for _, take := range f.Takes() {
			rec, err := f.Load(take)
			want := map[string][]float32{"30mm": first.Mic, "2.5in": second.Mic}[take.Distance]
			if err != nil || !reflect.DeepEqual(rec.Mic, want) || take.Judged {
				t.Errorf("%s is not the take that it was: %v", take.File, err)
			}
		}
	}
	g := reopen(t, dir)
	check(g)
	if got := codes(g.Notices()); got != "manifest-rebuilt take-adopted take-adopted" {
		t.Errorf("notices %q", got)
	}
	check(create(t, dir))
	h := reopen(t, dir)
	check(h)
	if len(h.Notices()) != 0 {
		t.Errorf("notices %v", h.Notices())
	}
}

func TestStrayFiles(t *testing.T) {
	dir := t.TempDir()
	f := create(t, dir)
	add(t, f, near, recording(1, 100, false))
	f.Close()
	wavBytes := get(t, filepath.Join(dir, "takes", "30mm-1.wav"))
	for _, name := range []string{"30mm-2.wav", "60mm-1.wav", "30mm-01.wav", "30mm.wav", "-1.wav", "notes.txt", "90MM-1.wav"} {
		put(t, filepath.Join(dir, "takes", name), wavBytes)
	}
	put(t, filepath.Join(dir, "takes", "90mm-1.wav"), wavBytes[:20])
	os.Mkdir(filepath.Join(dir, "takes", "90mm-2.wav"), 0o777)
	for _, f := range []*Folder{reopen(t, dir), create(t, dir)} {
		if len(f.Takes()) != 2 || f.Takes()[1].File != "takes/30mm-2.wav" {
			t.Errorf("takes %+v", f.Takes())
		}
		if n := strings.Count(codes(f.Notices()), "take-ignored"); n != 7 {
			t.Errorf("%d ignored: %v", n, f.Notices())
		}
	}
	if f := reopen(t, dir); strings.Contains(codes(f.Notices()), "take-adopted") {
		t.Errorf("what was taken up was not entered: %v", f.Notices())
	}
}

func TestOldTempsAreRemoved(t *testing.T) {
	dir := t.TempDir()
	create(t, dir).Close()
	old, young := noon.Add(-2*time.Hour), noon.Add(-time.Minute)
	for name, when := range map[string]time.Time{
		".standoff-A.tmp": old, "takes/.standoff-B.tmp": old, "plots/.standoff-C.tmp": old,
		"plots/.standoff-D.tmp": young, "takes/.other.tmp": old, "mine.tmp": old,
	} {
		put(t, filepath.Join(dir, name), "half")
		if err := os.Chtimes(filepath.Join(dir, name), when, when); err != nil {
			t.Fatal(err)
		}
	}
	create(t, dir).Close()
	left := tree(t, dir)
	for name, want := range map[string]bool{".standoff-A.tmp": false, "takes/.standoff-B.tmp": false, "plots/.standoff-C.tmp": false,
		"plots/.standoff-D.tmp": true, "takes/.other.tmp": true, "mine.tmp": true, "rig.yaml": true} {
		if _, there := left[name]; there != want {
			t.Errorf("%s there: %v", name, there)
		}
	}
}

func FuzzManifest(f *testing.F) {
	f.Add([]byte(manifestWith(goodTake)))
	f.Add([]byte(manifestWith("")))
	f.Add([]byte(strings.ReplaceAll(manifestWith(goodTake), "30mm", "../x")))
	f.Add([]byte(`{"schema":"standoff/session/1","Takes":[null],"takes":[]}`))
	f.Add([]byte(`{"schema":"standoff/session/9"}`))
	f.Add([]byte(manifestWith(strings.Replace(goodTake, "{", `{"later":{"a":[1e400]},"quality":{"snr_db":null},`, 1))))
	if first, err := os.ReadFile("testdata/first/folder/session.json"); err == nil {
		f.Add(first)
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		m, err := decode("session.json", data)
		if err != nil {
			if text := err.Error() + Hint(err); text == "" || strings.ContainsAny(text, "\n\x1b") {
				t.Fatalf("not a message of one line: %q", text)
			}
			return
		}
		for _, take := range m.Takes {
			name, inside := strings.CutPrefix(take.File, "takes/")
			if !inside || !filepath.IsLocal(take.File) || strings.ContainsAny(name, `/\:`) {
				t.Fatalf("leads astray: %q", take.File)
			}
		}
		out, err := encode(m)
		if err != nil {
			t.Fatalf("read, but not written: %v", err)
		}
		again, err := decode("session.json", out)
		if err != nil {
			t.Fatalf("written, but not read: %v", err)
		}
		second, err := encode(again)
		if err != nil || string(out) != string(second) {
			t.Fatalf("%v: changes each time:\n%s\n%s", err, out, second)
		}
	})
}
