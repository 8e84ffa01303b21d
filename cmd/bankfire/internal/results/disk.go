package results

import (
	"errors"
	"io"
	"os"
	"runtime"
	"syscall"
)

// Disk is what results are written through, so that a test can make every operation
// fail. Names are those of the operating system.
type Disk interface {
	Mkdir(name string) error          // makes a folder, which must not be there
	Create(name string) (Sink, error) // makes a file, which must not be there
	Rename(from, to string) error     // of a file or a folder
	Remove(name string) error         // a file or an empty folder
	SyncFolder(name string) error     // returns when the names in the folder are on disk
}

// Sink is a file that is being written.
type Sink interface {
	io.WriteCloser
	Sync() error // returns when what was written is on disk
}

// OnDisk is the Disk of the operating system.
type OnDisk struct{}

// Mkdir is os.Mkdir.
func (OnDisk) Mkdir(name string) error { return os.Mkdir(name, 0o777) }

// Create makes the file for writing. It fails if there is one.
func (OnDisk) Create(name string) (Sink, error) {
	f, err := os.OpenFile(name, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return nil, err // not f, which would be no nil Sink
	}
	return f, nil
}

// Rename is os.Rename.
func (OnDisk) Rename(from, to string) error { return os.Rename(from, to) }

// Remove is os.Remove.
func (OnDisk) Remove(name string) error { return os.Remove(name) }

// SyncFolder syncs the folder where the system can: some file systems have no such
// thing, and Windows does not open folders.
func (OnDisk) SyncFolder(name string) error {
	if runtime.GOOS == "windows" {
		return nil
	}
	f, err := os.Open(name)
	if err != nil {
		return err
	}
	defer f.Close()
	if err := f.Sync(); err != nil && !errors.Is(err, syscall.EINVAL) && !errors.Is(err, errors.ErrUnsupported) {
		return err
	}
	return nil
}
