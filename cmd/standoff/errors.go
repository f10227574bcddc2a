package main

import (
	"context"
	"errors"
	"io/fs"

	"standoff/measure/rig"
)

// Exit codes, the same for every command.
const (
	exitDone        = 0
	exitFailed      = 1
	exitUsage       = 2
	exitLook        = 3
	exitInterrupted = 130
)

// hinted is an error with its likely cure and the exit code it asks for.
type hinted struct {
	error
	hint string
	code int
}

func (h *hinted) Unwrap() error { return h.error }

// usage is a wrong use of the command line.
func usage(err error, hint string) error { return &hinted{err, hint, exitUsage} }

// cure is a failure of which the cure is known.
func cure(err error, hint string) error { return &hinted{err, hint, exitFailed} }

// errLook ends a command that is done but has found something to look at.
var errLook = errors.New("done, but something needs a look")

// errStopped ends a measurement that the person at the bench has stopped.
var errStopped = errors.New("stopped here")

// codeOf is the exit code for an error.
func codeOf(err error) int {
	var h *hinted
	var one *rig.Error
	var many rig.Errors
	switch {
	case err == nil:
		return exitDone
	case errors.Is(err, errLook):
		return exitLook
	case errors.Is(err, context.Canceled):
		return exitInterrupted
	case errors.As(err, &h):
		return h.code
	case errors.As(err, &one), errors.As(err, &many):
		return exitUsage
	}
	return exitFailed
}

// hintOf is the likely cure for an error, "" where none is known.
func hintOf(err error) string {
	var h *hinted
	var withHint interface{ Hint() string }
	switch {
	case errors.As(err, &h):
		return h.hint
	case rig.Hint(err) != "":
		return rig.Hint(err)
	case errors.As(err, &withHint):
		return withHint.Hint()
	case errors.Is(err, fs.ErrNotExist):
		return "look at the path, and at the folder you are in"
	case errors.Is(err, fs.ErrPermission):
		return "look at who may write there"
	}
	return ""
}
