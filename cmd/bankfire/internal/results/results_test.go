package results_test

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"maps"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"bankfire/cmd/bankfire/internal/results"
	"bankfire/cmd/bankfire/internal/results/failing"
	"bankfire/thermal"
)

// run returns the files of a run: a summary that names the others, and those, all with
// the text.
func run(text string, names ...string) []results.File {
	summary := fmt.Sprintf(`{"schema": 1, "program": {"name": "bankfire"}, "files": ["%s"], "title": %q}`,
		strings.Join(names, `", "`), text)
	files := []results.File{written(results.Summary, summary)}
	for _, name := range names {
		files = append(files, written(name, text))
	}
	return files
}

func written(name, text string) results.File {
	return results.File{Name: name, Write: func(w io.Writer) error {
		_, err := io.WriteString(w, text)
		return err
	}}
}

// put is a run into the folder.
func put(disk results.Disk, dir string, replace bool, files []results.File) error {
	f, err := results.Open(disk, dir, replace)
	if err != nil {
		return err
	}
	return f.Write(files)
}

// tree returns all files below dir with their text, and all folders with "/".
func tree(t *testing.T, dir string) map[string]string {
	t.Helper()
	all := map[string]string{}
	err := filepath.WalkDir(dir, func(name string, entry fs.DirEntry, err error) error {
		if err != nil || name == dir {
			return err
		}
		short, _ := filepath.Rel(dir, name)
		if entry.IsDir() {
			all[short] = "/"
			return nil
		}
		text, err := os.ReadFile(name)
		all[short] = string(text)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return all
}

// plant makes the files; a text of "/" is a folder.
func plant(t *testing.T, dir string, files map[string]string) {
	t.Helper()
	for _, name := range slices.Sorted(maps.Keys(files)) {
		full := filepath.Join(dir, name)
		var err error
		if files[name] == "/" {
			err = os.MkdirAll(full, 0o777)
		} else {
			err = errors.Join(os.MkdirAll(filepath.Dir(full), 0o777), os.WriteFile(full, []byte(files[name]), 0o666))
		}
		if err != nil {
			t.Fatal(err)
		}
	}
}

// texts returns what the files will hold, below dir.
func texts(dir string, files []results.File) map[string]string {
	all := map[string]string{dir: "/"}
	for _, x := range files {
		var text strings.Builder
		x.Write(&text)
		all[filepath.Join(dir, x.Name)] = text.String()
	}
	return all
}

var (
	first  = run("first", "paths.csv", "old.png")
	second = run("second, and longer", "paths.csv", "new.png")
	others = map[string]string{"out/notes.txt": "mine", "out/sub": "/", "out/sub/deep.txt": "also mine"}
)

// situations are the states of the disk before a run that may succeed.
var situations = map[string]map[string]string{
	"new":                {"beside.txt": "x"},
	"empty":              {"out": "/"},
	"results":            texts("out", first),
	"results and others": merged(texts("out", first), others),
	"leftover":           {"out": "/", "out/.bankfire-unfinished-1": "/", "out/.bankfire-unfinished-1/paths.csv": "fi", ".bankfire-unfinished-1": "/"},
}

func merged(a, b map[string]string) map[string]string {
	all := maps.Clone(a)
	maps.Copy(all, b)
	return all
}

// after is the state that a run which succeeds makes of before.
func after(before map[string]string) map[string]string {
	all := maps.Clone(before)
	for _, x := range first {
		delete(all, filepath.Join("out", x.Name))
	}
	return merged(all, texts("out", second))
}

func TestWrite(t *testing.T) {
	for name, before := range situations {
		t.Run(name, func(t *testing.T) {
			dir := t.TempDir()
			plant(t, dir, before)
			if err := put(results.OnDisk{}, filepath.Join(dir, "out"), true, second); err != nil {
				t.Fatal(err)
			}
			if got, want := tree(t, dir), after(before); !maps.Equal(got, want) {
				t.Errorf("got  %q\nwant %q", got, want)
			}
		})
	}
}

// TestEveryOperationFails makes each operation of a run fail in turn, in every way and
// every situation.
func TestEveryOperationFails(t *testing.T) {
	for name, before := range situations {
		for modeName, mode := range failing.Modes {
			t.Run(name+"/"+modeName, func(t *testing.T) {
				t.Parallel() // most of the time is waiting for the disk
				for at := 1; ; at++ {
					disk := &failing.Disk{At: at, Mode: mode}
					if !failAt(t, before, disk) {
						break
					}
					if t.Failed() {
						t.Fatalf("at operation %d", at)
					}
				}
			})
		}
	}
}

// failAt runs with the disk, which fails at some operation, and looks at what is left.
// It reports whether the run came to that operation.
func failAt(t *testing.T, before map[string]string, disk *failing.Disk) bool {
	dir := t.TempDir()
	plant(t, dir, before)
	err := putOrDie(disk, filepath.Join(dir, "out"))
	got := tree(t, dir)
	if disk.Count < disk.At {
		if err != nil || disk.At < len(second)*4 { // make, write, sync and close each file
			t.Errorf("after %d operations: %v", disk.Count, err)
		}
		return false
	}
	if !errors.Is(err, failing.ErrFull) {
		t.Errorf("got error %v, want %v", err, failing.ErrFull)
	}
	if disk.Mode == failing.Once && !couldNotTidy(err) && !maps.Equal(got, before) {
		t.Errorf("got  %q\nwant %q", got, before)
	}
	checkWhole(t, got, before)
	checkKept(t, got, before)
	checkNext(t, dir, got, before)
	return true
}

// couldNotTidy reports whether the failing operation was itself one of cleaning up.
func couldNotTidy(err error) bool {
	return strings.Contains(err.Error(), "not taken back") || strings.Contains(err.Error(), "results written")
}

// putOrDie is put with a death of the program as an error.
func putOrDie(disk results.Disk, dir string) (err error) {
	defer func() {
		if r := recover(); r != nil {
			err = r.(error)
		}
	}()
	return put(disk, dir, true, second)
}

// checkWhole checks that the folder, if it has a summary, has all the files of that run
// and none of another.
func checkWhole(t *testing.T, got, before map[string]string) {
	t.Helper()
	if _, whole := got["out/summary.json"]; !whole {
		return
	}
	visible := maps.Clone(got)
	maps.DeleteFunc(visible, func(name, _ string) bool { return strings.Contains(name, ".bankfire-") })
	old := maps.Clone(before)
	maps.DeleteFunc(old, func(name, _ string) bool { return strings.Contains(name, ".bankfire-") })
	if !maps.Equal(visible, old) && !maps.Equal(visible, after(old)) {
		t.Errorf("neither the results of one run nor of the other: %q", visible)
	}
}

// checkKept checks that earlier results still exist somewhere, unless there are new ones,
// and that other files are where they were.
func checkKept(t *testing.T, got, before map[string]string) {
	t.Helper()
	renewed := got["out/summary.json"] == after(before)["out/summary.json"]
	for name, text := range before {
		aside := filepath.Join(filepath.Dir(name), ".bankfire-earlier", filepath.Base(name))
		_, replaced := texts("out", first)[name]
		if got[name] != text && !(replaced && (renewed || got[aside] == text)) {
			t.Errorf("%s is lost: %q", name, got)
		}
	}
}

// checkNext checks that the next run succeeds, or is told that there are earlier results
// to care for first.
func checkNext(t *testing.T, dir string, got, before map[string]string) {
	t.Helper()
	err := put(results.OnDisk{}, filepath.Join(dir, "out"), true, second)
	if _, brokenOff := got["out/.bankfire-earlier"]; brokenOff {
		if err == nil || !strings.Contains(err.Error(), "the earlier results are in") {
			t.Errorf("next run: %v", err)
		}
		return
	}
	if err != nil {
		t.Errorf("next run: %v", err)
	}
	for name, text := range after(before) {
		if now := tree(t, dir)[name]; now != text {
			t.Errorf("after the next run %s is %q, want %q", name, now, text)
		}
	}
}

func TestOpenRefuses(t *testing.T) {
	for _, test := range []struct {
		name    string
		before  map[string]string
		dir     string
		replace bool
		want    string
	}{
		{"no name", nil, "", true, `--out: names no folder; write --out DIR`},
		{"file", map[string]string{"x": "text"}, "x", true, `is a file, not a folder; name a new folder`},
		{"file with a slash", map[string]string{"x": "text"}, "x/", true, `is a file, not a folder; name a new folder`},
		{"in a file", map[string]string{"x": "text"}, "x/y", true, `lies inside a file; name a new folder`},
		{"no parent", nil, "x/y", true, `x" cannot be used: no such file or directory; make it first`},
		{"long name", nil, strings.Repeat("x", 300), true, `cannot be used: file name too long; name another folder`},
		{"results", texts("x", first), "x", false, `already holds results; name a new folder, or add --replace to replace them`},
		{"files", map[string]string{"x/y": "mine"}, "x", false, `holds files but no results that could be replaced; name a new folder`},
		{"files replaced", map[string]string{"x/y": "mine"}, "x", true, `holds files but no results that could be replaced; name a new folder`},
		{"summary of another program", map[string]string{"x/summary.json": `{"schema": 1, "files": []}`}, "x", true, `holds files but no results`},
		{"summary without schema", map[string]string{"x/summary.json": `{"program": {"name": "bankfire"}}`}, "x", true, `holds files but no results`},
		{"summary by half", map[string]string{"x/summary.json": `{"schema": 1, "program": {"name": "bankf`}, "x", true, `holds files but no results`},
		{"summary empty", map[string]string{"x/summary.json": ""}, "x", true, `holds files but no results`},
		{"summary a folder", map[string]string{"x/summary.json": "/"}, "x", true, `holds files but no results`},
		{"broken off", map[string]string{"x/.bankfire-earlier": "/"}, "x", true, `x/.bankfire-earlier; move them away, or name a new folder`},
	} {
		t.Run(test.name, func(t *testing.T) {
			dir := t.TempDir()
			plant(t, dir, test.before)
			before := tree(t, dir)
			name := test.dir
			if name != "" {
				name = dir + "/" + test.dir
			}
			checkRefused(t, name, test.replace, test.want)
			if got := tree(t, dir); !maps.Equal(got, before) {
				t.Errorf("got %q, want %q", got, before)
			}
		})
	}
}

func checkRefused(t *testing.T, dir string, replace bool, want string) {
	t.Helper()
	_, err := results.Open(results.OnDisk{}, dir, replace)
	in := (*thermal.InputError)(nil)
	if !errors.As(err, &in) || !strings.Contains(err.Error(), want) {
		t.Errorf("got %v, want an input error with %s", err, want)
	}
}

func TestOpenRefusesLinks(t *testing.T) {
	dir := t.TempDir()
	plant(t, dir, map[string]string{"real": "/"})
	for link, to := range map[string]string{"link": "real", "dangling": "nowhere"} {
		t.Run(link, func(t *testing.T) {
			if err := os.Symlink(to, filepath.Join(dir, link)); err != nil {
				t.Skip(err)
			}
			checkRefused(t, filepath.Join(dir, link), true, "is a symbolic link; name the folder itself")
			checkRefused(t, filepath.Join(dir, link)+"/", true, "is a symbolic link; name the folder itself")
		})
	}
}

func TestOpenRefusesUnwritable(t *testing.T) {
	if os.Geteuid() == 0 {
		t.Skip("root may write anywhere")
	}
	dir := t.TempDir()
	plant(t, dir, map[string]string{"empty": "/", "writable": "/"})
	for _, name := range []string{"empty", "."} {
		if err := os.Chmod(filepath.Join(dir, name), 0o555); err != nil {
			t.Fatal(err)
		}
		defer os.Chmod(filepath.Join(dir, name), 0o755)
	}
	if err := put(results.OnDisk{}, filepath.Join(dir, "writable"), false, first); err != nil {
		t.Errorf("a folder that can be written to, in one that cannot: %v", err)
	}
	for _, name := range []string{"empty", "new"} {
		t.Run(name, func(t *testing.T) {
			checkRefused(t, filepath.Join(dir, name), true, "no files can be made there: permission denied; name another folder")
		})
	}
}

// TestNotOurs checks what --replace must leave alone although the summary names it.
func TestNotOurs(t *testing.T) {
	summary := `{"schema": 1, "program": {"name": "bankfire"}, "files": ["../above.txt", "sub/deep.txt", "sub", "..", "", "/", "gone.csv"]}`
	before := map[string]string{"above.txt": "a", "out": "/", "out/summary.json": summary, "out/sub": "/", "out/sub/deep.txt": "d"}
	dir := t.TempDir()
	plant(t, dir, before)
	if err := put(results.OnDisk{}, filepath.Join(dir, "out"), true, second); err != nil {
		t.Fatal(err)
	}
	if got, want := tree(t, dir), merged(before, texts("out", second)); !maps.Equal(got, want) {
		t.Errorf("got %q, want %q", got, want)
	}
}

// TestInTheWay checks that a new result does not take the place of the user's file.
func TestInTheWay(t *testing.T) {
	before := merged(texts("out", first), map[string]string{"out/new.png": "mine"})
	dir := t.TempDir()
	plant(t, dir, before)
	err := put(results.OnDisk{}, filepath.Join(dir, "out"), true, second)
	if err == nil || !strings.Contains(err.Error(), "holds a new.png that no earlier run wrote") {
		t.Errorf("got %v", err)
	}
	if got := tree(t, dir); !maps.Equal(got, before) {
		t.Errorf("got %q, want %q", got, before)
	}
}

// TestChangedWhileRunning has the folder change between Open and Write.
func TestChangedWhileRunning(t *testing.T) {
	for _, test := range []struct {
		name   string
		before map[string]string
		change func(out string) error
		want   string // of the error; "" is none
	}{
		{"another run was faster", map[string]string{}, func(out string) error { return put(results.OnDisk{}, out, false, first) }, "results not written: "},
		{"a file took the name", map[string]string{}, func(out string) error { return os.WriteFile(out, nil, 0o666) }, "results not written: "},
		{"another run is replacing", texts("out", first), func(out string) error { return os.Mkdir(out+"/.bankfire-earlier", 0o777) }, "results not written: "},
		{"an earlier file was removed", texts("out", first), func(out string) error { return os.Remove(out + "/old.png") }, ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			dir := t.TempDir()
			plant(t, dir, test.before)
			out := filepath.Join(dir, "out")
			f, err := results.Open(results.OnDisk{}, out, true)
			if err == nil {
				err = test.change(out)
			}
			if err != nil {
				t.Fatal(err)
			}
			before := tree(t, dir)
			err = f.Write(second)
			switch got := tree(t, dir); {
			case test.want == "" && (err != nil || !maps.Equal(got, texts("out", second))):
				t.Errorf("got %q, %v", got, err)
			case test.want != "" && (err == nil || !strings.Contains(err.Error(), test.want) || !maps.Equal(got, before)):
				t.Errorf("got %q, %v; want %q", got, err, before)
			}
		})
	}
}

func TestWritePanics(t *testing.T) {
	f, err := results.Open(results.OnDisk{}, filepath.Join(t.TempDir(), "out"), false)
	if err != nil {
		t.Fatal(err)
	}
	defer func() {
		if r := recover(); r != "results: no summary.json among the files" {
			t.Errorf("got %v", r)
		}
	}()
	f.Write(nil)
}
