package paths

import (
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
)

// grownCouple is a crystal whose two elements, with D of the first and of the second
// 100 times less, have a boundary that is so wide in each, from the standard deviations
// of its error function: the closed form of sharp's data.
func grownCouple(t *testing.T, rng *rand.Rand, fast, slow float64, path study.Path) *study.Study {
	t.Helper()
	c := sharp()
	c.reach = fast
	s := c.study(rng, path)
	c.reach = slow
	second := c.study(rng, path).Crystals[0].Elements[0]
	second.Name, second.Law = "Al", study.Law{Law: diffusion.NewLaw(7e-10, 273e3)}
	of := &s.Crystals[0]
	of.Elements = append(of.Elements, second)
	for i := range of.Elements {
		of.Elements[i].Start.Edge = study.Nuisance{Lo: 0, Hi: 12 * um}
	}
	return s
}

// One width for both elements: the joint chi-square along a path that hardly diffuses
// is the least over the width of the closed form's, plateaux fitted for each width.
func TestOneWidthForTheElementsOfACrystal(t *testing.T) {
	const tolerance = 0.05 // chi-square: of interpolation between widths, and of a width found to 1e-3 of its range
	c := sharp()
	c.reach = 1 * um
	still := c.path(t, "cold", 1e6)
	s := grownCouple(t, rand.New(rand.NewPCG(7, 21)), 1.5*um, 1*um, still)
	r := weighed(t, s)
	least, width := math.Inf(1), 0.0
	for w := 0.0; w <= 12*um; w += 0.01 * um {
		sum := 0.0
		for _, e := range s.Crystals[0].Elements {
			sum += plateauxFitted(&e, w/4)
		}
		if sum < least {
			least, width = sum, w
		}
	}
	o := &r.Paths[0].Outcome
	near(t, "joint chi-square", o.Misfit, least, tolerance)
	near(t, "of the crystal", o.Crystals[0].Misfit, least, tolerance)
	if alone := o.Profiles[0].Misfit + o.Profiles[1].Misfit; !(alone < o.Misfit-1) {
		t.Errorf("each with its own width %g, with one %g: want less", alone, o.Misfit)
	}
	if len(o.Profiles) != 2 {
		t.Errorf("%d profiles", len(o.Profiles))
	}
	for _, q := range r.Paths[0].Profiles {
		f := q.Free[len(q.Free)-1]
		if f.Name != "edge width" {
			t.Fatalf("last of %v", q.Free)
		}
		near(t, "edge width", f.Value, width*1e6, 0.05)
	}
}

// plateauxFitted is the least chi-square of an error-function step of the standard
// deviation seen through the spot, over its two plateaux: linear least squares by the
// normal equations.
func plateauxFitted(e *study.Element, deviation float64) float64 {
	line := e.Traverse
	spot := line.Spot.Sigma()
	width := math.Sqrt(2 * (deviation*deviation + spot*spot))
	var aa, ab, bb, ya, yb, yy float64
	for i, r := range line.Position {
		b := (1 + math.Erf((r-boundary)/width)) / 2
		a, y, s := 1-b, line.Value[i], line.Sigma[i]
		aa, ab, bb = aa+a*a/s/s, ab+a*b/s/s, bb+b*b/s/s
		ya, yb, yy = ya+y*a/s/s, yb+y*b/s/s, yy+y*y/s/s
	}
	det := aa*bb - ab*ab
	p, q := (ya*bb-yb*ab)/det, (yb*aa-ya*ab)/det
	return yy - p*ya - q*yb
}
