package session

import (
	"bytes"
	"fmt"
	"strings"
)

// RigChangedError says that a folder was begun with another rig.
type RigChangedError struct {
	Dir  string
	Diff string // the lines that differ: - as the session has them, + as given now
}

// Error names the folder and shows the lines that differ, one to a line.
func (e *RigChangedError) Error() string {
	if e.Diff == "" {
		return fmt.Sprintf("%s: its %s was edited after the session was begun", e.Dir, rigName)
	}
	return fmt.Sprintf("%s was begun with another rig\n%s", e.Dir, e.Diff)
}

// Hint is what to do about it.
func (e *RigChangedError) Hint() string {
	return "choose another folder for the changed rig, or go on with the rig as it was"
}

func rigChanged(dir, oldPath, newPath string, before, now []byte) error {
	head := fmt.Sprintf("--- %s\n+++ %s\n", printable(oldPath), printable(newPath))
	return &RigChangedError{Dir: dir, Diff: head + strings.Join(diff(lines(before), lines(now)), "\n")}
}

func lines(text []byte) []string {
	parts := bytes.SplitAfter(text, []byte("\n"))
	if len(parts[len(parts)-1]) == 0 {
		parts = parts[:len(parts)-1]
	}
	out := make([]string, len(parts))
	for i, p := range parts {
		out[i] = string(p)
	}
	return out
}

const (
	mostShown = 40        // lines of a difference
	mostCells = 4_000_000 // of the table; beyond it the middle counts as replaced
)

// diff is the difference of two lists of lines as "-old" and "+new", each group
// under the place where it stands, by the longest common subsequence.
func diff(a, b []string) []string {
	skip := 0
	for skip < min(len(a), len(b)) && a[skip] == b[skip] {
		skip++
	}
	a, b = a[skip:], b[skip:]
	for len(a) > 0 && len(b) > 0 && a[len(a)-1] == b[len(b)-1] {
		a, b = a[:len(a)-1], b[:len(b)-1]
	}
	var out []string
	together := false // the line before belonged to the same group
	show := func(mark, line string, i, j int) {
		if !together {
			out = append(out, fmt.Sprintf("@@ -%d +%d @@", skip+i+1, skip+j+1))
		}
		together = true
		out = append(out, mark+visible(line))
	}
	common := commonTable(a, b)
	for i, j := 0, 0; i < len(a) || j < len(b); {
		switch {
		case i < len(a) && j < len(b) && common != nil && a[i] == b[j]:
			together = false
			i, j = i+1, j+1
		case j == len(b) || i < len(a) && (common == nil || common[i+1][j] >= common[i][j+1]):
			show("-", a[i], i, j)
			i++
		default:
			show("+", b[j], i, j)
			j++
		}
	}
	if more := len(out) - mostShown; more > 0 {
		out = append(out[:mostShown], fmt.Sprintf("… and %d more lines", more))
	}
	return out
}

// commonTable is, for each i and j, how many lines a[i:] and b[j:] have in
// common in order; nil when that would be too large.
func commonTable(a, b []string) [][]int32 {
	if (len(a)+1)*(len(b)+1) > mostCells {
		return nil
	}
	table := make([][]int32, len(a)+1)
	for i := range table {
		table[i] = make([]int32, len(b)+1)
	}
	for i := len(a) - 1; i >= 0; i-- {
		for j := len(b) - 1; j >= 0; j-- {
			if a[i] == b[j] {
				table[i][j] = table[i+1][j+1] + 1
			} else {
				table[i][j] = max(table[i+1][j], table[i][j+1])
			}
		}
	}
	return table
}

// visible shows a line with its end where that is not the usual one, and with
// nothing in it that moves a terminal's cursor.
func visible(line string) string {
	switch {
	case strings.HasSuffix(line, "\r\n"):
		line = strings.TrimSuffix(line, "\r\n") + `\r`
	case strings.HasSuffix(line, "\n"):
		line = strings.TrimSuffix(line, "\n")
	default:
		line += ` (no line end)`
	}
	const most = 160
	if runes := []rune(line); len(runes) > most {
		line = string(runes[:most]) + "…"
	}
	return printable(line)
}
