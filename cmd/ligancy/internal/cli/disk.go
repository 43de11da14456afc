package cli

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"syscall"
)

// Disk is what writing results needs of a file system. Names are paths of the process.
type Disk interface {
	Lstat(name string) (fs.FileInfo, error)
	ReadDir(name string) ([]fs.DirEntry, error)
	ReadFile(name string) ([]byte, error)
	// Mkdir makes a folder that must not exist.
	Mkdir(name string) error
	// Create writes a file that must not exist, whole, onto the medium.
	Create(name string, content []byte) error
	// Sync puts a folder's entries onto the medium.
	Sync(dir string) error
	Rename(from, to string) error
	RemoveAll(name string) error
}

// osDisk is the disk of this machine.
type osDisk struct{}

func (osDisk) Lstat(name string) (fs.FileInfo, error)     { return os.Lstat(name) }
func (osDisk) ReadDir(name string) ([]fs.DirEntry, error) { return os.ReadDir(name) }
func (osDisk) ReadFile(name string) ([]byte, error)       { return os.ReadFile(name) }
func (osDisk) Mkdir(name string) error                    { return os.Mkdir(name, 0o777) }
func (osDisk) Rename(from, to string) error               { return os.Rename(from, to) }
func (osDisk) RemoveAll(name string) error                { return os.RemoveAll(name) }

func (osDisk) Create(name string, content []byte) error {
	f, err := os.OpenFile(name, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return err
	}
	_, err = f.Write(content)
	if err == nil {
		err = f.Sync()
	}
	if closed := f.Close(); err == nil {
		err = closed
	}
	if err != nil {
		os.Remove(name)
	}
	return err
}

func (osDisk) Sync(dir string) error {
	if runtime.GOOS == "windows" { // folders cannot be synced there
		return nil
	}
	d, err := os.Open(filepath.Clean(dir))
	if err != nil {
		return err
	}
	err = d.Sync()
	if closed := d.Close(); err == nil {
		err = closed
	}
	if errors.Is(err, errors.ErrUnsupported) || errors.Is(err, syscall.EINVAL) { // nor on some network disks
		return nil
	}
	return err
}
