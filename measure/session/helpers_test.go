package session

import (
	"crypto/sha256"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"standoff/measure"
	"standoff/measure/rig"
)

const rigText = `# bench
unit: {tag: RB-07, serial: "0193"}
audio: {backend: virtual}
distances: [30mm, 2.5in, 90mm]
`

var (
	noon  = time.Date(2025, 6, 1, 12, 0, 0, 0, time.UTC)
	near  = measure.Distance{Label: "30mm", Metres: 0.03}
	inch  = measure.Distance{Label: "2.5in", Metres: 0.0635}
	usual = Options{Version: "0.1.0", Recorder: "virtual bench", Now: func() time.Time { return noon }}
)

func rigOf(text string) (*rig.Rig, error) { return rig.Parse("rig.yaml", []byte(text)) }

func writeText(s string) func(io.Writer) error {
	return func(w io.Writer) error { _, err := io.WriteString(w, s); return err }
}

func parse(t testing.TB, text string) *rig.Rig {
	t.Helper()
	r, err := rigOf(text)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func create(t testing.TB, dir string) *Folder {
	t.Helper()
	f, err := OpenOrCreate(dir, parse(t, rigText), usual)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { f.Close() })
	return f
}

func reopen(t testing.TB, dir string) *Folder {
	t.Helper()
	f, err := Open(dir)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { f.Close() })
	return f
}

func add(t testing.TB, f *Folder, d measure.Distance, rec *measure.Recording) Take {
	t.Helper()
	take, err := f.AddTake(d, "virtual bench", rec)
	if err != nil {
		t.Fatal(err)
	}
	return take
}

// recording has samples that tell it from any with another seed.
func recording(seed, n int, loopback bool) *measure.Recording {
	rec := &measure.Recording{SampleRate: 48000, Started: noon.Add(time.Duration(seed) * time.Minute), Overflows: seed % 3, Underflows: seed % 2}
	for i := range n {
		rec.Mic = append(rec.Mic, float32((i*7919+seed*104729)%65521)/65521-0.5)
	}
	if loopback {
		for i := range n {
			rec.Loopback = append(rec.Loopback, -float32(i%97)/97)
		}
	}
	return rec
}

func same(t testing.TB, got, want *measure.Recording) {
	t.Helper()
	if !slices.Equal(got.Mic, want.Mic) || !slices.Equal(got.Loopback, want.Loopback) || (got.Loopback == nil) != (want.Loopback == nil) {
		t.Fatal("samples came back changed")
	}
	if got.SampleRate != want.SampleRate || got.Overflows != want.Overflows || got.Underflows != want.Underflows || !got.Started.Equal(want.Started) {
		t.Fatalf("came back as %d Hz, %d, %d, %v", got.SampleRate, got.Overflows, got.Underflows, got.Started)
	}
}

func put(t testing.TB, path, text string) {
	t.Helper()
	if err := os.MkdirAll(filepath.Dir(path), 0o777); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
}

func get(t testing.TB, path string) string {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(b)
}

// tree is every file with its content's hash, by name.
func tree(t testing.TB, dir string) map[string]string {
	t.Helper()
	out := map[string]string{}
	err := filepath.WalkDir(dir, func(path string, e os.DirEntry, err error) error {
		if err != nil || e.IsDir() {
			return err
		}
		b, err := os.ReadFile(path)
		rel, _ := filepath.Rel(dir, path)
		out[filepath.ToSlash(rel)] = fmt.Sprintf("%x", sha256.Sum256(b))
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func wants(t testing.TB, err error, parts ...string) {
	t.Helper()
	if err == nil {
		t.Fatalf("no error, want one with %q", parts)
	}
	for _, p := range parts {
		if !strings.Contains(err.Error(), p) {
			t.Fatalf("error %q lacks %q", err, p)
		}
	}
}

func codes(ws []measure.Warning) string {
	var out []string
	for _, w := range ws {
		out = append(out, w.Code)
	}
	return strings.Join(out, " ")
}
