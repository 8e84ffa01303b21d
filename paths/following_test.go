package paths

import (
	"fmt"
	"math"
	"slices"
	"testing"

	"bankfire/thermal"
)

// followed is a study of a rim in equilibrium with a melt that cools in one step.
const followed = `title = "Ti at a rim that follows a melt (invented)"

[[partition]]
name = "kx"
A = "-100 kJ/mol"
B = "10 kJ/mol"

[conditions]
pressure = "2 kbar"
aTiO2 = 0.5

[[path]]
name = "as made"
legs = [ { hold = "800 C", for = "500 yr" }, { hold = "750 C", for = "800 yr" } ]

[[crystal]]
name = "P1"
mineral = "plagioclase"
shape = "slab"
zones = [ { name = "core", width = "100 um", host = 0.4 } ]

[[crystal.element]]
name = "Ti"
law = { D0 = "7e-8 m2/s", E = "273 kJ/mol" }
start = { zones = [%s] }
rim = %s
traverse = { file = "ti.csv", position = "distance [um]", zero = "rim", value = "Ti [ppm]", error = "1 ppm", spot = "point" }
`

// Near its rim the crystal is a half space whose surface steps twice, each step
// spreading by the diffusion done since (Crank 1975, The mathematics of
// diffusion, equation 2.45, and superposition).
func TestFollowing(t *testing.T) {
	const (
		start    = 90.0
		grid     = 0.02 // ppm of 30, what 200 cells leave, and in proportion
		promised = 0.01 // of shift factors and free values
	)
	rt := func(c float64) float64 { return thermal.GasConstant * (c + thermal.ZeroCelsius) }
	d := func(c float64) float64 { return 7e-8 * math.Exp(-273e3/rt(c)) * thermal.Year }
	late := 800 * d(750)
	all := 500*d(800) + late
	kx := func(c float64) float64 { return math.Exp((-100e3*0.4 + 10e3) / rt(c)) }
	melt := func(c float64) float64 { return 1000 + 10*(c-700) } // as in melt.csv
	huang := func(c float64) float64 {                           // Huang and Audetat (2012) at 2 kbar, times the activity
		return 0.5 * math.Pow(10, 5.6459-(2794.3+660.53*math.Pow(2, 0.35))/(c+thermal.ZeroCelsius))
	}
	const table = `temperature = "T [C]", value = "Ti [ppm]" }`
	for _, test := range []struct {
		core, rim string
		value     func(c float64) float64
	}{
		{`"90 ppm"`, `{ following = "kx", melt = "2000 ppm" }`, func(c float64) float64 { return 2000 * kx(c) }},
		{`"free"`, `{ following = "kx", melt = "2000 ppm" }`, func(c float64) float64 { return 2000 * kx(c) }},
		{`"90 ppm"`, `{ following = "kx", melt = "melt.csv", ` + table, func(c float64) float64 { return melt(c) * kx(c) }},
		{`"free"`, `{ following = "ti-quartz-huang2012" }`, huang},
		{`"90 ppm"`, `{ given = "melt.csv", ` + table, melt},
	} {
		t.Run(test.core+" in "+test.rim, func(t *testing.T) {
			rim := test.value
			exact := func(x float64) float64 {
				return start + (rim(800)-start)*math.Erfc(x/(2*math.Sqrt(all))) + (rim(750)-rim(800))*math.Erfc(x/(2*math.Sqrt(late)))
			}
			grid := grid * math.Max(1, math.Abs(rim(800)-start)/30)
			s := readWith(t, fmt.Sprintf(followed, test.core, test.rim), exact, "melt.csv", "T [C],Ti [ppm]\n700,1000\n800,2000\n")
			course, err := Follow(t.Context(), s, &s.Paths[0], nil)
			if err != nil {
				t.Fatal(err)
			}
			e := course.Elements[0]
			for i, r := range e.Centres {
				near(t, fmt.Sprintf("Ti at %.3g um", r/um), e.Final[i], exact(100*um-r), grid)
			}
			if e.GEnough {
				t.Error("the profile knows more of the path than G")
			}
			r := weighed(t, s)
			if o := r.Paths[0].Outcome; o.Verdict != Reproduces {
				t.Errorf("verdict %s", o.Verdict)
			} else {
				near(t, "shift factor", o.Shift, 1, promised)
			}
			for _, f := range r.Paths[0].Profiles[0].Free {
				near(t, f.Name, f.Value, start, promised*start)
			}
		})
	}
	t.Run("says what it rests on", func(t *testing.T) {
		s := readPlagioclase(t, "60 yr", "6 yr", `{ following = "sr-bindeman1998", melt = "90 ppm" }`, func(float64) float64 { return 600 })
		want := []string{"partition sr-bindeman1998: constants not checked against the paper", "partition sr-blundy1991: constants not checked against the paper"}
		notes := weighed(t, s).Paths[0].Profiles[0].Notes
		for _, w := range want {
			if !slices.Contains(notes, w) {
				t.Errorf("notes %q lack %q", notes, w)
			}
		}
	})
}
