package main

import (
	"context"
	"errors"
	"math"
	"os"
	"path/filepath"
	"slices"
	"sync"
	"testing"

	"bankfire/paths"
	"bankfire/paths/study"
)

// smallStudy has one path and the traverse of smallTraverse, to be quick.
const smallStudy = `title = "small"
[[path]]
name = "warm"
legs = [{ hold = "750 C", for = "100 yr" }]
[[crystal]]
name = "HF-1"
mineral = "quartz"
shape = "slab"
zones = [{ name = "core", width = "20 um" }, { name = "mantle", width = "20 um" }]
[[crystal.element]]
name = "Ti"
law = "quartz-ti-cherniak2007"
start = { zones = ["free", "free"], edge = "0 um" }
rim = { held = "mantle" }
traverse = { file = "ti.csv", position = "x [um]", zero = "centre", value = "Ti [ppm]", error = "2 ppm", spot = "0.8 um fwhm" }
`

const smallTraverse = "x [um],Ti [ppm]\n10,92\n17,91\n19,80\n21,68\n23,60\n30,58\n"

// weighSmall weighs the small study once for all tests.
var weighSmall = sync.OnceValues(func() (*paths.Result, error) {
	dir, err := os.MkdirTemp("", "")
	if err != nil {
		return nil, err
	}
	defer os.RemoveAll(dir)
	name := filepath.Join(dir, "study.toml")
	err = errors.Join(os.WriteFile(name, []byte(smallStudy), 0o666),
		os.WriteFile(filepath.Join(dir, "ti.csv"), []byte(smallTraverse), 0o666))
	if err != nil {
		return nil, err
	}
	return weighStudy(context.Background(), name)
})

// weighStudy weighs the study in the file.
func weighStudy(ctx context.Context, file string) (*paths.Result, error) {
	s, err := study.Read(file)
	if err != nil {
		return nil, err
	}
	return paths.Weigh(ctx, s, 1)
}

// smallResult is the small study weighed, for the test to change as it likes.
func smallResult(t *testing.T) *paths.Result {
	t.Helper()
	r, err := weighSmall()
	if err != nil {
		t.Fatal(err)
	}
	s, path, p := *r.Study, *r.Paths[0].Path, r.Paths[0]
	p.Path = &path
	p.Outcome.Profiles, p.Outcome.Crystals = slices.Clone(p.Outcome.Profiles), slices.Clone(p.Outcome.Crystals)
	p.Profiles = slices.Clone(p.Profiles)
	p.Profiles[0].Free = slices.Clone(p.Profiles[0].Free)
	return &paths.Result{Study: &s, Own: slices.Clone(r.Own), Crystals: r.Crystals, Paths: []paths.PathResult{p}}
}

// notRun makes the only path of the result one that was not run; its verdict does not
// matter to the tests that use it.
func notRun(r *paths.Result) {
	nan := math.NaN()
	r.Own[0] = paths.OwnBest{Crystal: r.Own[0].Crystal, Element: r.Own[0].Element, Outlier: -1}
	r.Paths[0].Profiles, r.Paths[0].Notes = nil, []string{"lives longer than 1 kyr"}
	r.Paths[0].Outcome = paths.Outcome{Finding: paths.Finding{
		Verdict: paths.WrongShape, Shift: nan, Shift68: [2]float64{0, math.Inf(1)}, Shift95: [2]float64{0, math.Inf(1)}, Tail: nan, Misfit: nan}}
}
