package paths

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"bankfire/paths/study"
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

// bentCurve is a soft double bowl whose place and depth a constant moves: by a shift, and
// by terms that are known at knots of their own.
func bentCurve(rng *rand.Rand, of ...study.Deviation) Curve {
	c := rough(rng)
	by := &By{Of: of}
	for i := -10; i <= 10; i++ {
		by.LnM = append(by.LnM, 0.7*float64(i))
	}
	term := func(k, l, p, q int, size float64) {
		t := ByTerm{K: k, L: l, P: p, Q: q}
		phase := 6 * rng.Float64()
		for _, x := range by.LnM {
			t.Value = append(t.Value, size*math.Sin(x+phase))
		}
		t.Slope = make([]float64, len(t.Value))
		parabolaSlopes(t.Slope, by.LnM, t.Value)
		by.Terms = append(by.Terms, t)
	}
	for k := range of {
		by.Shift = append(by.Shift, rng.Float64()-0.5)
		term(k, k, 1, 0, 4)
		term(k, k, 2, 0, 1)
		term(k, k, 3, 0, 0.2)
		for l := range k {
			term(l, k, 1, 1, 1)
			term(l, k, 2, 1, 0.2)
		}
	}
	c.By = by
	return c
}

// No point of a lattice of a law's two deviations and those of one or two constants is
// below what the search finds, and no point that it finds is out of their range.
func TestLeaningOnConstantsFindsTheLowest(t *testing.T) {
	const step, roundOff = 0.25, 1e-9
	a, b := study.Deviation{Of: "a", What: study.HostSlope}, study.Deviation{Of: "b", What: study.PartitionA}
	rng := rand.New(rand.NewPCG(65, 1))
	law := LawPrior{Key: "a", LnD: 0.6}
	for trial := range 40 {
		cs := []Curve{on(1, [2]float64{}, bentCurve(rng, a)), bentCurve(rng, b, a)}
		if trial%2 == 1 {
			cs = append(cs, rough(rng))
		}
		l := newLeaning(cs, []LawPrior{law})
		least := math.Inf(1)
		for _, d := range lattice(-4, 4, step) {
			for _, x := range lattice(-mostDeviation, mostDeviation, step) {
				for _, y := range lattice(-mostDeviation, mostDeviation, step) {
					z := []float64{d, 0, x, y}
					least = math.Min(least, l.misfit(z)+dot(z, z))
				}
			}
		}
		got, z, _ := l.find(0)
		if got > least+roundOff {
			t.Errorf("trial %d: %.9g, on the lattice %.9g", trial, got, least)
		}
		if math.Abs(z[2]) > mostDeviation || math.Abs(z[3]) > mostDeviation {
			t.Errorf("trial %d: deviations %v", trial, z)
		}
	}
}

// The derivatives that the descent goes by are those of the function: central differences
// of it.
func TestPullDerivatives(t *testing.T) {
	const h = 1e-4
	a, b := study.Deviation{Of: "a", What: study.HostSlope}, study.Deviation{Of: "b", What: study.PartitionA}
	rng := rand.New(rand.NewPCG(66, 1))
	law := &LawPrior{Key: "a", LnD: 0.6, E: 15e3}
	for range 20 {
		c := on(1, [2]float64{-2e-5, 3e-10}, bentCurve(rng, a, b))
		var p pull
		p.reset(4)
		z := make([]float64, 4)
		for i := range z {
			z[i] = 2*rng.Float64() - 1
		}
		grad := func(z []float64) []float64 {
			copy(p.z, z)
			p.read(&c, law)
			near(t, "value", p.value, c.leant(z, law), 1e-9)
			return slices.Clone(p.grad)
		}
		at := func(i int, by float64) []float64 {
			moved := slices.Clone(z)
			moved[i] += by
			return moved
		}
		first := grad(z)
		bend := slices.Clone(p.bend)
		for i := range z {
			// third derivatives are some hundred, a knot may lie between
			near(t, "gradient", first[i], (c.leant(at(i, h), law)-c.leant(at(i, -h), law))/(2*h), 1e-3)
			up, down := grad(at(i, h)), grad(at(i, -h))
			for j := range z {
				near(t, "second derivative", bend[4*i+j], (up[j]-down[j])/(2*h), 0.1+0.01*math.Abs(bend[4*i+j]))
			}
		}
	}
}
