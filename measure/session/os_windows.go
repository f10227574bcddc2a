package session

import (
	"errors"
	"os"
	"syscall"
)

// From the list of system error codes.
const (
	sharingViolation = syscall.Errno(32)
	handleDiskFull   = syscall.Errno(39)
	errorDiskFull    = syscall.Errno(112)
)

// openLocked opens or makes the lock file so that others may read but not write
// it while we have it open.
func openLocked(path string) (f *os.File, missing bool, err error) {
	name, err := syscall.UTF16PtrFromString(path)
	if err != nil {
		return nil, false, err
	}
	h, err := syscall.CreateFile(name, syscall.GENERIC_READ|syscall.GENERIC_WRITE, syscall.FILE_SHARE_READ,
		nil, syscall.OPEN_ALWAYS, syscall.FILE_ATTRIBUTE_NORMAL, 0)
	if errors.Is(err, sharingViolation) {
		return nil, false, errBusy
	}
	if err != nil {
		return nil, false, err
	}
	return os.NewFile(uintptr(h), path), false, nil
}

// release closes first: an open file cannot be removed here. If somebody locks
// it in between, removing fails, and it is theirs.
func (l *lock) release() error {
	err := l.file.Close()
	_ = os.Remove(l.path)
	return err
}

// syncDir has nothing to do: the file system's journal orders the renames.
func syncDir(*os.File) error { return nil }

func diskFull(err error) bool {
	return errors.Is(err, errorDiskFull) || errors.Is(err, handleDiskFull)
}
