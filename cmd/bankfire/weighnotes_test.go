package main

import (
	"slices"
	"testing"

	"bankfire/paths"
)

// TestCommonNotes: what stands beside every path that was run is said once, and of a
// single path beside it.
func TestCommonNotes(t *testing.T) {
	ran := paths.PathResult{Profiles: make([]paths.ProfileResult, 1)}
	beside := [][]string{{"a", "b", "c"}, nil, {"c", "d", "a"}}
	r := &paths.Result{Paths: []paths.PathResult{ran, {}, ran}}
	if got, want := commonNotes(r, beside), []string{"a", "c"}; !slices.Equal(got, want) {
		t.Errorf("common to two paths that were run and one that was not: %q, want %q", got, want)
	}
	r.Paths = r.Paths[:2]
	if got := commonNotes(r, beside[:2]); len(got) != 0 {
		t.Errorf("common to one path: %q, want nothing", got)
	}
}

func TestGathered(t *testing.T) {
	got := gathered([]string{
		"k: constants not checked against the paper", "k: used at 600 C",
		"k: the QFM buffer: constants not checked against the paper", "l: the QFM buffer: constants not checked against the paper",
	})
	want := []string{"constants not checked against the paper: k, the QFM buffer, l", "k: used at 600 C"}
	if !slices.Equal(got, want) {
		t.Errorf("gathered %q, want %q", got, want)
	}
}
