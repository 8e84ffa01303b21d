package paths

import (
	"fmt"
	"math"
	"testing"

	"bankfire/thermal"
)

// byItself is a study of an element on which its own D depends.
const byItself = `title = "Ti that changes its own D in a quartz (invented)"

[[law]]
name = "by itself"
D0 = "7e-8 m2/s"
E = "273 kJ/mol"
own = { ln_slope = 0.005, at = 100 }

[[path]]
name = "as made"
legs = [ { hold = "750 C", for = "%s" } ]

[[path]]
name = "another"
legs = [ { hold = "750 C", for = "%s" } ]

[[crystal]]
name = "Q1"
mineral = "quartz"
shape = "slab"
%s

[[crystal.element]]
name = "Ti"
law = "by itself"
start = { zones = [%s], edge = "0 um" }
rim = { held = "300 ppm" }
traverse = { file = "ti.csv", position = "distance [um]", zero = "rim", value = "Ti [ppm]", error = "2 ppm", spot = "point" }
`

// The study's values and law once more.
const ownInner, ownOuter, ownSlope, ownAt = 100.0, 300.0, 0.005, 100.0

// kirchhoff is the integral of D's factor over C, in which the flux is linear.
func kirchhoff(c float64) float64 { return math.Exp(ownSlope*(c-ownAt)) / ownSlope }

// explicit solves dC/dt = D d2(kirchhoff)/dx2 by the simplest scheme, inwards from
// a rim that is held, for a jump of the start at a depth: a reference that shares
// nothing with the program. It returns the profile by depth.
func explicit(jump, grown float64) func(x float64) float64 {
	const dx, cells = 0.2 * um, 350
	most := math.Exp(ownSlope * (ownOuter - ownAt))
	steps := math.Ceil(grown * most / (0.4 * dx * dx))
	c, flux := make([]float64, cells), make([]float64, cells+1)
	for i := range c {
		c[i] = ownInner
		if (float64(i)+0.5)*dx < jump {
			c[i] = ownOuter
		}
	}
	for range int(steps) {
		flux[0] = 2 * (kirchhoff(ownOuter) - kirchhoff(c[0])) / dx
		for i := 1; i < cells; i++ {
			flux[i] = (kirchhoff(c[i-1]) - kirchhoff(c[i])) / dx
		}
		for i := range c {
			c[i] += (flux[i] - flux[i+1]) / dx * grown / steps
		}
	}
	return func(x float64) float64 {
		at := math.Min(math.Max(x/dx-0.5, 0), cells-1.001)
		i := int(at)
		return c[i] + (at-float64(i))*(c[i+1]-c[i])
	}
}

// A jump in the crystal spreads further where D is larger; the shift factor says
// how long it took.
func TestOwnComposition(t *testing.T) {
	const (
		grid     = 0.4  // ppm of 200, what both grids leave
		promised = 0.01 // of shift factors
	)
	d := 7e-8 * math.Exp(-273e3/(thermal.GasConstant*(750+thermal.ZeroCelsius)))
	exact := explicit(15*um, d*1000*thermal.Year)
	s := readWith(t, fmt.Sprintf(byItself, "1 kyr", "100 yr",
		`zones = [ { name = "core", width = "85 um" }, { name = "skin", width = "15 um" } ]`, `"100 ppm", "300 ppm"`), exact)
	course, err := Follow(t.Context(), s, &s.Paths[0], nil)
	if err != nil {
		t.Fatal(err)
	}
	e := course.Elements[0]
	for i, r := range e.Centres {
		if x := 100*um - r; x < 60*um {
			near(t, fmt.Sprintf("Ti at %.3g um", x/um), e.Final[i], exact(x), grid)
		}
	}
	r := weighed(t, s)
	for i, want := range []struct {
		verdict Verdict
		shift   float64
	}{{Reproduces, 1}, {TooSharp, 10}} {
		o := r.Paths[i].Outcome
		if o.Verdict != want.verdict {
			t.Errorf("%s: verdict %s, want %s", s.Paths[i].Name, o.Verdict, want.verdict)
		}
		near(t, "shift factor", o.Shift/want.shift, 1, promised)
	}
}

// Between two ends that are held, what does not change any more has a factor of D
// that is linear across the slab.
func TestOwnCompositionAtRest(t *testing.T) {
	const (
		size    = 100 * um
		settled = 1e-4 * (ownOuter - ownInner) // what 200 cells leave
	)
	exact := func(x float64) float64 {
		in, out := math.Exp(ownSlope*(ownInner-ownAt)), math.Exp(ownSlope*(ownOuter-ownAt))
		return ownAt + math.Log(out+(in-out)*x/size)/ownSlope
	}
	s := readWith(t, fmt.Sprintf(byItself, "100 Myr", "1 yr",
		"inner = { rim = { held = \"100 ppm\" } }\nzones = [ { name = \"core\", width = \"100 um\" } ]", `"100 ppm"`), exact)
	course, err := Follow(t.Context(), s, &s.Paths[0], nil)
	if err != nil {
		t.Fatal(err)
	}
	e := course.Elements[0]
	for i, r := range e.Centres {
		near(t, fmt.Sprintf("Ti at %.3g um", r/um), e.Final[i], exact(size-r), settled)
	}
	r := weighed(t, s)
	if first, second := r.Paths[0].Outcome, r.Paths[1].Outcome; first.Verdict != Reproduces || second.Verdict != TooSharp || !math.IsInf(first.Shift95[1], 1) {
		t.Errorf("verdicts %s and %s, shift up to %g", first.Verdict, second.Verdict, first.Shift95[1])
	}
}
