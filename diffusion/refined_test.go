package diffusion

import (
	"math"
	"strings"
	"testing"
)

// A plan refined once has twice the cells and twice the steps; one refined minus twice a
// quarter of each.
func TestRefined(t *testing.T) {
	p := &Problem{Zones: []Zone{{Outer: 1e-4, Start: 1}, {Outer: 2e-4}}, Law: NewLaw(1e-20, 0)}
	usual, finer := newPlan(t, p, Options{}), newPlan(t, p, Options{Refined: 1})
	named := newPlan(t, p, Options{Cells: 2 * defaultCells, Growth: defaultGrowth / 2})
	if got, want := len(finer.Centres()), len(named.Centres()); got != want || got < 2*len(usual.Centres())-minSegment {
		t.Errorf("%d cells, want %d", got, want)
	}
	if got, want := len(finer.steps), len(named.steps); got != want {
		t.Errorf("%d steps, want %d", got, want)
	}
	coarse, named := newPlan(t, p, Options{Refined: -2}), newPlan(t, p, Options{Cells: defaultCells / 4, Growth: 4 * defaultGrowth})
	if a, b := len(coarse.Centres()), len(named.Centres()); a != b || len(coarse.steps) != len(named.steps) || len(coarse.steps) > len(usual.steps)/2 {
		t.Errorf("%d cells and %d steps, want %d and %d", a, len(coarse.steps), b, len(named.steps))
	}
}

// A factor on D that is none at a stated value is refused.
func TestOwnIsChecked(t *testing.T) {
	for _, own := range []func(float64) float64{
		func(float64) float64 { return math.NaN() },
		func(float64) float64 { return -1 },
		func(c float64) float64 { return math.Exp(1e3 * c) },
	} {
		p := &Problem{Zones: []Zone{{Outer: 1e-4, Start: 1}}, Law: NewLaw(1e-20, 0), Own: own}
		if _, err := Compile(p, Options{}); err == nil || !strings.Contains(err.Error(), "D is multiplied by") {
			t.Errorf("got %v", err)
		}
	}
}
