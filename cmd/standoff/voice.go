package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"

	"golang.org/x/term"
)

// voice is the only thing that prints: results on stdout, everything else on
// stderr, colour on a terminal only.
type voice struct {
	out, err io.Writer
	quiet    bool
	live     bool // stderr is a terminal: one line may be redrawn
	colour   bool
	width    int
}

func newVoice(out, err io.Writer) *voice {
	v := &voice{out: out, err: err, width: 80}
	if f, ok := err.(*os.File); ok && term.IsTerminal(int(f.Fd())) {
		v.live = os.Getenv("TERM") != "dumb"
		if w, _, e := term.GetSize(int(f.Fd())); e == nil && w > 20 {
			v.width = w
		}
	}
	v.colour = v.live && os.Getenv("NO_COLOR") == ""
	return v
}

// say is progress: one line on stderr.
func (v *voice) say(format string, args ...any) {
	if v.quiet {
		return
	}
	v.clear()
	fmt.Fprintf(v.err, format+"\n", args...)
}

// redraw replaces the one live line; nothing where there is no terminal.
func (v *voice) redraw(line string) {
	if v.quiet || !v.live {
		return
	}
	if r := []rune(line); len(r) >= v.width {
		line = string(r[:v.width-1])
	}
	fmt.Fprint(v.err, "\r\x1b[K"+line)
}

func (v *voice) clear() {
	if v.live {
		fmt.Fprint(v.err, "\r\x1b[K")
	}
}

// strong is a word that should be seen.
func (v *voice) strong(s string) string {
	if !v.colour {
		return s
	}
	return "\x1b[1m" + s + "\x1b[0m"
}

// print is a result: on stdout.
func (v *voice) print(format string, args ...any) {
	v.clear()
	fmt.Fprintf(v.out, format+"\n", args...)
}

// json is a result for programs.
func (v *voice) json(value any) error {
	v.clear()
	enc := json.NewEncoder(v.out)
	enc.SetIndent("", "  ")
	enc.SetEscapeHTML(false)
	return enc.Encode(value)
}

// fail says what went wrong, if anything, and returns the exit code.
func (v *voice) fail(err error) int {
	code := codeOf(err)
	if err == nil || errors.Is(err, errLook) {
		return code
	}
	v.clear()
	if errors.Is(err, context.Canceled) {
		fmt.Fprintln(v.err, "standoff: interrupted; what was recorded is kept")
		return code
	}
	for _, line := range strings.Split(err.Error(), "\n") {
		fmt.Fprintln(v.err, "standoff: "+line)
	}
	if hint := hintOf(err); hint != "" {
		fmt.Fprintln(v.err, "hint: "+hint)
	}
	return code
}
