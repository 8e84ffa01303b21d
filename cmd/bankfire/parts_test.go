package main

import (
	"math/rand/v2"
	"slices"
	"testing"
)

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
