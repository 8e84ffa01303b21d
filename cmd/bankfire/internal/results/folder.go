package results

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
)

// Summary is the name of the file that says what a run found. It is the mark of results
// that are whole: it goes last into a folder and first out of it.
const Summary = "summary.json"

// Program is the name of the program in its summaries.
const Program = "bankfire"

// File is one file of the results.
type File struct {
	Name  string                  // without a folder
	Write func(w io.Writer) error // writes all of it
}

// Folder is where a run puts its files.
type Folder struct {
	disk    Disk
	dir     string
	exists  bool     // the folder does, and it is ours to fill
	earlier []string // files in it that an earlier run wrote, Summary first; none where there are no results
}

// Write puts the files into the folder. One of them must be Summary.
//
// A folder that did not exist is there whole or not at all. In one that did, the files
// of an earlier run are moved aside first, the new ones put in their place and the
// earlier ones removed last; other files in it stay where they are. Should the program
// be killed in between, the folder has no Summary, and the earlier results are in its
// folder .bankfire-earlier.
//
// If an operation fails, those before it are taken back: no new file remains, and
// earlier results are as they were. The error says so where that fails too. If earlier
// results could not be removed, the new ones are whole and the error says where the
// others lie. Write panics if Summary is not among the files.
func (f *Folder) Write(files []File) error {
	if !slices.ContainsFunc(files, isSummary) {
		panic("results: no " + Summary + " among the files")
	}
	w := &work{disk: f.disk}
	aside, err := f.writeAside(w, files)
	switch {
	case err != nil:
	case f.exists:
		err = f.fill(w, aside, files)
	default:
		err = f.appear(w, aside)
	}
	if err != nil {
		return errors.Join(fmt.Errorf("results not written: %w", err), w.takeBack())
	}
	if f.exists {
		return f.tidy(aside)
	}
	return nil
}

func isSummary(x File) bool { return x.Name == Summary }

// writeAside writes the files into a fresh folder on the same file system, whose name
// it returns.
func (f *Folder) writeAside(w *work, files []File) (string, error) {
	aside, err := w.fresh(f.parent())
	if err != nil {
		return "", err
	}
	for _, x := range files {
		if err := w.write(filepath.Join(aside, x.Name), x.Write); err != nil {
			return "", err
		}
	}
	return aside, f.disk.SyncFolder(aside)
}

// parent is the folder in which results are written aside: inside the folder where it
// exists, since it may be the root of a file system.
func (f *Folder) parent() string {
	if f.exists {
		return f.dir
	}
	return filepath.Dir(f.dir)
}

// appear makes the folder that was written aside the one that was asked for.
func (f *Folder) appear(w *work, aside string) error {
	if err := w.rename(aside, f.dir); err != nil {
		return err
	}
	return f.disk.SyncFolder(filepath.Dir(f.dir))
}

// earlierName is the folder for the results of an earlier run while new ones take their
// place. Since it cannot be made twice, no two runs do so at a time.
const earlierName = ".bankfire-earlier"

// fill moves the earlier results aside and the new ones into the folder.
func (f *Folder) fill(w *work, aside string, files []File) error {
	earlier := filepath.Join(f.dir, earlierName)
	if err := w.mkdir(earlier); err != nil {
		return err
	}
	for _, name := range f.earlier {
		err := w.rename(filepath.Join(f.dir, name), filepath.Join(earlier, name))
		if err != nil && !errors.Is(err, fs.ErrNotExist) { // the user may have removed it since
			return err
		}
	}
	for _, x := range summaryLast(files) {
		to := filepath.Join(f.dir, x.Name)
		if _, err := os.Lstat(to); !errors.Is(err, fs.ErrNotExist) {
			return outError(f.dir, "holds a "+x.Name+" that no earlier run wrote", "move it away, or name a new folder")
		}
		if err := w.rename(filepath.Join(aside, x.Name), to); err != nil {
			return err
		}
	}
	return f.disk.SyncFolder(f.dir)
}

func summaryLast(files []File) []File {
	i := slices.IndexFunc(files, isSummary)
	return slices.Concat(files[:i], files[i+1:], files[i:i+1])
}

// tidy removes the earlier results and the empty folders of the work.
func (f *Folder) tidy(aside string) error {
	earlier := filepath.Join(f.dir, earlierName)
	var errs []error
	for _, name := range f.earlier {
		if err := f.disk.Remove(filepath.Join(earlier, name)); !errors.Is(err, fs.ErrNotExist) {
			errs = append(errs, err)
		}
	}
	errs = append(errs, f.disk.Remove(earlier), f.disk.Remove(aside))
	if err := errors.Join(errs...); err != nil {
		return fmt.Errorf("results written, but not all of the earlier ones removed: %w", err)
	}
	return nil
}
