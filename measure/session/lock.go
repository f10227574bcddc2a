package session

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"time"
	"unicode"
)

const lockName = ".standoff-lock"

// holder is what the lock file says about the process that made it.
type holder struct {
	PID   int       `json:"pid"`
	Host  string    `json:"host"`
	Since time.Time `json:"since"`
}

// lock is held by the operating system on an open file, so it ends with the
// process however that ends. A lock file that nobody holds is a trace of a run
// that was cut off.
type lock struct {
	path    string
	file    *os.File
	cutOff  *holder // who left the file behind; nil if nobody
	missing bool    // the file system knows no locks
}

// errBusy is what openLocked answers when another process holds the file.
var errBusy = errors.New("locked")

func acquire(dir string, now time.Time) (*lock, error) {
	l := &lock{path: filepath.Join(dir, lockName)}
	// A link here could make us write into any file of the user's.
	if info, err := os.Lstat(l.path); err == nil && !info.Mode().IsRegular() {
		return nil, fmt.Errorf("%s is not a regular file", l.path)
	}
	var err error
	l.file, l.missing, err = openLocked(l.path)
	if errors.Is(err, errBusy) {
		return nil, busy(dir, l.path)
	}
	if err != nil {
		return nil, cannot("write into", dir, err)
	}
	l.cutOff = readHolder(l.file)
	l.sign(now)
	return l, nil
}

func busy(dir, path string) error {
	e := &BusyError{Dir: dir}
	f, err := os.Open(path)
	if err != nil {
		return e
	}
	defer f.Close()
	if h := readHolder(f); h != nil {
		e.PID, e.Host, e.Since = h.PID, h.Host, h.Since
	}
	return e
}

func readHolder(f io.Reader) *holder {
	var h holder
	data, err := io.ReadAll(io.LimitReader(f, 4096))
	if err != nil || json.Unmarshal(data, &h) != nil || h.PID <= 0 {
		return nil
	}
	h.Host = printable(h.Host)
	return &h
}

// sign writes who holds the lock. It holds without the signature too, so a full
// disk is not reported here but where it loses something.
func (l *lock) sign(now time.Time) {
	host, _ := os.Hostname()
	data, _ := json.Marshal(holder{os.Getpid(), host, now})
	_ = l.file.Truncate(0)
	_, _ = l.file.WriteAt(append(data, '\n'), 0)
}

// printable is a text from a file with nothing in it that moves a terminal's cursor.
func printable(text string) string {
	return strings.Map(func(r rune) rune {
		if unicode.IsPrint(r) {
			return r
		}
		return ' '
	}, text)
}
