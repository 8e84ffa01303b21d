package main

import (
	"go/parser"
	"go/token"
	"io/fs"
	"maps"
	"os"
	"path"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// root is the top of the module.
const root = "../.."

// forTests are the packages that only tests import.
var forTests = []string{"thermal/published", "diffusion/yardstick", "cmd/bankfire/internal/results/failing"}

// TestImports holds the import table of DEVELOPERS.md: every package stands there,
// and imports nothing that its row does not name. The standard library is free, and
// so is what only tests import, except for packages of ours: those that a test
// imports must stand in the row too, or be for tests.
func TestImports(t *testing.T) {
	table := importTable(t)
	packages := packageFiles(t)
	for _, name := range slices.Sorted(maps.Keys(packages)) {
		t.Run(name, func(t *testing.T) {
			allowed, listed := table[name]
			if !listed {
				t.Fatalf("%s is not in the import table of DEVELOPERS.md", name)
			}
			for _, file := range packages[name] {
				checkImports(t, name, file, allowed)
			}
		})
	}
	for name := range table {
		if packages[name] == nil {
			t.Errorf("the import table of DEVELOPERS.md lists %s, which does not exist", name)
		}
	}
}

func checkImports(t *testing.T, name, file string, allowed []string) {
	parsed, err := parser.ParseFile(token.NewFileSet(), file, nil, parser.ImportsOnly)
	if err != nil {
		t.Fatal(err)
	}
	test := strings.HasSuffix(file, "_test.go")
	for _, spec := range parsed.Imports {
		imported, err := strconv.Unquote(spec.Path.Value)
		if err != nil {
			t.Fatal(err)
		}
		if !mayImport(name, imported, test, allowed) {
			t.Errorf("%s imports %s; its row in DEVELOPERS.md has only %q", file, imported, allowed)
		}
	}
}

// mayImport reports whether a file of the package, if test is true a test, may import
// what is named.
func mayImport(name, imported string, test bool, allowed []string) bool {
	ours, isOurs := strings.CutPrefix(imported, "bankfire/")
	switch {
	case isOurs && test:
		return ours == name || slices.Contains(forTests, ours) || slices.Contains(allowed, ours)
	case isOurs:
		return slices.Contains(allowed, ours)
	case test || !strings.Contains(imported, "."): // the standard library has no dot in a path
		return true
	}
	return slices.ContainsFunc(allowed, func(module string) bool {
		return imported == module || strings.HasPrefix(imported, module+"/")
	})
}

// importTable reads the rows under the heading Imports: a package in backquotes, and
// what it may import, each in backquotes.
func importTable(t *testing.T) map[string][]string {
	text, err := os.ReadFile(filepath.Join(root, "DEVELOPERS.md"))
	if err != nil {
		t.Fatal(err)
	}
	_, section, found := strings.Cut(string(text), "\n## Imports\n")
	if !found {
		t.Fatal("DEVELOPERS.md has no heading Imports")
	}
	section, _, _ = strings.Cut(section, "\n## ")
	quoted := regexp.MustCompile("`([^`]+)`")
	table := map[string][]string{}
	for _, line := range strings.Split(section, "\n") {
		cells := quoted.FindAllStringSubmatch(line, -1)
		if !strings.HasPrefix(line, "| `") || len(cells) == 0 {
			continue
		}
		table[cells[0][1]] = []string{}
		for _, cell := range cells[1:] {
			table[cells[0][1]] = append(table[cells[0][1]], cell[1])
		}
	}
	return table
}

// packageFiles lists the Go files of the module by package.
func packageFiles(t *testing.T) map[string][]string {
	packages := map[string][]string{}
	err := filepath.WalkDir(root, func(file string, entry fs.DirEntry, err error) error {
		base := entry.Name()
		switch {
		case err != nil:
			return err
		case entry.IsDir() && (base == "testdata" || strings.HasPrefix(base, ".") && base != ".." && base != "."):
			return fs.SkipDir
		case path.Ext(base) == ".go":
			name, err := filepath.Rel(root, filepath.Dir(file))
			name = filepath.ToSlash(name)
			packages[name] = append(packages[name], file)
			return err
		}
		return nil
	})
	if err != nil || len(packages) == 0 {
		t.Fatalf("%d packages, %v", len(packages), err)
	}
	return packages
}

func TestMayImport(t *testing.T) {
	allowed := []string{"thermal", "gonum.org/v1/gonum"}
	for _, test := range []struct {
		name, imported string
		test, want     bool
	}{
		{"standard library", "math/rand/v2", false, true},
		{"ours in the row", "bankfire/thermal", false, true},
		{"ours below one in the row", "bankfire/thermal/numeric", false, false},
		{"ours not in the row", "bankfire/paths", false, false},
		{"test of itself", "bankfire/diffusion", true, true},
		{"test support in a test", "bankfire/thermal/published", true, true},
		{"test support in the program", "bankfire/thermal/published", false, false},
		{"ours upwards in a test", "bankfire/paths", true, false},
		{"module in the row", "gonum.org/v1/gonum/mat", false, true},
		{"module of a like name", "gonum.org/v1/gonumx", false, false},
		{"other module", "github.com/fogleman/gg", false, false},
		{"other module in a test", "github.com/google/go-cmp/cmp", true, true},
	} {
		t.Run(test.name, func(t *testing.T) {
			if got := mayImport("diffusion", test.imported, test.test, allowed); got != test.want {
				t.Errorf("got %t, want %t", got, test.want)
			}
		})
	}
}
