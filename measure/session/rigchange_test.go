package session

import (
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func TestDiff(t *testing.T) {
	for name, c := range map[string]struct{ before, now, want string }{
		"one":     {"a\nb\nc\n", "a\nB\nc\n", "@@ -2 +2 @@|-b|+B"},
		"added":   {"a\nc\n", "a\nb\nc\n", "@@ -2 +2 @@|+b"},
		"removed": {"a\nb\nc\n", "a\nc\n", "@@ -2 +2 @@|-b"},
		"two":     {"a\nb\nc\nd\n", "A\nb\nc\nD\n", "@@ -1 +1 @@|-a|+A|@@ -4 +4 @@|-d|+D"},
		"endings": {"a\r\n", "a\n", `@@ -1 +1 @@|-a\r|+a`},
		"no end":  {"a\n", "a", "@@ -1 +1 @@|-a|+a (no line end)"},
		"escape":  {"a\n", "\x1b[2J\n", "@@ -1 +1 @@|-a|+ [2J"},
		"nothing": {"", "a\n", "@@ -1 +1 @@|+a"},
	} {
		if got := strings.Join(diff(lines([]byte(c.before)), lines([]byte(c.now))), "|"); got != c.want {
			t.Errorf("%s: %s\nwant %s", name, got, c.want)
		}
	}
	long := diff(lines([]byte(strings.Repeat("a\n", 3000))), lines([]byte(strings.Repeat("b\n", 3000))))
	if len(long) != mostShown+1 || !strings.HasSuffix(long[mostShown], "5961 more lines") {
		t.Errorf("%d lines, the last %q", len(long), long[len(long)-1])
	}
}

// TestDiffAgainstDiff compares the number of changed lines with what the
// system's own diff --minimal finds.
func TestDiffAgainstDiff(t *testing.T) {
	if _, err := exec.LookPath("diff"); err != nil {
		t.Skip("no diff here")
	}
	dir := t.TempDir()
	rapid.Check(t, func(r *rapid.T) {
		text := rapid.SliceOfN(rapid.SampledFrom([]string{"a\n", "b\n", "c\n"}), 0, 9)
		before, now := text.Draw(r, "before"), text.Draw(r, "now")
		for name, content := range map[string][]string{"before": before, "now": now} {
			if err := os.WriteFile(filepath.Join(dir, name), []byte(strings.Join(content, "")), 0o666); err != nil {
				r.Fatal(err)
			}
		}
		out, _ := exec.Command("diff", "--minimal", filepath.Join(dir, "before"), filepath.Join(dir, "now")).Output()
		want := strings.Count("\n"+string(out), "\n<") + strings.Count("\n"+string(out), "\n>")
		got := 0
		for _, line := range diff(before, now) {
			if !strings.HasPrefix(line, "@@") {
				got++
			}
		}
		if got != want {
			r.Fatalf("%d changed lines, diff finds %d", got, want)
		}
	})
}
