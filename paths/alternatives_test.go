package paths

import (
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/paths/study"
)

// ofMelt is a start with both plateaux stated.
func ofMelt(name string, core, mantle float64) study.Start {
	return study.Start{Name: name, Zones: []study.Plateau{{Value: core}, {Value: mantle}}}
}

// Of three starts the true one is taken along the path as it was, and the others
// stand as far above it as they do when they are weighed alone; a start with free
// plateaux, which fits as well with fewer degrees left, does not change a verdict.
func TestTheTrueStartIsTaken(t *testing.T) {
	c := sharp()
	starts := []study.Start{ofMelt("melt B", c.core+6, c.mantle), ofMelt("melt A", c.core, c.mantle), ofMelt("melt C", c.core, c.mantle+6)}
	weigh := func(list ...study.Start) *Result {
		s := c.study(rand.New(rand.NewPCG(7, 11)), c.path(t, "as it was", 1), c.path(t, "too long", 0.1))
		e := &s.Crystals[0].Elements[0]
		if e.Start = list[0]; len(list) > 1 {
			e.Alternatives = list
		}
		return weighed(t, s)
	}
	r := weigh(starts...)
	for i, want := range []Verdict{Reproduces, TooSmooth} {
		o, tried := &r.Paths[i].Outcome, r.Paths[i].Starts[0]
		if o.Verdict != want || len(tried) != 3 || !tried[1].Taken || tried[0].Taken || tried[2].Taken {
			t.Fatalf("path %d: %s, tried %+v, want %s with melt A taken", i, o.Verdict, tried, want)
		}
		if tried[1].Starts[0].Name != "melt A" || r.Paths[i].Profiles[0].Element.Start.Name != "melt A" {
			t.Errorf("path %d: taken is %q, shown %q", i, tried[1].Starts[0].Name, r.Paths[i].Profiles[0].Element.Start.Name)
		}
		for k, s := range starts {
			alone := &weigh(s).Paths[i].Outcome
			if tried[k].Misfit != alone.Misfit || tried[k].Verdict != alone.Verdict || tried[k].Degrees != alone.Degrees {
				t.Errorf("path %d, %s: %s with %g of %d, alone %s with %g of %d", i, s.Name, tried[k].Verdict, tried[k].Misfit,
					tried[k].Degrees, alone.Verdict, alone.Misfit, alone.Degrees)
			}
			if tried[k].AboveOne != tried[k].Misfit-o.Misfit {
				t.Errorf("path %d, %s: %g above the one taken, want %g", i, s.Name, tried[k].AboveOne, tried[k].Misfit-o.Misfit)
			}
		}
	}
	if tried := r.Paths[0].Starts[0]; tried[0].Verdict != WrongShape || tried[2].Verdict != WrongShape {
		t.Errorf("12 sigma off in a plateau: %s and %s, want wrong shape", tried[0].Verdict, tried[2].Verdict)
	}
}

// Two elements of one crystal: starts of one name go together, others are tried in
// every combination.
func TestStartsOfOneNameGoTogether(t *testing.T) {
	c := sharp()
	for _, test := range []struct {
		name   string
		names  [2]string
		tried  int
		passes bool // the true start of the one goes with the true one of the other
	}{
		{"tied the wrong way", [2]string{"melt A", "melt B"}, 2, false},
		{"tied the right way", [2]string{"melt B", "melt A"}, 2, true},
		{"free", [2]string{"", ""}, 4, true},
	} {
		t.Run(test.name, func(t *testing.T) {
			s := c.study(rand.New(rand.NewPCG(7, 12)), c.path(t, "as it was", 1))
			of := &s.Crystals[0]
			second := of.Elements[0]
			second.Name = "Ge"
			of.Elements[0].Alternatives = []study.Start{ofMelt("melt A", c.core, c.mantle), ofMelt("melt B", c.core+6, c.mantle)}
			second.Alternatives = []study.Start{ofMelt(test.names[0], c.core+6, c.mantle), ofMelt(test.names[1], c.core, c.mantle)}
			if test.names[0] == "" {
				of.Elements[0].Alternatives[0].Name, of.Elements[0].Alternatives[1].Name = "", ""
			}
			for _, e := range []*study.Element{&of.Elements[0], &second} {
				e.Start = e.Alternatives[0]
			}
			of.Elements = append(of.Elements, second)
			r := weighed(t, s)
			if got := len(r.Paths[0].Starts[0]); got != test.tried {
				t.Errorf("%d combinations, want %d", got, test.tried)
			}
			if passes := r.Paths[0].Outcome.Verdict == Reproduces; passes != test.passes {
				t.Errorf("verdict %s", r.Paths[0].Outcome.Verdict)
			}
		})
	}
}

// The better verdict is taken, also where a worse one has the larger tail; then the
// tail; then chi-square.
func TestWhichStartIsBetter(t *testing.T) {
	order := []Tried{
		{Verdict: Unjudged, Tail: math.NaN()},
		{Verdict: WrongShape, Misfit: 900, Degrees: 10},
		{Verdict: WrongShape, Misfit: 800, Degrees: 10},
		{Verdict: WrongShape, Tail: 1e-3, Misfit: 30, Degrees: 10},
		{Verdict: AtOdds, Tail: 1e-9, Misfit: 60, Degrees: 10},
		{Verdict: TooSharp, Tail: 1e-30, Misfit: 200, Degrees: 10},
		{Verdict: TooSmooth, Tail: 1e-10, Misfit: 70, Degrees: 10},
		{Verdict: Reproduces, Tail: 0.06, Misfit: 18, Degrees: 10},
	}
	for i := range order {
		for j := range order {
			if got := order[i].compare(&order[j]); (got > 0) != (i > j) || (got < 0) != (i < j) {
				t.Errorf("%d against %d: %d", i, j, got)
			}
		}
	}
}
