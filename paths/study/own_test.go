package study

import (
	"math"
	"testing"
)

// TestEveryKeyOwn holds what D is made of where it depends on the element itself,
// and how far it ranges over the values that the study states.
func TestEveryKeyOwn(t *testing.T) {
	s := everyKey(t)
	c := &s.Crystals[1]
	for i, want := range []struct{ slope, at, lo, hi float64 }{{3, 0.1, 0.1, 0.2}, {-2, 0, 0.2, 0.1}} {
		e := &c.Elements[7+i]
		p, free, err := c.Problem(e, s.Paths[0].History)
		if err != nil {
			t.Fatal(err)
		}
		if p.Own == nil || free != nil || p.Free != nil {
			t.Fatalf("%s: own %v, free %v", e.Name, p.Own != nil, free)
		}
		near(t, e.Name+" at 0.17", p.Own(0.17), math.Exp(want.slope*(0.17-want.at)))
		if x := p.Own(1e6) + p.Own(0); math.IsInf(x, 0) || math.IsNaN(x) {
			t.Errorf("%s: D is without bounds", e.Name)
		}
		least, most := c.Factors(e)
		near(t, "least factor", least, 0.5*math.Exp(want.slope*(want.lo-want.at)))
		near(t, "largest factor", most, math.Exp(want.slope*(want.hi-want.at)))
	}
	if p, _, err := c.Problem(&c.Elements[1], s.Paths[0].History); err != nil || p.Own != nil {
		t.Errorf("an element by another law depends on itself: %v", err)
	}
}
