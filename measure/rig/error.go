package rig

import (
	"errors"
	"fmt"
	"slices"
	"strconv"
	"strings"
	"unicode"
)

// Error is one thing wrong with a rig, at the line where it can be cured.
type Error struct {
	File   string // as given on the command line
	Line   int    // from 1
	Key    string // path such as sweep.level or distances[3], "" for the file as a whole
	Reason string // lower case, one line
	Hint   string // the likely cure, "" where none is known; not part of Error()
}

// Error is "rig.yaml:12: distances[3]: 5mm is nearer than the setback of 6mm".
func (e *Error) Error() string {
	if e.Key == "" {
		return fmt.Sprintf("%s:%d: %s", e.File, e.Line, e.Reason)
	}
	return fmt.Sprintf("%s:%d: %s: %s", e.File, e.Line, e.Key, e.Reason)
}

// Errors are all the things wrong with a rig, in the order of lines, at least
// one. errors.As finds the first as an *Error.
type Errors []*Error

// mostShown errors are printed; whoever has more than these has one cause.
const mostShown = 10

// Error has one line for each error, the first ten of them.
func (e Errors) Error() string {
	lines := make([]string, 0, mostShown+1)
	for _, one := range e[:min(len(e), mostShown)] {
		lines = append(lines, one.Error())
	}
	if more := len(e) - mostShown; more > 0 {
		lines = append(lines, fmt.Sprintf("%s: and %d more", e[0].File, more))
	}
	return strings.Join(lines, "\n")
}

// Unwrap is for errors.As and errors.Is.
func (e Errors) Unwrap() []error {
	out := make([]error, len(e))
	for i, one := range e {
		out[i] = one
	}
	return out
}

// Hint is the cure for the first error in err that comes from a rig, "" if none.
func Hint(err error) string {
	var e *Error
	if errors.As(err, &e) {
		return e.Hint
	}
	return ""
}

func (e Errors) inOrder() Errors {
	slices.SortStableFunc(e, func(a, b *Error) int { return a.Line - b.Line })
	return e
}

// show is a text from the file as a message prints it: as it stands when that
// is short and harmless, else quoted or cut.
func show(text string) string {
	const most = 40
	if runes := []rune(text); len(runes) > most {
		text = string(runes[:most]) + "…"
	}
	if text == "" || strings.TrimSpace(text) != text || strings.ContainsFunc(text, notPrintable) {
		return strconv.Quote(text)
	}
	return text
}

func notPrintable(r rune) bool { return !unicode.IsPrint(r) }
