// Package failing has a disk for tests on which any one operation can be made to fail.
//
// Count the operations of a run without a failure, then run again with At from 1 to
// that count.
package failing

import (
	"errors"
	"io"

	"bankfire/cmd/bankfire/internal/results"
)

// Mode is what becomes of the operations from the failing one on.
type Mode int

// The modes.
const (
	Once   Mode = iota // one operation fails, the others work
	Dead               // all from that one on fail
	Killed             // the program ends there: a panic with ErrFull
)

// Modes lists them for tests.
var Modes = map[string]Mode{"once": Once, "dead": Dead, "killed": Killed}

// ErrFull is what a failing operation returns.
var ErrFull = errors.New("trial disk full")

// Disk is the disk of the operating system with a failure. Half of the data of a
// write that fails is written.
type Disk struct {
	At    int // the operation that fails, from 1; 0 is none
	Mode  Mode
	Count int // operations so far

	claimed []results.Claimed
}

// fails counts an operation and returns its error.
func (d *Disk) fails() error {
	d.Count++
	switch {
	case d.At == 0 || d.Count < d.At || d.Count > d.At && d.Mode == Once:
		return nil
	case d.Mode == Killed:
		for _, f := range d.claimed {
			f.Close() // as the system does
		}
		panic(ErrFull)
	}
	return ErrFull
}

func (d *Disk) do(operation func() error) error {
	if err := d.fails(); err != nil {
		return err
	}
	return operation()
}

// Mkdir is an operation.
func (d *Disk) Mkdir(name string) error {
	return d.do(func() error { return results.OnDisk{}.Mkdir(name) })
}

// Rename is an operation.
func (d *Disk) Rename(from, to string) error {
	return d.do(func() error { return results.OnDisk{}.Rename(from, to) })
}

// Remove is an operation.
func (d *Disk) Remove(name string) error {
	return d.do(func() error { return results.OnDisk{}.Remove(name) })
}

// SyncFolder is an operation.
func (d *Disk) SyncFolder(name string) error {
	return d.do(func() error { return results.OnDisk{}.SyncFolder(name) })
}

// Create is an operation, and so is whatever is done to the file.
func (d *Disk) Create(name string) (results.Sink, error) {
	if err := d.fails(); err != nil {
		return nil, err
	}
	f, err := results.OnDisk{}.Create(name)
	if err != nil {
		return nil, err
	}
	return &sink{f, d}, nil
}

// Open is an operation, and so is every read; that the closing of what was only read fails
// loses nothing.
func (d *Disk) Open(name string) (io.ReadCloser, error) {
	if err := d.fails(); err != nil {
		return nil, err
	}
	f, err := results.OnDisk{}.Open(name)
	if err != nil {
		return nil, err
	}
	return &reader{f, d}, nil
}

// Claim is an operation, and so is whatever is done to the file. One that failed to be
// made is not there.
func (d *Disk) Claim(name string, fresh bool) (results.Claimed, error) {
	if err := d.fails(); err != nil {
		return nil, err
	}
	f, err := results.OnDisk{}.Claim(name, fresh)
	if err != nil {
		return nil, err
	}
	d.claimed = append(d.claimed, f)
	return &file{sink{f, d}, f}, nil
}

type reader struct {
	io.ReadCloser
	disk *Disk
}

func (r *reader) Read(data []byte) (int, error) {
	if err := r.disk.fails(); err != nil {
		return 0, err
	}
	return r.ReadCloser.Read(data)
}

type file struct {
	sink
	file results.Claimed
}

func (f *file) Read(data []byte) (int, error) {
	if err := f.disk.fails(); err != nil {
		return 0, err
	}
	return f.file.Read(data)
}

func (f *file) Seek(offset int64, whence int) (int64, error) {
	if err := f.disk.fails(); err != nil {
		return 0, err
	}
	return f.file.Seek(offset, whence)
}

func (f *file) Truncate(size int64) error {
	return f.disk.do(func() error { return f.file.Truncate(size) })
}

type sink struct {
	results.Sink
	disk *Disk
}

func (s *sink) Write(data []byte) (n int, err error) {
	failed := true
	defer func() {
		if failed {
			n, _ = s.Sink.Write(data[:len(data)/2])
		}
	}()
	if err := s.disk.fails(); err != nil {
		return 0, err
	}
	failed = false
	return s.Sink.Write(data)
}

func (s *sink) Sync() error { return s.disk.do(s.Sink.Sync) }

// Close closes the file also where it fails.
func (s *sink) Close() error {
	return errors.Join(s.Sink.Close(), s.disk.fails())
}
