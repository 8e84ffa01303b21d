package paths

import (
	"fmt"
	"math"
	"testing"

	"bankfire/thermal"
)

// oblique is a study of a rim that is held, between two axes of which one is
// faster, by laws that the study has with errors.
const oblique = `title = "Ti oblique to the axes of a quartz (invented)"

[[law]]
name = "along"
D0 = "7e-8 m2/s"
E = "273 kJ/mol"
sigma = 0.2

[[law]]
name = "across"
D0 = "2e-9 m2/s"
E = "250 kJ/mol"
sigma = 0.3

[[path]]
name = "as made"
legs = [ { hold = "750 C", for = "1 kyr" } ]

[[crystal]]
name = "Q1"
mineral = "quartz"
shape = "slab"
zones = [ { name = "core", width = "100 um" } ]

[[crystal.element]]
name = "Ti"
law = { a = "across", b = "across", c = "along", normal = ["60 deg", "90 deg", "30 deg"] }
start = { zones = ["90 ppm"] }
rim = { held = "60 ppm" }
traverse = { file = "ti.csv", position = "distance [um]", zero = "rim", value = "Ti [ppm]", error = "1 ppm", spot = "point" }
`

// Near its rim the crystal is a half space (Crank 1975, The mathematics of
// diffusion, equation 2.45), with D = 3/4 of that along c and 1/4 of that across.
func TestDirection(t *testing.T) {
	const (
		start, held = 90.0, 60.0
		grid        = 0.02 // ppm of 30, what 200 cells leave
		promised    = 0.01 // of shift factors
	)
	rt := thermal.GasConstant * (750 + thermal.ZeroCelsius)
	d := 0.75*7e-8*math.Exp(-273e3/rt) + 0.25*2e-9*math.Exp(-250e3/rt)
	reach := 2 * math.Sqrt(d*1000*thermal.Year)
	exact := func(x float64) float64 { return held + (start-held)*math.Erf(x/reach) }
	s := readWith(t, oblique, exact)
	course, err := Follow(t.Context(), s, &s.Paths[0], nil)
	if err != nil {
		t.Fatal(err)
	}
	e := course.Elements[0]
	for i, r := range e.Centres {
		near(t, fmt.Sprintf("Ti at %.3g um", r/um), e.Final[i], exact(100*um-r), grid)
	}
	r := weighed(t, s)
	if o := r.Paths[0].Outcome; o.Verdict != Reproduces {
		t.Errorf("verdict %s", o.Verdict)
	} else {
		near(t, "shift factor", o.Shift, 1, promised)
	}
	if len(r.Laws) != 1 || r.Laws[0].Key != "across + along" || r.Laws[0].LnD != 0.3*math.Ln10 {
		t.Errorf("laws %+v, want one as well known as the less known", r.Laws)
	}
}
