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

	Open(name string) (io.ReadCloser, error) // opens a file for reading

	// Claim opens a file for reading and writing by this process alone, until it is closed;
	// fresh makes the file, which must not be there. The error is ErrClaimed if another
	// process, or this one, has it.
	Claim(name string, fresh bool) (Claimed, error)
}

// Sink is a file that is being written.
type Sink interface {
	io.WriteCloser
	Sync() error // returns when what was written is on disk
}

// Claimed is a file that can be read, cut and continued.
type Claimed interface {
	Sink
	io.ReadSeeker
	Truncate(size int64) error // of what lies beyond size, wherever the file is read or written
}

// ErrClaimed is the error about a file that another process has claimed.
var ErrClaimed = errors.New("in use by another process")

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

// Open is os.Open.
func (OnDisk) Open(name string) (io.ReadCloser, error) {
	f, err := os.Open(name)
	if err != nil {
		return nil, err
	}
	return f, nil
}

// Claim locks the file where the system has flock; elsewhere, such as on Windows, two
// processes that claim one file do not notice.
func (OnDisk) Claim(name string, fresh bool) (Claimed, error) {
	how := os.O_RDWR
	if fresh {
		how |= os.O_CREATE | os.O_EXCL
	}
	f, err := os.OpenFile(name, how, 0o666)
	if err != nil {
		return nil, err
	}
	if err := lock(f); err != nil {
		return nil, errors.Join(err, f.Close())
	}
	if err := stillNamed(f, name); err != nil {
		return nil, errors.Join(err, f.Close())
	}
	return f, nil
}

// stillNamed checks that the file is the one of that name still: the process that had it
// locked may have removed it.
func stillNamed(f *os.File, name string) error {
	named, err := os.Stat(name)
	if err != nil {
		return err
	}
	own, err := f.Stat()
	if err == nil && !os.SameFile(named, own) {
		err = ErrClaimed
	}
	return err
}
