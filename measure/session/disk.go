package session

import (
	"bufio"
	"crypto/rand"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path"
	"strings"
)

// disk is what this package asks of a file system. Names are slash-separated and
// relative to the session folder. Tests put one in that fails at a chosen step.
type disk interface {
	Mkdir(name string) error              // no error when the directory is there
	Create(name string) (writable, error) // never an existing file
	Rename(from, to string) error
	Remove(name string) error
	SyncDir(name string) error
	ReadFile(name string, most int64) ([]byte, error) // regular files only
	ReadDir(name string) ([]fs.DirEntry, error)       // sorted
	Lstat(name string) (fs.FileInfo, error)
	Close() error
}

type writable interface {
	io.Writer
	Sync() error
	Close() error
}

// rootDisk is the real one.
type rootDisk struct{ root *os.Root }

func (d rootDisk) Mkdir(name string) error {
	err := d.root.Mkdir(name, 0o777)
	if !errors.Is(err, fs.ErrExist) {
		return err
	}
	// Nothing but a directory will do: through a link, a derived file could
	// land among the takes.
	info, err := d.root.Lstat(name)
	if err == nil && !info.IsDir() {
		err = fmt.Errorf("%s is not a directory", name)
	}
	return err
}

func (d rootDisk) Create(name string) (writable, error) {
	f, err := d.root.OpenFile(name, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return nil, err // not a nil *os.File in an interface
	}
	return f, nil
}

func (d rootDisk) Rename(from, to string) error               { return d.root.Rename(from, to) }
func (d rootDisk) Remove(name string) error                   { return d.root.Remove(name) }
func (d rootDisk) Lstat(name string) (fs.FileInfo, error)     { return d.root.Lstat(name) }
func (d rootDisk) ReadDir(name string) ([]fs.DirEntry, error) { return fs.ReadDir(d.root.FS(), name) }
func (d rootDisk) Close() error                               { return d.root.Close() }

func (d rootDisk) SyncDir(name string) error {
	f, err := d.root.Open(name)
	if err != nil {
		return err
	}
	defer f.Close()
	return syncDir(f)
}

func (d rootDisk) ReadFile(name string, most int64) ([]byte, error) {
	// Asked before opening: to open a pipe would wait for ever.
	info, err := d.root.Lstat(name)
	if err != nil {
		return nil, err
	}
	if !info.Mode().IsRegular() {
		return nil, errors.New("not a regular file")
	}
	f, err := d.root.Open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	data, err := io.ReadAll(io.LimitReader(f, most+1))
	if err == nil && int64(len(data)) > most {
		err = fmt.Errorf("has more than %d bytes", most)
	}
	return data, err
}

const (
	tempPrefix = ".standoff-"
	tempSuffix = ".tmp"
)

func tempName() string { return tempPrefix + rand.Text() + tempSuffix }

func isTemp(name string) bool {
	return strings.HasPrefix(name, tempPrefix) && strings.HasSuffix(name, tempSuffix)
}

// place is how every file gets its name: temporary name, sync, rename, sync of
// the directory. It returns the SHA-256 of the content. When placed is true the
// file stands under its name, even if syncing the directory then failed. A fresh
// file replaces nothing.
func place(d disk, name string, fresh bool, write func(io.Writer) error) (sum string, placed bool, err error) {
	dir := path.Dir(name)
	temp := path.Join(dir, tempName())
	sum, err = fill(d, temp, write)
	if err == nil && fresh {
		err = absent(d, name)
	}
	if err == nil {
		err = d.Rename(temp, name)
	}
	if err != nil {
		_ = d.Remove(temp) // what stays behind is removed when it is old
		return "", false, err
	}
	return sum, true, d.SyncDir(dir)
}

func absent(d disk, name string) error {
	_, err := d.Lstat(name)
	switch {
	case err == nil:
		return fs.ErrExist
	case errors.Is(err, fs.ErrNotExist):
		return nil
	}
	return err
}

func fill(d disk, name string, write func(io.Writer) error) (sum string, err error) {
	f, err := d.Create(name)
	if err != nil {
		return "", err
	}
	hash := sha256.New()
	buffer := bufio.NewWriterSize(io.MultiWriter(f, hash), 1<<16)
	err = write(buffer)
	if err == nil {
		err = buffer.Flush()
	}
	if err == nil {
		err = f.Sync()
	}
	if closing := f.Close(); err == nil {
		err = closing
	}
	return hex.EncodeToString(hash.Sum(nil)), err
}

func sumOf(data []byte) string {
	sum := sha256.Sum256(data)
	return hex.EncodeToString(sum[:])
}
