package session

import "io/fs"

// closedDisk takes the disk's place after Close.
type closedDisk struct{}

func (closedDisk) Mkdir(string) error                     { return fs.ErrClosed }
func (closedDisk) Create(string) (writable, error)        { return nil, fs.ErrClosed }
func (closedDisk) Rename(string, string) error            { return fs.ErrClosed }
func (closedDisk) Remove(string) error                    { return fs.ErrClosed }
func (closedDisk) SyncDir(string) error                   { return fs.ErrClosed }
func (closedDisk) ReadFile(string, int64) ([]byte, error) { return nil, fs.ErrClosed }
func (closedDisk) ReadDir(string) ([]fs.DirEntry, error)  { return nil, fs.ErrClosed }
func (closedDisk) Lstat(string) (fs.FileInfo, error)      { return nil, fs.ErrClosed }
func (closedDisk) Close() error                           { return nil }
