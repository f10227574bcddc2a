//go:build unix && !solaris && !aix

package session

import (
	"errors"
	"os"
	"syscall"
)

// openLocked opens or makes the lock file and locks it, without waiting.
func openLocked(path string) (f *os.File, missing bool, err error) {
	for {
		f, err = os.OpenFile(path, os.O_RDWR|os.O_CREATE|syscall.O_NOFOLLOW, 0o666)
		if err != nil {
			return nil, false, err
		}
		err = flock(f)
		if err == nil && !stillThere(path, f) {
			// The holder removed it between our opening and our locking it.
			f.Close()
			continue
		}
		break
	}
	switch {
	case err == nil:
		return f, false, nil
	case errors.Is(err, syscall.EWOULDBLOCK):
		err = errBusy
	case errors.Is(err, syscall.ENOLCK), errors.Is(err, syscall.ENOSYS), errors.Is(err, syscall.ENOTSUP):
		return f, true, nil
	}
	f.Close()
	return nil, false, err
}

func flock(f *os.File) error {
	for {
		err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
		if err != syscall.EINTR {
			return err
		}
	}
}

func stillThere(path string, f *os.File) bool {
	ours, err := f.Stat()
	if err != nil {
		return false
	}
	now, err := os.Lstat(path)
	return err == nil && os.SameFile(ours, now)
}

// release removes the file before it lets go, so that nobody can lock a file
// that is about to vanish without noticing.
func (l *lock) release() error {
	err := os.Remove(l.path)
	return errors.Join(err, l.file.Close())
}

// syncDir makes a rename last. Some file systems cannot sync a directory, and
// say so; there is nothing more to be done on those.
func syncDir(f *os.File) error {
	err := f.Sync()
	if errors.Is(err, syscall.EINVAL) || errors.Is(err, syscall.ENOTSUP) {
		return nil
	}
	return err
}

func diskFull(err error) bool {
	return errors.Is(err, syscall.ENOSPC) || errors.Is(err, syscall.EDQUOT)
}
