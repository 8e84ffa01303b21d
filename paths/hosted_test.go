package paths

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// plagioclase is a study of Sr across a jump of the host from An55 to An35.
const plagioclase = `title = "Sr in a zoned plagioclase (invented)"

[[path]]
name = "as made"
legs = [ { hold = "750 C", for = "%s" } ]

[[path]]
name = "a tenth"
legs = [ { hold = "750 C", for = "%s" } ]

[[crystal]]
name = "P1"
mineral = "plagioclase"
shape = "slab"
zones = [ { name = "core", width = "100 um", host = 0.55 }, { name = "skin", width = "100 um", host = 0.35 } ]

[[crystal.element]]
name = "Sr"
law = "plagioclase-sr-giletti1994"
partition = "sr-blundy1991"
start = { zones = ["500 ppm", "700 ppm"], edge = "0 um" }
rim = %s
traverse = { file = "sr.csv", position = "distance [um]", zero = "centre", value = "Sr [ppm]", error = "2 %%", spot = "point" }
`

// The study's host, temperature and start once more.
const (
	xCore, xSkin     = 0.55, 0.35
	srCore, srSkin   = 500.0, 700.0
	storedAt         = 750 + thermal.ZeroCelsius
	coreSr           = 100 * um
	ofBlundyWood1991 = -26.8e3 // A, J/mol
)

// srRatio is K in the core over K in the skin, exp(A (XAn - XAn')/(R T)).
func srRatio() float64 {
	return math.Exp(ofBlundyWood1991 * (xCore - xSkin) / (thermal.GasConstant * storedAt))
}

// srD is the law of Giletti & Casserly 1994, typed here once more.
func srD(x float64) float64 {
	return math.Pow(10, -4.08-4.1*x) * math.Exp(-276e3/(thermal.GasConstant*storedAt))
}

// srCouple is the profile of two half spaces that have been in contact for a time,
// with D and start of their own and a fixed ratio of their values where they meet
// (Crank 1975, The mathematics of diffusion, section 3.4.1):
//
//	C = Ci + (C0 - Ci) erf(|x| / (2 sqrt(D t))) on either side.
func srCouple(r, time float64) float64 { return srCoupleBy(srRatio(), r, time) }

func srCoupleBy(ratio, r, time float64) float64 {
	rootCore, rootSkin := math.Sqrt(srD(xCore)), math.Sqrt(srD(xSkin))
	skin := (srCore*rootCore + srSkin*rootSkin) / (ratio*rootCore + rootSkin)
	x := r - coreSr
	if x < 0 {
		core := ratio * skin
		return core + (srCore-core)*math.Erf(-x/(2*rootCore*math.Sqrt(time)))
	}
	return skin + (srSkin-skin)*math.Erf(x/(2*rootSkin*math.Sqrt(time)))
}

// readPlagioclase writes the study with what was measured, and reads it.
func readPlagioclase(t *testing.T, life, tenth, rim string, measured func(r float64) float64) *study.Study {
	t.Helper()
	var data strings.Builder
	data.WriteString("distance [um],Sr [ppm]\n")
	for um2 := 60.5; um2 < 140; um2++ {
		fmt.Fprintf(&data, "%g,%.9g\n", um2, measured(um2*um))
	}
	return readStudy(t, fmt.Sprintf(plagioclase, life, tenth, rim), "sr.csv", data.String())
}

// After a few decades, the profile is that of two half spaces, Sr having gone
// uphill where they meet, and the shift factor says how long it took.
func TestHostedCouple(t *testing.T) {
	const (
		promised  = 0.01 // of shift factors
		grid      = 2e-4 // of the range, what 200 cells leave
		ageInYear = 60
	)
	age := ageInYear * thermal.Year
	s := readPlagioclase(t, "60 yr", "6 yr", `{ held = "skin" }`, func(r float64) float64 { return srCouple(r, age) })
	course, err := Follow(t.Context(), s, &s.Paths[0], nil)
	if err != nil {
		t.Fatal(err)
	}
	e := course.Elements[0]
	lowest, highest := math.Inf(1), math.Inf(-1)
	for i, r := range e.Centres {
		near(t, fmt.Sprintf("Sr at %.3g um", r/um), e.Final[i], srCouple(r, age), grid*srSkin)
		lowest, highest = math.Min(lowest, e.Final[i]), math.Max(highest, e.Final[i])
	}
	if !(lowest < srCore-10 && highest > srSkin+10) {
		t.Errorf("Sr is from %g to %g ppm: it should have gone beyond where it began", lowest, highest)
	}
	if e.GEnough {
		t.Error("a coupled profile knows more of the path than G")
	}
	near(t, "ln G, at the law's own host", e.LnG, math.Log(srD(0)*age), 1e-9)
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
	notes := strings.Join(r.Paths[0].Profiles[0].Notes, "\n")
	if want := "partition sr-blundy1991: constants not checked against the paper"; !strings.Contains(notes, want) {
		t.Errorf("notes %q lack %q", notes, want)
	}
}

// After a hold without end, Sr is proportional to exp(A XAn/(R T)): as much of it
// as there was, or what the rim has. This is the exact steady state.
func TestHostedEquilibrium(t *testing.T) {
	const settled = 1e-6 // of the value
	for _, test := range []struct {
		name, rim string
		skin      float64
	}{
		{"sealed", `"sealed"`, (srCore + srSkin) / (srRatio() + 1)}, // zones of one width
		{"held", `{ held = "650 ppm" }`, 650},
	} {
		t.Run(test.name, func(t *testing.T) {
			rested := func(r float64) float64 {
				if r < coreSr {
					return test.skin * srRatio()
				}
				return test.skin
			}
			s := readPlagioclase(t, "100 Myr", "6 yr", test.rim, rested)
			course, err := Follow(t.Context(), s, &s.Paths[0], nil)
			if err != nil {
				t.Fatal(err)
			}
			e := course.Elements[0]
			for i, r := range e.Centres {
				near(t, fmt.Sprintf("Sr at %.3g um", r/um), e.Final[i], rested(r), settled*rested(r))
			}
			r := weighed(t, s)
			if first, second := r.Paths[0].Outcome, r.Paths[1].Outcome; first.Verdict != Reproduces || second.Verdict != TooSharp {
				t.Errorf("verdicts %s and %s", first.Verdict, second.Verdict)
			} else if !math.IsInf(first.Shift95[1], 1) {
				t.Errorf("equilibrium leaves the shift factor open upwards, got %g", first.Shift95)
			}
		})
	}
}
