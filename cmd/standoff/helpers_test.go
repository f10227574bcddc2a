package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"standoff/fit"
)

// need returns the path of a tool. Without it a test cannot be made: in CI that is
// a failure, elsewhere it is skipped.
func need(t *testing.T, tool string) string {
	t.Helper()
	path, err := exec.LookPath(tool)
	if err != nil {
		missing(t, tool+" is not installed")
	}
	return path
}

func missing(t *testing.T, why string) {
	t.Helper()
	if os.Getenv("CI") == "true" {
		t.Fatal(why)
	}
	t.Skip(why)
}

// python is an interpreter that has scipy.
func python(t *testing.T) string {
	t.Helper()
	for _, p := range []string{"/usr/bin/python3", "python3"} {
		if exec.Command(p, "-c", "import scipy").Run() == nil {
			return p
		}
	}
	missing(t, "no python3 with scipy (Debian: python3-scipy)")
	return ""
}

// command runs a tool to its end.
func command(t *testing.T, name string, args ...string) {
	t.Helper()
	if out, err := exec.Command(name, args...).CombinedOutput(); err != nil {
		t.Fatalf("%s %s: %v\n%s", name, strings.Join(args, " "), err, out)
	}
}

// standoff runs the program and returns what it says.
func standoff(t *testing.T, args ...string) (code int, out, errOut string) {
	t.Helper()
	var o, e bytes.Buffer
	code = run(context.Background(), args, strings.NewReader(""), &o, &e)
	return code, o.String(), e.String()
}

func write(t *testing.T, path, text string) string {
	t.Helper()
	if err := os.WriteFile(path, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
	return path
}

// resultIn reads a folder's result.json.
func resultIn(t *testing.T, dir string) *fit.Result {
	t.Helper()
	raw, err := os.ReadFile(filepath.Join(dir, "result.json"))
	if err != nil {
		t.Fatal(err)
	}
	r := &fit.Result{}
	if err := json.Unmarshal(raw, r); err != nil {
		t.Fatal(err)
	}
	return r
}

// within checks a value of a result that has to be resolved.
func within(t *testing.T, what string, v fit.Value, want, tolerance float64) {
	t.Helper()
	if !v.Resolved || v.Value == nil || v.Expanded == nil {
		t.Errorf("%s is not resolved", what)
		return
	}
	if d := *v.Value - want; d > tolerance || d < -tolerance {
		t.Errorf("%s is %.5g ± %.2g, want %.5g within %.2g", what, *v.Value, *v.Expanded, want, tolerance)
	}
	t.Logf("%s %.5g ± %.2g (truth %.5g)", what, *v.Value, *v.Expanded, want)
}

// takeArgs are the flags of an import.
func takeArgs(dir string, labels []string) (args []string) {
	for _, l := range labels {
		args = append(args, "--take", fmt.Sprintf("%s=%s", l, filepath.Join(dir, l+".wav")))
	}
	return args
}

// configsDir is the folder of runnable rigs.
func configsDir(t *testing.T) string {
	t.Helper()
	dir, err := filepath.Abs(filepath.Join("..", "..", "configs"))
	if err != nil {
		t.Fatal(err)
	}
	return dir
}

func readFile(t *testing.T, path string) string {
	t.Helper()
	raw, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(raw)
}
