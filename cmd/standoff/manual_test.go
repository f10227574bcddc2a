package main

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/alecthomas/kong"
)

var commandLine = regexp.MustCompile("(?m)(?:`|^ {2,}|: )standoff ((?:new|devices|plan|sweep|run|import|source|fit|report|demo)\\b[^`\n#]*)")

// Every command line in the manual and in the help is one that the program takes.
func TestManualsCommandsParse(t *testing.T) {
	text, err := os.ReadFile(filepath.Join("..", "..", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	sources := map[string]string{"README.md": string(text)}
	for _, c := range []string{"new", "devices", "plan", "sweep", "run", "import", "source", "fit", "report", "demo"} {
		code, out, _ := standoff(t, c, "--help")
		if code != exitDone || !strings.Contains(out, "Example:") || !strings.Contains(out, "Exit codes:") {
			t.Errorf("%s --help: exit %d, without example or exit codes", c, code)
		}
		if lines := strings.Count(out, "\n"); lines > 60 {
			t.Errorf("%s --help has %d lines, more than a page", c, lines)
		}
		sources[c+" --help"] = out
	}
	found := 0
	for name, s := range sources {
		for _, m := range commandLine.FindAllStringSubmatch(s, -1) {
			line := strings.TrimRight(strings.TrimSpace(m[1]), ".;,")
			if strings.ContainsAny(line, "<[…") || strings.Contains(line, "DISTANCE=") {
				continue // a pattern, not a command
			}
			found++
			parser, err := kong.New(&cli{}, kong.Exit(func(int) {}))
			if err != nil {
				t.Fatal(err)
			}
			if _, err := parser.Parse(strings.Fields(line)); err != nil && !mentionsMissing(line) {
				t.Errorf("%s: standoff %s: %v", name, line, err)
			}
		}
	}
	if found < 12 {
		t.Errorf("only %d command lines found", found)
	}
}

// mentionsMissing is for a command that is named without what it needs.
func mentionsMissing(line string) bool { return !strings.Contains(line, " ") }
