package paths

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// grownInMelt is a study of a plagioclase that grew from one melt while its host changed
// all the way, and was kept at the temperature at which it grew.
const grownInMelt = `title = "Sr in a plagioclase that grew in equilibrium (invented)"

[[path]]
name = "kept"
legs = [ { hold = "750 C", for = "1 kyr" } ]

[[crystal]]
name = "P2"
mineral = "plagioclase"
shape = "%s"
zones = [ { name = "core", width = "100 um" }, { name = "skin", width = "100 um" } ]
host = { file = "an.csv", position = "r [um]", zero = "centre", value = "XAn [mole fraction]", smooth = "spline", width = "40 um" }

[[crystal.element]]
name = "Sr"
law = "plagioclase-sr-giletti1994"
partition = "sr-blundy1991"
start = { melt = ["100 +- 40 ppm", "100 +- 40 ppm"], temperature = ["750 C", "750 C"], edge = "%s" }
rim = %s
traverse = { file = "sr.csv", position = "r [um]", zero = "centre", value = "Sr [ppm]", error = "1 %%", spot = "point" }
`

// What is in equilibrium with its host everywhere stays as it is: C = K(X(r)) m, with
// Blundy and Wood (1991), R T ln K = -26.8 X + 26.7 kJ/mol. Where the data have a
// tenth more, each zone and the rim that is tied to one has a tenth more.
func TestGrownInEquilibrium(t *testing.T) {
	const (
		cell = 3e-4 // of the value, by which the mean of a cell may differ from the value in its middle
		rest = 3e-5 // of the value: what the fit of each plateau leaves, whose lens is of third order in the cells: (2 um/50 um)^3, less than half of it
		more = 1.1
		fits = 0.01 // of the value: priors of 40 % pull by less
	)
	var an strings.Builder
	an.WriteString("r [um],XAn [mole fraction]\n")
	for r := 0.0; r <= 200; r += 5 {
		fmt.Fprintf(&an, "%g,%.6f\n", r, 0.5+0.15*math.Cos(r/50))
	}
	rt := thermal.GasConstant * (750 + thermal.ZeroCelsius)
	for _, test := range []struct{ shape, edge, rim string }{
		{"slab", "0 um", `{ held = "skin" }`},
		{"ball", "0 um", `{ following = "sr-blundy1991", melt = "100 ppm" }`},
		{"slab", "8 um", `"sealed"`},
	} {
		t.Run(test.shape+" "+test.edge+" "+test.rim, func(t *testing.T) {
			read := func(times float64, host func(r float64) float64) *study.Study {
				var sr strings.Builder
				sr.WriteString("r [um],Sr [ppm]\n")
				for r := 2.0; r < 200; r += 2 {
					fmt.Fprintf(&sr, "%g,%.9g\n", r, times*100*math.Exp((26.7e3-26.8e3*host(r*um))/rt))
				}
				return readStudy(t, fmt.Sprintf(grownInMelt, test.shape, test.edge, test.rim), "an.csv", an.String(), "sr.csv", sr.String())
			}
			host := read(1, func(float64) float64 { return 0.5 }).Crystals[0].HostAt // smoothed as the study has it
			s := read(1, host)
			course, err := Follow(t.Context(), s, &s.Paths[0], nil)
			if err != nil {
				t.Fatal(err)
			}
			e := course.Elements[0]
			for i, r := range e.Centres {
				want := 100 * math.Exp((26.7e3-26.8e3*host(r))/rt)
				near(t, fmt.Sprintf("Sr at %.3g um", r/um), e.Start[i], want, cell*want)
				near(t, fmt.Sprintf("what became of it at %.3g um", r/um), e.Final[i], e.Start[i], rest*want)
			}
			if strings.Contains(test.rim, "following") {
				return // its melt is known
			}
			r := weighed(t, read(more, host))
			if o := r.Paths[0].Outcome; o.Verdict != Reproduces {
				t.Errorf("verdict %s, chi-square %g", o.Verdict, o.Misfit)
			}
			for i, f := range r.Paths[0].Profiles[0].Free {
				near(t, f.Name, f.Value/e.Element.Start.Zones[i].Value, more, fits)
			}
		})
	}
}
