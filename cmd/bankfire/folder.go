package main

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"path/filepath"

	"bankfire/thermal"
)

// folder is where a run puts its files; nil if nobody asked for files.
type folder struct {
	dir     string
	replace bool
	written []string
}

type file struct {
	name string
	data []byte
}

// openFolder checks, before anything is computed, that results may go to dir.
func openFolder(dir string, replace bool) (*folder, error) {
	if dir == "" {
		return nil, nil
	}
	entries, err := os.ReadDir(dir)
	switch {
	case errors.Is(err, os.ErrNotExist):
	case err != nil:
		return nil, &thermal.InputError{Field: "--out", Value: dir, Problem: "is not a folder that can be read", Remedy: "name a new folder"}
	case len(entries) > 0 && !replace:
		return nil, &thermal.InputError{Field: "--out", Value: dir, Problem: "already holds files",
			Remedy: "name a new folder, or add --replace to replace the results of the same names"}
	}
	return &folder{dir: dir, replace: replace}, nil
}

// write puts the files into the folder, each written aside, synced and
// renamed, so that no file is ever there by half. If one fails, those of this
// run that came before it are removed again.
func (f *folder) write(files []file) error {
	if err := os.MkdirAll(f.dir, 0o777); err != nil {
		return err
	}
	var aside []string
	defer func() {
		for _, name := range aside {
			os.Remove(name)
		}
	}()
	for _, x := range files {
		name, err := writeAside(f.dir, x)
		if name != "" {
			aside = append(aside, name)
		}
		if err != nil {
			return fmt.Errorf("results not written: %w", err)
		}
	}
	for i, x := range files {
		if err := os.Rename(aside[i], filepath.Join(f.dir, x.name)); err != nil {
			return fmt.Errorf("results not written: %w", err)
		}
		f.written = append(f.written, x.name)
	}
	return nil
}

// writeAside writes a file under another name and makes sure that it is on
// disk. It returns that name if the file was made at all.
func writeAside(dir string, x file) (string, error) {
	w, err := os.CreateTemp(dir, ".unfinished-*-"+x.name)
	if err != nil {
		return "", err
	}
	_, err = w.Write(x.data)
	if err == nil {
		err = w.Chmod(0o644)
	}
	if err == nil {
		err = w.Sync()
	}
	if closeErr := w.Close(); err == nil {
		err = closeErr
	}
	return w.Name(), err
}

// describe adds what was written where to the text of a report.
func (f *folder) describe(text *bytes.Buffer) {
	if f == nil {
		return
	}
	fmt.Fprintf(text, "\nwritten to %s:", f.dir)
	for _, name := range f.written {
		fmt.Fprintf(text, " %s", name)
	}
	fmt.Fprintln(text)
}
