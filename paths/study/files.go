package study

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// loader reads a whole file that must not be larger than limit bytes. Its
// errors are *thermal.InputError without a place.
type loader func(name string, limit int64) ([]byte, error)

// load is the loader of real files.
func load(name string, limit int64) ([]byte, error) {
	info, err := os.Stat(name)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, &thermal.InputError{Problem: "no such file", Remedy: "check the name and its folder"}
	case err != nil:
		return nil, unreadable(err)
	case info.IsDir():
		return nil, &thermal.InputError{Problem: "a folder", Remedy: "name a file in it"}
	case info.Size() > limit:
		return nil, tooLarge(limit)
	}
	f, err := os.Open(name)
	if err != nil {
		return nil, unreadable(err)
	}
	defer f.Close()
	data, err := io.ReadAll(io.LimitReader(f, limit+1))
	switch {
	case err != nil:
		return nil, unreadable(err)
	case int64(len(data)) > limit: // what grows, or is no plain file
		return nil, tooLarge(limit)
	}
	return data, nil
}

func tooLarge(limit int64) error {
	return &thermal.InputError{Problem: fmt.Sprintf("larger than %d MiB", limit>>20), Remedy: "is it the right file?"}
}

func unreadable(err error) error {
	var path *fs.PathError
	if errors.As(err, &path) {
		err = path.Err
	}
	return &thermal.InputError{Problem: "cannot be read: " + err.Error()}
}

// files reads the files that a study names, each once, and keeps account of
// them.
type files struct {
	dir    string // of the study
	load   loader
	known  map[string][]byte
	inputs []Input
}

func newFiles(study string, data []byte, load loader) *files {
	f := &files{dir: filepath.Dir(study), load: load, known: map[string][]byte{}}
	f.account(filepath.Base(study), data)
	return f
}

func (f *files) account(name string, data []byte) {
	sum := sha256.Sum256(data)
	f.inputs = append(f.inputs, Input{Name: name, SHA256: hex.EncodeToString(sum[:])})
}

// path returns where a file that the study names lies, and so how its errors
// should call it.
func (f *files) path(name string) string {
	if filepath.IsAbs(name) {
		return name
	}
	return filepath.Join(f.dir, filepath.FromSlash(name))
}

// read returns the bytes of a file that the study names.
func (f *files) read(name string) ([]byte, error) {
	path := f.path(name)
	if data, known := f.known[path]; known {
		return data, nil
	}
	data, err := f.load(path, traverse.MaxBytes)
	var in *thermal.InputError
	if errors.As(err, &in) && path != name {
		at := *in
		at.Remedy = fmt.Sprintf("looked for at %q, names are relative to the study's folder", path)
		return nil, &at
	}
	if err != nil {
		return nil, err
	}
	f.known[path] = data
	f.account(f.shown(name), data)
	return data, nil
}

// shown returns how results name a file of the study: as it is written there,
// without its folder where that is an absolute one, so that they do not depend
// on where the study lies.
func (f *files) shown(name string) string {
	if filepath.IsAbs(name) {
		return filepath.Base(name)
	}
	return name
}

// named returns the notes on the file that the study names at n as results have
// them: with its name there for the label that errors have.
func (d *decoder) named(n *node, label string, notes []string) []string {
	var out []string
	for _, note := range notes {
		if rest, ok := strings.CutPrefix(note, label); ok {
			note = d.files.shown(n.text) + rest
		}
		out = append(out, note)
	}
	return out
}

// dataFile opens the file that the study names at n. The label names it in
// errors.
func (d *decoder) dataFile(n *node) (label string, r io.Reader, ok bool) {
	name, ok := d.text(n, `write the name of a file, relative to the folder of the study`)
	if !ok {
		return "", nil, false
	}
	data, err := d.files.read(name)
	if err != nil {
		d.reportError(n, err)
		return "", nil, false
	}
	return d.files.path(name), bytes.NewReader(data), true
}
