package results

import (
	"encoding/json"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"syscall"

	"bankfire/thermal"
)

// Open checks, before anything is computed, that results may go to the folder dir, and
// leaves nothing behind. Its parent must exist. The folder itself may be missing or
// empty or, with replace, hold the results of an earlier run, which Write will replace.
// Other folders, and what is no folder, are refused with a *thermal.InputError.
func Open(disk Disk, dir string, replace bool) (*Folder, error) {
	if dir == "" {
		return nil, outError(dir, "names no folder", "write --out DIR")
	}
	f := &Folder{disk: disk, dir: filepath.Clean(dir)}
	var err error
	if f.exists, err = isFolder(f.dir); err != nil {
		return nil, err
	}
	if f.exists {
		if err := f.look(replace); err != nil {
			return nil, err
		}
	}
	return f, f.try()
}

func outError(dir, problem, remedy string) *thermal.InputError {
	return &thermal.InputError{Field: "--out", Value: dir, Problem: problem, Remedy: remedy}
}

// isFolder reports whether the folder exists. If it does not, its parent does.
func isFolder(dir string) (bool, error) {
	info, err := os.Lstat(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return false, parentExists(dir)
	case errors.Is(err, syscall.ENOTDIR):
		return false, outError(dir, "lies inside a file", "name a new folder")
	case err != nil:
		return false, outError(dir, "cannot be used: "+reason(err), "name another folder")
	case info.Mode()&fs.ModeSymlink != 0:
		return false, outError(dir, "is a symbolic link", "name the folder itself")
	case !info.IsDir():
		return false, outError(dir, "is a file, not a folder", "name a new folder")
	}
	return true, nil
}

func parentExists(dir string) error {
	parent := filepath.Dir(dir)
	if _, err := os.Stat(parent); err != nil {
		return outError(dir, fmt.Sprintf("the folder %q cannot be used: %s", parent, reason(err)), "make it first")
	}
	return nil
}

// reason is what is wrong, without the name and what was tried.
func reason(err error) string {
	if path := (*fs.PathError)(nil); errors.As(err, &path) {
		return path.Err.Error()
	}
	return err.Error()
}

// look looks at what is in the folder and refuses what may not be replaced.
func (f *Folder) look(replace bool) error {
	entries, err := os.ReadDir(f.dir)
	if err != nil {
		return outError(f.dir, "cannot be read: "+reason(err), "name another folder")
	}
	names := make([]string, 0, len(entries))
	for _, e := range entries {
		if !strings.HasPrefix(e.Name(), unfinished) { // left by a run that was killed, or used by one now
			names = append(names, e.Name())
		}
	}
	earlier := earlierRun(f.dir)
	switch {
	case len(names) == 0:
	case slices.Contains(names, earlierName):
		return outError(f.dir, "a run that replaced results here was broken off, or still runs; the earlier results are in "+
			filepath.Join(f.dir, earlierName), "move them away, or name a new folder")
	case earlier == nil:
		return outError(f.dir, "holds files but no results that could be replaced", "name a new folder")
	case !replace:
		return outError(f.dir, "already holds results", "name a new folder, or add --replace to replace them")
	}
	f.earlier = earlier
	return nil
}

// mostSummary is how many bytes of a summary are read, more than any has.
const mostSummary = 256 << 20

// earlierRun returns the names of the files in dir that an earlier run of this program
// wrote, Summary first; nil if there is no Summary of ours. What bears such a name but
// is no file, or names another folder, is not ours.
func earlierRun(dir string) []string {
	info, err := os.Lstat(filepath.Join(dir, Summary))
	if err != nil || !info.Mode().IsRegular() || info.Size() > mostSummary {
		return nil
	}
	text, err := os.ReadFile(filepath.Join(dir, Summary))
	if err != nil {
		return nil
	}
	var head struct {
		Schema  int
		Program struct{ Name string }
		Files   []string
	}
	if err := json.Unmarshal(text, &head); err != nil || head.Schema < 1 || head.Program.Name != Program {
		return nil
	}
	names := []string{Summary}
	for _, name := range head.Files {
		info, err := os.Lstat(filepath.Join(dir, name))
		if filepath.Base(name) == name && err == nil && info.Mode().IsRegular() && !slices.Contains(names, name) {
			names = append(names, name)
		}
	}
	return names
}

// try makes a folder where the results will be written aside and removes it again.
func (f *Folder) try() error {
	w := &work{disk: f.disk}
	_, err := w.fresh(f.parent())
	err = errors.Join(err, w.takeBack())
	switch {
	case err == nil:
		return nil
	case errors.Is(err, fs.ErrPermission), errors.Is(err, syscall.EROFS):
		return outError(f.dir, "no files can be made there: "+reason(err), "name another folder")
	}
	return fmt.Errorf("no files can be made for --out %q: %w", f.dir, err)
}
