package session

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"syscall"
	"time"
)

// ErrTakeChanged is in the error of Load and Excitation when a file is not what
// was recorded any more.
var ErrTakeChanged = errors.New("changed since it was recorded")

// BusyError says that another process is adding to the folder.
type BusyError struct {
	Dir   string
	PID   int       // 0 when unknown
	Host  string    // "" when unknown
	Since time.Time // zero when unknown
}

// Error names the folder and who holds it.
func (e *BusyError) Error() string {
	if e.PID == 0 {
		return fmt.Sprintf("%s is in use by another run", e.Dir)
	}
	return fmt.Sprintf("%s is in use by process %d on %s since %s", e.Dir, e.PID, e.Host, e.Since.Format(time.DateTime))
}

// Hint is what to do about it.
func (e *BusyError) Hint() string { return "let that run end, or choose another folder" }

// hinted is an error with its likely cure.
type hinted struct {
	err  error
	hint string
}

func (e *hinted) Error() string { return e.err.Error() }
func (e *hinted) Unwrap() error { return e.err }
func (e *hinted) Hint() string  { return e.hint }

func hintedf(hint, format string, args ...any) error {
	return &hinted{fmt.Errorf(format, args...), hint}
}

// Hint is the likely cure for an error of this package, "" if none is known. As
// with the rig's errors it is not part of Error().
func Hint(err error) string {
	var h interface{ Hint() string }
	if errors.As(err, &h) {
		return h.Hint()
	}
	return ""
}

// cannot wraps an error of the file system: the temporary names and system calls
// in it say nothing to a reader, what was to be done and why it failed do.
func cannot(do, what string, err error) error {
	var known interface{ Hint() string }
	if errors.As(err, &known) {
		return fmt.Errorf("cannot %s %s: %w", do, what, err)
	}
	return hintedf(cureOf(err), "cannot %s %s: %w", do, what, bare(err))
}

// bare is the cause inside an error of package os, without its path.
func bare(err error) error {
	var p *fs.PathError
	var l *os.LinkError
	switch {
	case errors.As(err, &p):
		return p.Err
	case errors.As(err, &l):
		return l.Err
	}
	return err
}

func cureOf(err error) string {
	switch {
	case diskFull(err):
		return "make room and start again: what was recorded before is safe"
	case errors.Is(err, syscall.EROFS), errors.Is(err, fs.ErrPermission):
		return "choose a folder that can be written to"
	}
	return ""
}
