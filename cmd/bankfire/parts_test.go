package main

import (
	"bytes"
	"fmt"
	"maps"
	"math/rand/v2"
	"path/filepath"
	"slices"
	"strconv"
	"testing"
)

// TestSameBytes weighs a family of 16 blocks in several ways: whatever the number of jobs
// and of parts, no byte of the results but of run.log differs.
func TestSameBytes(t *testing.T) {
	dir := t.TempDir()
	study := filepath.Join(dir, "study.toml")
	plantStudy(t, study, familyStudy(65_000), familyTraverse)
	run := func(args ...string) {
		t.Helper()
		var said bytes.Buffer
		if status := execute(commands(), append(args, "--keep", "all", "--quiet"), streams{nil, &said, &said}); status != done || said.Len() > 0 {
			t.Fatalf("%q: status %d, said %q", args, status, said.String())
		}
	}
	run("weigh", study, "--out", filepath.Join(dir, "whole"), "--jobs", "1")
	want := hashes(t, filepath.Join(dir, "whole"))
	for _, jobs := range []int{2, 4} {
		out := filepath.Join(dir, strconv.Itoa(jobs)+" jobs")
		run("weigh", study, "--out", out, "--jobs", strconv.Itoa(jobs))
		if !maps.Equal(hashes(t, out), want) {
			t.Errorf("other results with %d jobs", jobs)
		}
	}
	for _, n := range []int{1, 4, 16} {
		out := filepath.Join(dir, strconv.Itoa(n)+" parts")
		for k := n; k > 0; k-- {
			run("weigh", study, "--out", out, "--part", fmt.Sprintf("%d/%d", k, n), "--jobs", strconv.Itoa(1+k%3))
		}
		var said bytes.Buffer
		args := []string{"gather", study, out + partsSuffix, "--out", out, "--quiet"}
		if status := execute(commands(), args, streams{nil, &said, &said}); status != done || said.Len() > 0 {
			t.Fatalf("%q: status %d, said %q", args, status, said.String())
		}
		if !maps.Equal(hashes(t, out), want) {
			t.Errorf("other results of %d parts", n)
		}
	}
}

// TestShares has the shares of runs of all sizes follow each other without a gap, and
// none larger than another by more than a block.
func TestShares(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 3))
	for range 300 {
		all, n := random.Int64N(1<<random.IntN(52)+1), 1+random.Int64N(1000)
		next := int64(0)
		for k := range n {
			from, to := share{k + 1, n}.blocks(all)
			if size := to - from; from != next || size < all/n || size > all/n+1 {
				t.Fatalf("part %d of %d, of %d blocks, is %d to %d", k+1, n, all, from, to)
			}
			next = to
		}
		if next != all {
			t.Fatalf("%d of %d blocks in %d parts", next, all, n)
		}
	}
}

// TestLowest compares the last of those that stand first with that of a sorted list.
func TestLowest(t *testing.T) {
	random := rand.New(rand.NewPCG(4, 4))
	for range 300 {
		l := lowest{most: 1 + random.Int64N(20)}
		var all []mark
		for i := range random.Int64N(60) {
			m := mark{float64(random.IntN(10)), i}
			all = append(all, m)
			l.add(m)
		}
		slices.SortFunc(all, mark.compare)
		want := mark{}
		if n := min(len(all), int(l.most)); n > 0 {
			want = all[n-1]
		}
		if got := l.last(); got != want {
			t.Fatalf("the last of %d is %v, want %v", l.most, got, want)
		}
	}
}
