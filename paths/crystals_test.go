package paths

import (
	"cmp"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
)

// inCrystals is one study of the crystals of several, along the paths of the
// first.
func inCrystals(of ...*study.Study) *study.Study {
	out := *of[0]
	out.Crystals = nil
	for i, s := range of {
		c := s.Crystals[0]
		c.Name = fmt.Sprintf("Q%d", i+1)
		out.Crystals = append(out.Crystals, c)
	}
	return &out
}

// Each crystal is judged by its own curves alone, whatever stands between them.
func TestJudgeOfCrystals(t *testing.T) {
	of := func(crystal int, c Curve) Curve {
		c.Crystal = crystal
		return c
	}
	cs := []Curve{
		of(7, bowl(20, 0, 0.1, 22, 2)), of(2, bowl(20, -1, 0.1, 22, 2)), of(7, bowl(30, 0.2, 0.1, 31, 1)), of(2, bowl(30, 1, 0.1, 31, 1)),
	}
	var o Outcome
	Judge(&o, cs, nil, 0.95)
	if len(o.Crystals) != 2 || len(o.Profiles) != 4 {
		t.Fatalf("%d crystals, %d profiles", len(o.Crystals), len(o.Profiles))
	}
	for i, want := range []Finding{
		{Verdict: Reproduces, Shift: math.Exp(0.1), Misfit: 20 + 30 + 4, Points: 53, Degrees: 50},
		{Verdict: AtOdds, Shift: 1, Misfit: 20 + 30 + 100 + 100, Points: 53, Degrees: 50},
	} {
		got := o.Crystals[i]
		if got.Verdict != want.Verdict || got.Points != want.Points || got.Degrees != want.Degrees {
			t.Errorf("crystal %d: got %+v, want %+v", i, got, want)
		}
		near(t, "shift factor", got.Shift, want.Shift, 1e-9)
		near(t, "misfit", got.Misfit, want.Misfit, 1e-9)
	}
	var alone Outcome
	for i, curves := range [][]Curve{{cs[0], cs[2]}, {cs[1], cs[3]}} {
		Judge(&alone, curves, nil, 0.95)
		if alone.Finding != o.Crystals[i] || alone.Crystals[0] != alone.Finding {
			t.Errorf("crystal %d by itself: %+v, among others %+v", i, alone.Finding, o.Crystals[i])
		}
	}
}

// threeOfTwo is three crystals of two elements each, all different.
func threeOfTwo(t *testing.T) *study.Study {
	var of []*study.Study
	for i := range 3 {
		p := sharp()
		p.points, p.mantle, p.sigma = 15, p.mantle+10*float64(i), 0.5+0.2*float64(i)
		s := p.study(rand.New(rand.NewPCG(9, uint64(i))), p.path(t, "as it was", 1), p.path(t, "longer", 0.8))
		second := s.Crystals[0].Elements[0]
		second.Name, second.Law.Law = "Al", diffusion.NewLaw(8e-8+1e-8*float64(i), 273e3)
		s.Crystals[0].Elements = append(s.Crystals[0].Elements, second)
		of = append(of, s)
	}
	return inCrystals(of...)
}

// The order of crystals and of their elements, and what zones are called, change
// no bit.
func TestWeighOfPermutedCrystals(t *testing.T) {
	want := weighed(t, threeOfTwo(t))
	permuted := threeOfTwo(t)
	slices.Reverse(permuted.Crystals)
	permuted.Crystals[0], permuted.Crystals[1] = permuted.Crystals[1], permuted.Crystals[0]
	for i := range permuted.Crystals {
		c := &permuted.Crystals[i]
		c.Zones = slices.Clone(c.Zones)
		c.Zones[0].Name, c.Zones[1].Name = "mantle", "a core"
		slices.Reverse(c.Elements)
	}
	got := weighed(t, permuted)
	for i := range want.Paths {
		w, g := &want.Paths[i].Outcome, &got.Paths[i].Outcome
		if w.Finding != g.Finding {
			t.Errorf("path %d jointly: %+v, permuted %+v", i, w.Finding, g.Finding)
		}
		for k, c := range want.Crystals {
			l := slices.IndexFunc(got.Crystals, func(d *study.Crystal) bool { return c.Name == d.Name })
			if w.Crystals[k] != g.Crystals[l] {
				t.Errorf("path %d, %s: %+v, permuted %+v", i, c.Name, w.Crystals[k], g.Crystals[l])
			}
		}
		for n := range w.Profiles {
			p := &want.Paths[i].Profiles[n]
			m := slices.IndexFunc(got.Paths[i].Profiles, func(q ProfileResult) bool {
				return p.Crystal.Name == q.Crystal.Name && p.Element.Name == q.Element.Name
			})
			if w.Profiles[n] != g.Profiles[m] {
				t.Errorf("path %d, %s in %s: %+v, permuted %+v", i, p.Element.Name, p.Crystal.Name, w.Profiles[n], g.Profiles[m])
			}
		}
	}
}

// With the laws taken as they are, n copies of a crystal have n times its
// chi-square, at every path, and the interval of its shift factor is narrower by
// the root of n.
func TestCopiesOfACrystal(t *testing.T) {
	const roundOff = 1e-13
	p := sharp()
	one := p.study(rand.New(rand.NewPCG(9, 9)), p.path(t, "as it was", 1), p.path(t, "longer", 0.9))
	want := weighed(t, one)
	for _, n := range []int{2, 3, 5} {
		copies := make([]*study.Study, n)
		for i := range copies {
			copies[i] = one
		}
		got := weighed(t, inCrystals(copies...))
		for i := range want.Paths {
			w, g := &want.Paths[i].Outcome, &got.Paths[i].Outcome
			near(t, fmt.Sprintf("%d copies, path %d: chi-square", n, i), g.Misfit/w.Misfit/float64(n), 1, roundOff)
			if g.Degrees != n*w.Degrees || g.Points != n*w.Points || len(g.Crystals) != n {
				t.Errorf("%d copies: %d degrees of %d points, %d crystals", n, g.Degrees, g.Points, len(g.Crystals))
			}
			for _, c := range g.Crystals {
				if cmp.Compare(c.Misfit, w.Misfit) != 0 || c.Verdict != w.Verdict {
					t.Errorf("%d copies: one of them %+v, by itself %+v", n, c, w.Finding)
				}
			}
			width := func(f Finding) float64 { return math.Log(f.Shift68[1] / f.Shift68[0]) }
			// the joint curve is sharpened elsewhere than that of one, and is not quite a parabola
			near(t, fmt.Sprintf("%d copies: width", n), width(g.Finding)*math.Sqrt(float64(n))/width(w.Finding), 1, 0.01)
		}
	}
}
