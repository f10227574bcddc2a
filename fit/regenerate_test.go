package fit

import (
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// withScipy is a Python that has scipy: the first on the path, or the system's
// own behind one that has not.
func withScipy() (string, bool) {
	for _, python := range []string{"python3", "/usr/bin/python3"} {
		if exec.Command(python, "-c", "import scipy.optimize, scipy.signal").Run() == nil {
			return python, true
		}
	}
	return "", false
}

// The reference tables are what their generators write, to a relative 1e−7: other
// versions of numpy and scipy may differ in the last of the 9 digits.
func TestReferencesRegenerate(t *testing.T) {
	python, ok := withScipy()
	switch {
	case !ok && os.Getenv("CI") == "true":
		t.Fatal("no python3 with scipy: the reference tables cannot be made again")
	case !ok:
		t.Skip("no python3 with scipy")
	case testing.Short():
		t.Skip("takes some seconds")
	}
	for _, topic := range []string{"dsp", "fit", "lsq", "sphere"} {
		t.Run(topic, func(t *testing.T) {
			t.Parallel()
			kept, fresh := filepath.Join("..", "testdata", "reference", topic), t.TempDir()
			if out, err := exec.Command(python, "-B", filepath.Join(kept, "make.py"), fresh).CombinedOutput(); err != nil {
				t.Fatalf("make.py: %v\n%s", err, out)
			}
			compareTables(t, kept, fresh)
		})
	}
}

func compareTables(t *testing.T, kept, fresh string) {
	t.Helper()
	old, _ := filepath.Glob(filepath.Join(kept, "*.csv"))
	remade, _ := filepath.Glob(filepath.Join(fresh, "*"))
	if len(old) == 0 || len(old) != len(remade) {
		t.Fatalf("%d tables are kept, %d are made", len(old), len(remade))
	}
	for _, path := range old {
		name := filepath.Base(path)
		a, b := fieldsOf(t, path), fieldsOf(t, filepath.Join(fresh, name))
		if len(a) != len(b) {
			t.Errorf("%s: %d fields are kept, %d are made", name, len(a), len(b))
			continue
		}
		for i := range a {
			if !sameField(a[i], b[i]) {
				t.Errorf("%s: %q is kept, %q is made", name, a[i], b[i])
				break
			}
		}
	}
}

func fieldsOf(t *testing.T, path string) []string {
	t.Helper()
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return strings.FieldsFunc(string(text), func(r rune) bool { return r == ',' || r == '\n' })
}

func sameField(a, b string) bool {
	if a == b {
		return true
	}
	x, errX := strconv.ParseFloat(a, 64)
	y, errY := strconv.ParseFloat(b, 64)
	// What should be zero is rounding, below 1e−13.
	return errX == nil && errY == nil && math.Abs(x-y) <= 1e-7*math.Abs(x)+1e-13
}
