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

// edgesOf is boundariesOf of crystals with one width of their edges.
func edgesOf(t *testing.T, s *study.Study) EdgeOrigin {
	t.Helper()
	return boundariesOf(t, s)[0]
}

// Of two elements with D 100 times apart, a planted growth edge is told from diffusion,
// and diffusion from growth, in at least nine of ten simulations; where D is the same,
// or the edges are finer than the spot, the report is silent as often.
func TestGrowthIsToldFromDiffusion(t *testing.T) {
	if underRace {
		t.Skip("many simulations")
	}
	const draws = 20
	for _, test := range []struct {
		name       string
		fast, slow float64 // standard deviation of the boundary in each
		same       bool    // one D for both
		want       Origin
	}{
		{"growth", 1.5 * um, 1.5 * um, false, ByGrowth},
		{"diffusion", 2 * um, 0.2 * um, false, ByDiffusion},
		{"one D", 1.5 * um, 1.5 * um, true, UnknownOrigin},
		{"finer than the spot", 0.05 * um, 0.05 * um, false, UnknownOrigin},
	} {
		t.Run(test.name, func(t *testing.T) {
			told := map[Origin]int{}
			for k := range draws {
				c := sharp()
				s := grownCouple(t, rand.New(rand.NewPCG(7, 100+uint64(k))), test.fast, test.slow, c.path(t, "any", 1))
				if test.same {
					s.Crystals[0].Elements[1].Law = s.Crystals[0].Elements[0].Law
				}
				told[edgesOf(t, s).Prefers]++
			}
			if told[test.want] < draws*9/10 {
				t.Errorf("told %v, want %s in nine of ten", told, test.want)
			}
			t.Logf("%v", told)
		})
	}
}

// What is preferred is better by more than the critical value of one degree, and passes.
func TestWhichOriginIsPreferred(t *testing.T) {
	for _, test := range []struct {
		growth, diffusion float64
		degrees           int
		want              Origin
	}{
		{80, 84, 77, ByGrowth},
		{84, 80, 77, ByDiffusion},
		{80, 83.8, 77, UnknownOrigin}, // 3.84 at 95 %
		{120, 300, 77, UnknownOrigin}, // neither passes: 98.5 does
		{300, 120, 77, UnknownOrigin},
		{0, 10, 0, UnknownOrigin},
		{math.NaN(), 80, 77, UnknownOrigin},
	} {
		if got := origin(test.growth, test.diffusion, test.degrees, 0.95); got != test.want {
			t.Errorf("%g against %g of %d: %s, want %s", test.growth, test.diffusion, test.degrees, got, test.want)
		}
	}
}
