package results

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"path/filepath"
	"strconv"
)

// work is a series of changes to a disk that can be taken back.
type work struct {
	disk Disk
	back []func() error // takes back each change, in the order in which they were made
}

// takeBack takes back all changes, the last one first. What fails is left as it is,
// and the rest still taken back.
func (w *work) takeBack() error {
	var errs []error
	for i := len(w.back) - 1; i >= 0; i-- {
		if err := w.back[i](); err != nil {
			errs = append(errs, fmt.Errorf("not taken back: %w", err))
		}
	}
	w.back = nil
	return errors.Join(errs...)
}

func (w *work) mkdir(name string) error {
	if err := w.disk.Mkdir(name); err != nil {
		return err
	}
	w.back = append(w.back, func() error { return w.disk.Remove(name) })
	return nil
}

func (w *work) rename(from, to string) error {
	if err := w.disk.Rename(from, to); err != nil {
		return err
	}
	w.back = append(w.back, func() error { return w.disk.Rename(to, from) })
	return nil
}

// unfinished begins the names of the folders in which results are written aside.
const unfinished = ".bankfire-unfinished-"

// mostLeftovers is how many such folders, of runs that were killed or are still
// writing, may lie beside each other.
const mostLeftovers = 1000

// fresh makes a hidden folder of a name that nothing else has.
func (w *work) fresh(parent string) (string, error) {
	for i := 1; ; i++ {
		name := filepath.Join(parent, unfinished+strconv.Itoa(i))
		err := w.mkdir(name)
		if i == mostLeftovers || !errors.Is(err, fs.ErrExist) {
			return name, err
		}
	}
}

// bufferSize is how many bytes go to disk at a time.
const bufferSize = 64 << 10

// write makes a file and returns when it is on disk.
func (w *work) write(name string, fill func(io.Writer) error) error {
	f, err := w.disk.Create(name)
	if err != nil {
		return err
	}
	w.back = append(w.back, func() error { return w.disk.Remove(name) })
	buffered := bufio.NewWriterSize(f, bufferSize)
	err = fill(buffered)
	if err == nil {
		err = buffered.Flush()
	}
	if err == nil {
		err = f.Sync()
	}
	if closeErr := f.Close(); err == nil {
		err = closeErr
	}
	return err
}
