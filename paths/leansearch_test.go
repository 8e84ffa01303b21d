package paths

import (
	"math"
	"math/rand/v2"
	"testing"
)

// No point of a fine lattice is below what the search finds, for curves with two
// lowest points each, one to three of them on a law, whose deviations the lattice
// covers: chi-square there would have to be bought with more than it saves.
func TestLeaningFindsTheLowest(t *testing.T) {
	const step, most = 0.04, 7.0
	const roundOff = 1e-9
	rng := rand.New(rand.NewPCG(63, 1))
	law := LawPrior{Key: "a", LnD: 0.6, E: 15e3}
	xs := lattice(-most, most, step)
	above := 0.0
	const trials = 40
	for trial := range trials {
		var cs []Curve
		for range 1 + trial%3 {
			byE := [2]float64{(rng.Float64() - 0.5) * 1e-4, (rng.Float64() - 0.5) * 2e-9}
			cs = append(cs, on(1, byE, rough(rng)))
		}
		l := newLeaning(cs, []LawPrior{law})
		least := math.Inf(1)
		for _, d := range xs {
			for _, e := range xs {
				z := [2]float64{d, e}
				least = math.Min(least, l.misfit(z[:])+dot(z[:], z[:]))
			}
		}
		got, _ := lean(cs, []LawPrior{law}, 0)
		if got > least+roundOff {
			t.Errorf("trial %d, %d curves: %.9g, on the lattice %.9g", trial, len(cs), got, least)
		}
		above += least - got
	}
	// a lattice misses a parabola of curvature 2c by c step^2/4 at most a deviation
	if mean := above / trials; mean > 0.05 {
		t.Errorf("%.3g below the lattice on average: is the lattice too coarse, or not of the same?", mean)
	}
}

// What makes a path pass is no larger than anything on the lattice that does, for
// curves of one lowest point, of which the price finds the smallest deviations.
func TestLeaningFindsTheSmallest(t *testing.T) {
	const step, most = 0.02, 5.0
	rng := rand.New(rand.NewPCG(64, 1))
	law := LawPrior{Key: "a", LnD: 0.6, E: 15e3}
	xs := lattice(-most, most, step)
	found := 0
	for range 20 {
		var cs []Curve
		for range 2 {
			byE := [2]float64{(rng.Float64() - 0.5) * 1e-4}
			cs = append(cs, on(1, byE, bowl(20, 2*rng.Float64()-1, 0.1+0.2*rng.Float64(), 22, 2)))
		}
		const pass = 50
		_, z := lean(cs, []LawPrior{law}, pass)
		l := newLeaning(cs, []LawPrior{law})
		smallest := math.Inf(1)
		for _, d := range xs {
			for _, e := range xs {
				at := [2]float64{d, e}
				if l.misfit(at[:]) <= pass {
					smallest = math.Min(smallest, math.Hypot(d, e))
				}
			}
		}
		if math.IsInf(smallest, 1) {
			continue
		}
		found++
		if z == nil || math.Hypot(z[0], z[1]) > smallest+1e-6 || l.misfit(z) > pass {
			t.Errorf("got %v, on the lattice %g", z, smallest)
		}
	}
	if found < 10 {
		t.Errorf("%d of 20 pass somewhere on the lattice: too few to show anything", found)
	}
}

// Every path of a family is leant on its laws: it is not to cost memory with the
// descents.
func TestLeaningAllocatesLittle(t *testing.T) {
	laws := []LawPrior{{Key: "a", LnD: 0.6, E: 15e3}, {Key: "b", LnD: 0.3, E: 10e3}}
	cs := []Curve{on(1, [2]float64{-2e-5}, bowl(20, 3, 0.1, 22, 2)), on(2, [2]float64{3e-5}, bowl(20, -2, 0.1, 22, 2))}
	lean(cs, laws, 60) // the first may grow what is kept
	const most = 200   // those of finding starts: some of a piece of a curve, none of a descent
	if n := testing.AllocsPerRun(10, func() { lean(cs, laws, 60) }); n > most {
		t.Errorf("%g allocations, want at most %d", n, most)
	}
}

func BenchmarkLean(b *testing.B) {
	laws := []LawPrior{{Key: "a", LnD: 0.6, E: 15e3}, {Key: "b", LnD: 0.3, E: 10e3}, {Key: "c", LnD: 0.5}}
	cs := []Curve{
		on(1, [2]float64{-2e-5}, bowl(20, 3, 0.1, 22, 2)), on(1, [2]float64{1e-5}, bowl(20, 2.8, 0.1, 22, 2)),
		on(2, [2]float64{3e-5}, bowl(20, -2, 0.1, 22, 2)), on(3, [2]float64{}, bowl(20, 1, 0.1, 22, 2)),
	}
	b.ReportAllocs()
	for b.Loop() {
		lean(cs, laws, 110)
	}
}
