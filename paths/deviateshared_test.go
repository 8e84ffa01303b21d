package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// uniform is a crystal of one composition with an edge half way, whose element is under
// a law of its own.
const uniform = `
[[crystal]]
name = "%[1]s"
mineral = "plagioclase"
shape = "slab"
zones = [ { name = "core", width = "100 um", host = %[2]g }, { name = "skin", width = "100 um", host = %[2]g } ]

[[crystal.element]]
name = "Sr"
law = "%[3]s"
start = { zones = ["500 ppm", "700 ppm"], edge = "0 um" }
rim = { held = "skin" }
traverse = { file = "%[1]s.csv", position = "distance [um]", zero = "centre", value = "Sr [ppm]", error = "2 ppm", spot = "point" }
`

// slopeLaws are a law whose slope is known with an error, one that has it from there,
// and one that has as large an error by itself.
const slopeLaws = `
[[law]]
name = "sr"
D0 = "8.317637711e-5 m2/s"
E = "276 kJ/mol"
host = { ln_slope = "-9.440599 +- 1", at = 0 }

[[law]]
name = "shared"
D0 = "8.317637711e-5 m2/s"
E = "276 kJ/mol"
host = { slope_of = "sr", at = 0 }

[[law]]
name = "alone"
D0 = "8.317637711e-5 m2/s"
E = "276 kJ/mol"
host = { ln_slope = "-9.440599 +- 1", at = 0 }

[[path]]
name = "as made"
legs = [ { hold = "750 C", for = "20 yr" } ]
`

// coupleIn is the profile of two half spaces in one host (Crank 1975, equation 2.14),
//
//	C = (C1 + C2)/2 + (C2 - C1)/2 erf(x/(2 sqrt(D t))),
//
// at r for ln D off by so much.
func coupleIn(r, host, lnD float64) float64 {
	root := math.Sqrt(srD(host) * math.Exp(lnD) * coupleAge)
	return (srCore+srSkin)/2 + (srSkin-srCore)/2*math.Erf((r-coreSr)/(2*root))
}

// coupleAt writes a couple with noise every micrometre, and returns its chi-square
// against ln D.
func coupleAt(host, lnD float64, seed uint64) (csv string, points int, chiSq func(lnD float64) float64) {
	rng := rand.New(rand.NewPCG(78, seed))
	var at, value []float64
	var data strings.Builder
	data.WriteString("distance [um],Sr [ppm]\n")
	for um2 := 80.5; um2 < 120; um2++ {
		v := coupleIn(um2*um, host, lnD) + srError*rng.NormFloat64()
		at, value = append(at, um2*um), append(value, v)
		fmt.Fprintf(&data, "%g,%.9g\n", um2, v)
	}
	return data.String(), len(at), func(lnD float64) float64 {
		sum := 0.0
		for i, r := range at {
			sum += square((value[i] - coupleIn(r, host, lnD)) / srError)
		}
		return sum
	}
}

// twoHosts is a study of two crystals, An60 and An30, each of whose profiles was made
// with the slope off by 0.6, under the laws named.
func twoHosts(t *testing.T, first, second string) (s *study.Study, points int, chiSq [2]func(lnD float64) float64) {
	t.Helper()
	const off = 0.6
	one, n, a := coupleAt(0.6, off*0.6, 1)
	other, m, b := coupleAt(0.3, off*0.3, 2)
	s = readStudy(t, slopeLaws+fmt.Sprintf(uniform, "A", 0.6, first)+fmt.Sprintf(uniform, "B", 0.3, second), "A.csv", one, "B.csv", other)
	return s, n + m, [2]func(float64) float64{a, b}
}

// A slope that one law has from another is off once for both, at the price of one: the
// same as were both laws one. Slopes of their own are off each at its own price.
func TestOneSlopeIsOffOnce(t *testing.T) {
	for _, test := range []struct {
		first, second string
		once          bool
	}{{"sr", "shared", true}, {"shared", "sr", true}, {"sr", "sr", true}, {"sr", "alone", false}} {
		t.Run(test.first+" and "+test.second, func(t *testing.T) {
			s, points, chiSq := twoHosts(t, test.first, test.second)
			o := &weighed(t, s).Paths[0].Outcome
			o.wantDeviations(t, func(x, y float64) float64 {
				if test.once {
					y = x
				}
				return chiSq[0](0.6*x) + chiSq[1](0.3*y)
			}, points, true, !test.once)
			if n := len(o.WithLaws.Others); (n == 1) != test.once {
				t.Errorf("leans on %v", o.WithLaws.Others)
			}
		})
	}
}

// In one host a slope is a factor on D, and no more is run: with it off all is as with
// ln D off by as much, to the last digits.
func TestSlopeInOneHostIsAFactor(t *testing.T) {
	const sigma, at = 1.0, 0.6
	data, _, _ := coupleAt(at, 0.9, 3)
	slope := readStudy(t, slopeLaws+fmt.Sprintf(uniform, "A", at, "sr"), "A.csv", data)
	lnD := readStudy(t, strings.Replace(slopeLaws, `"-9.440599 +- 1", at = 0 }`, fmt.Sprintf("-9.440599, at = 0 }\nsigma = %.17g", sigma*at/math.Ln10), 1)+
		fmt.Sprintf(uniform, "A", at, "sr"), "A.csv", data)
	bySlope, byLnD := weighed(t, slope).Paths[0].Outcome, weighed(t, lnD).Paths[0].Outcome
	if fmt.Sprint(bySlope.Finding) != fmt.Sprint(byLnD.Finding) {
		t.Errorf("without errors %v and %v", bySlope.Finding, byLnD.Finding)
	}
	near(t, "chi-square", bySlope.WithLaws.Misfit, byLnD.WithLaws.Misfit, leanChiSq)
	near(t, "leaning", bySlope.WithLaws.Others[0].Sigma, byLnD.WithLaws.Leaning[0].LnD, leanZ)
	if bySlope.WithLaws.Verdict != byLnD.WithLaws.Verdict || byLnD.WithLaws.Verdict != Reproduces {
		t.Errorf("verdicts %s and %s", bySlope.WithLaws.Verdict, byLnD.WithLaws.Verdict)
	}
}

// Crystals in another order ask for the same.
func TestDeviationsInAnyOrder(t *testing.T) {
	s, _, _ := twoHosts(t, "sr", "alone")
	one := weighed(t, s).Paths[0].Outcome
	slices.Reverse(s.Crystals)
	other := weighed(t, s).Paths[0].Outcome
	near(t, "chi-square", other.WithLaws.Misfit, one.WithLaws.Misfit, leanChiSq)
	for k, off := range one.WithLaws.Others {
		back := other.WithLaws.Others[len(one.WithLaws.Others)-1-k]
		if back.Deviation != off.Deviation {
			t.Fatalf("leans on %v, in reverse on %v", one.WithLaws.Others, other.WithLaws.Others)
		}
		near(t, "leaning on "+off.Of, back.Sigma, off.Sigma, leanZ)
	}
}

// melted is a crystal that grew in equilibrium with a melt, and whose rim has been in
// equilibrium with another one since: K of both with an error of B.
const melted = `
[[partition]]
name = "kx"
A = "0 kJ/mol"
B = "15 +- %g kJ/mol"

[[law]]
name = "mine"
D0 = "8.317637711e-5 m2/s"
E = "276 kJ/mol"

[[path]]
name = "as made"
legs = [ { hold = "750 C", for = "20 yr" } ]

[[crystal]]
name = "A"
mineral = "plagioclase"
shape = "slab"
zones = [ { name = "core", width = "200 um", host = 0.5 } ]

[[crystal.element]]
name = "Sr"
law = "mine"
partition = "kx"
start = { melt = ["90 ppm"], temperature = ["850 C"] }
rim = { following = "kx", melt = "120 ppm" }
traverse = { file = "sr.csv", position = "distance [um]", zero = "rim", value = "Sr [ppm]", error = "5 ppm", spot = "point" }
`

// inEquilibrium is a half space x below its surface that began in equilibrium with one
// melt at one temperature and has a surface in equilibrium with another since (Crank
// 1975, equation 3.13), for B off by so many J/mol:
//
//	C = C1 + (C0 - C1) erf(x/(2 sqrt(D t))).
func inEquilibrium(x, b float64) float64 {
	k := func(temp float64) float64 { return math.Exp((15e3 + b) / (thermal.GasConstant * temp)) }
	rim, start := 120*k(storedAt), 90*k(850+thermal.ZeroCelsius)
	return rim + (start-rim)*math.Erf(x/(2*math.Sqrt(srD(0)*coupleAge)))
}

// meltedData is inEquilibrium with noise, for B off by so many J/mol.
func meltedData(b float64) (at, value []float64, csv string) {
	rng := rand.New(rand.NewPCG(79, 1))
	var data strings.Builder
	data.WriteString("distance [um],Sr [ppm]\n")
	for um2 := 0.5; um2 < 60; um2 += 1.5 {
		v := inEquilibrium(um2*um, b) + 5*rng.NormFloat64()
		at, value = append(at, um2*um), append(value, v)
		fmt.Fprintf(&data, "%g,%.9g\n", um2, v)
	}
	return at, value, data.String()
}

// foretoldOnly is how the note begins that By is not right.
const foretoldOnly = "with constants off, chi-square of Sr in A is foretold to"

// What a zone started with and what a rim follows are off with B.
func TestBIsOffInStartAndRim(t *testing.T) {
	const sigma = 0.6e3 // J/mol, K by 7 %
	for _, off := range []float64{1.5, -1.5} {
		t.Run(fmt.Sprint(off), func(t *testing.T) {
			at, value, csv := meltedData(off * sigma)
			p := &weighed(t, readStudy(t, fmt.Sprintf(melted, sigma/1e3), "sr.csv", csv)).Paths[0]
			p.Outcome.wantDeviations(t, func(z, _ float64) float64 {
				sum := 0.0
				for i, x := range at {
					sum += square((value[i] - inEquilibrium(x, z*sigma)) / 5)
				}
				return sum
			}, len(at), true, false)
			if notes := strings.Join(p.Profiles[0].Notes, "; "); strings.Contains(notes, foretoldOnly) {
				t.Errorf("notes %q", notes)
			}
		})
	}
}

// Where a constant is known so badly that what it does is no parabola, a note says so: K
// goes with exp(B), here by 70 % a standard deviation.
func TestWhatByCannotForetellIsSaid(t *testing.T) {
	const sigma = 4.5e3
	_, _, csv := meltedData(sigma)
	p := &weighed(t, readStudy(t, fmt.Sprintf(melted, sigma/1e3), "sr.csv", csv)).Paths[0]
	if notes := strings.Join(p.Profiles[0].Notes, "; "); !strings.Contains(notes, foretoldOnly) {
		t.Errorf("notes %q", notes)
	}
}

// What By foretells between and beyond the runs from which it is known is what a run
// with the constants off says.
func TestByForetellsRuns(t *testing.T) {
	const foretold = 0.01 // of chi-square: the third power of what a constant does, and the curve between its knots
	_, _, csv := offData(0.5, 500)
	s := readStudy(t, fmt.Sprintf(offPlagioclase, " +- 1.5 kJ/mol", `"-9.440599 +- 1"`), "sr.csv", csv)
	w, err := newWeighing(s)
	if err != nil {
		t.Fatal(err)
	}
	if err := w.all(t.Context(), 1); err != nil {
		t.Fatal(err)
	}
	c, p := &w.paths[0].curves[0], w.paths[0].profiles[0]
	for _, z := range [][]float64{{0.5, 0}, {1.5, 0}, {-1.5, 0}, {2.5, 0}, {-2.8, 0}, {0, 1.5}, {0, -2.5}, {1, 1}, {1.5, -1.5}, {-2, 2.5}, {-1, -2}} {
		off, lnD := p.crystal.Deviated(p.element, c.By.Of, z)
		run, err := newProfile(&element{crystal: p.crystal, element: off}, p.path, p.refined)
		if err != nil {
			t.Fatal(err)
		}
		for _, x := range []float64{-0.6, 0, 0.4} {
			at, err := run.solveFor(t.Context(), []float64{x - lnD})
			if err != nil {
				t.Fatal(err)
			}
			// ln D off besides makes up for what the shift of the deviations is not
			moved := *c
			moved.Law = 1
			got := moved.leant(append([]float64{x - lnD, 0}, z...), &LawPrior{LnD: 1})
			near(t, fmt.Sprintf("chi-square at %v, ln D off by %g", z, x), got, at[0].ChiSq, foretold*at[0].ChiSq)
		}
	}
}

// itself is an element whose D may depend on its own value, which hardly changes: to a
// part in a thousand of the error, D is off by one factor everywhere.
const itself = `
[[law]]
name = "mine"
D0 = "8.317637711e-5 m2/s"
E = "276 kJ/mol"
own = { ln_slope = "0 +- 0.0002", at = 0 }

[[path]]
name = "as made"
legs = [ { hold = "750 C", for = "1 yr" } ]

[[crystal]]
name = "A"
mineral = "plagioclase"
shape = "slab"
zones = [ { name = "core", width = "100 um" }, { name = "skin", width = "100 um" } ]

[[crystal.element]]
name = "Sr"
law = "mine"
start = { zones = ["4999 ppm", "5001 ppm"], edge = "0 um" }
rim = { held = "skin" }
traverse = { file = "sr.csv", position = "distance [um]", zero = "centre", value = "Sr [ppm]", error = "0.02 ppm", spot = "point" }
`

// A slope on the element's own value is off too, also one that is 0 but for its error.
func TestOwnSlopeIsOff(t *testing.T) {
	const noise, lnD = 0.02, 0.0002 * 5000 // a standard deviation of the slope
	rng := rand.New(rand.NewPCG(80, 1))
	at := func(r, z float64) float64 {
		return 5000 + (coupleIn(r, 0, lnD*z-math.Log(20))-(srCore+srSkin)/2)*2/(srSkin-srCore)
	}
	var place, value []float64
	var data strings.Builder
	data.WriteString("distance [um],Sr [ppm]\n")
	for um2 := 60.5; um2 < 140; um2 += 2 {
		v := at(um2*um, 1.5) + noise*rng.NormFloat64()
		place, value = append(place, um2*um), append(value, v)
		fmt.Fprintf(&data, "%g,%.9g\n", um2, v)
	}
	o := &weighed(t, readStudy(t, itself, "sr.csv", data.String())).Paths[0].Outcome
	o.wantDeviations(t, func(z, _ float64) float64 {
		sum := 0.0
		for i, r := range place {
			sum += square((value[i] - at(r, z)) / noise)
		}
		return sum
	}, len(place), true, false)
	if want := (study.Deviation{Of: "mine", What: study.OwnSlope}); len(o.WithLaws.Others) != 1 || o.WithLaws.Others[0].Deviation != want {
		t.Errorf("leans on %v, want %v", o.WithLaws.Others, want)
	}
}

// With no error stated nothing else is run and the curves are what they were, to the
// bit; with one, the verdict without it is the same.
func TestNoErrorsNoDeviations(t *testing.T) {
	_, _, csv := offData(1.5, 0)
	exact := weighed(t, readStudy(t, fmt.Sprintf(offPlagioclase, "", fmt.Sprint(lnSlope)), "sr.csv", csv))
	known := weighed(t, readStudy(t, fmt.Sprintf(offPlagioclase, "", `"-9.440599 +- 1"`), "sr.csv", csv))
	if exact.WithErrors() != 0 || known.WithErrors() != 1 {
		t.Errorf("%d and %d constants with errors, want 0 and 1", exact.WithErrors(), known.WithErrors())
	}
	o, with := exact.Paths[0].Outcome, known.Paths[0].Outcome
	if o.WithLaws.Verdict != o.Verdict || len(o.WithLaws.Others) != 0 {
		t.Errorf("with no error stated %+v", o.WithLaws)
	}
	if o.Verdict != with.Verdict || o.Misfit != with.Misfit || o.Degrees != with.Degrees {
		t.Errorf("without errors %v, with them not allowed for %v", o.Finding, with.Finding)
	}
	near(t, "shift factor", with.Shift, o.Shift, 2e-3*o.Shift) // it is as right as a curve's is
}

// A host that was measured with errors is redrawn beside constants that are off, and
// plateaux are fitted: errors of all only help.
func TestDeviationsBesideARedrawnHost(t *testing.T) {
	_, _, csv := offData(1.5, 0)
	text := strings.NewReplacer(`host = 0.55`, `host = "0.55 +- 0.01"`, `["500 ppm", "700 ppm"]`, `["free", "700 +- 5 ppm"]`).
		Replace(fmt.Sprintf(offPlagioclase, " +- 1.5 kJ/mol", `"-9.440599 +- 1"`))
	o := weighed(t, readStudy(t, text, "sr.csv", csv)).Paths[0].Outcome
	if o.WithLaws.Verdict != Reproduces || !(o.WithLaws.Misfit < o.Misfit) || len(o.WithLaws.Others) != 2 {
		t.Errorf("%s with %g, with errors %+v", o.Verdict, o.Misfit, o.WithLaws)
	}
}

// n copies of a crystal have n times the chi-square of one. With the law's error, which
// is one for all, they have that of one parabola n times as deep: about at, of width s,
//
//	n floor + at^2/(s^2/n + S^2).
func TestLeaningOfCopies(t *testing.T) {
	const floor, at, width, byD = 19.0, 1.5, 0.3, 0.6
	one := on(1, [2]float64{}, bowl(floor, at, width, 22, 2))
	for _, n := range []int{1, 2, 5} {
		var cs []Curve
		for k := range n {
			c := one
			c.Crystal = k
			cs = append(cs, c)
		}
		var o Outcome
		Judge(&o, cs, []LawPrior{{Key: "a", LnD: byD}}, 0.95)
		near(t, "chi-square", o.Misfit, float64(n)*(floor+square(at/width)), 1e-9)
		near(t, "chi-square with errors", o.WithLaws.Misfit, float64(n)*floor+at*at/(width*width/float64(n)+byD*byD), leanChiSq)
	}
}

// A true path passes with errors allowed for as often as is said, or more often, where
// the constants are off by as much as their errors say: a slope that three crystals have
// in common, and ln D of a law of each. With one of them taken as exact it does not.
func TestErrorsOfConstantsKeepThePromise(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	const (
		draws, points, width, byD, slope = 600, 20, 0.1, 0.3, 2.0
		confidence                       = 0.95
		slack                            = 3.3 // standard deviations of a rate
	)
	rng := rand.New(rand.NewPCG(81, 1))
	host := [3]float64{0.1, 0.3, 0.5}
	shared := study.Deviation{Of: "sr", What: study.HostSlope}
	passed, exactly := 0, 0
	for range draws {
		z := rng.NormFloat64()
		var with, without []Curve
		var laws []LawPrior
		for k, x := range host {
			// all points but one scatter about the best fit, that one is what the amount of diffusion is known by
			floor := 0.0
			for range points - 1 {
				floor += square(rng.NormFloat64())
			}
			c := bowl(floor, byD*rng.NormFloat64()+slope*x*z+width*rng.NormFloat64(), width, points, 0)
			c.Crystal, c.Law = k, k+1
			without = append(without, c)
			c.By = &By{Of: []study.Deviation{shared}, Shift: []float64{slope * x}}
			with = append(with, c)
			laws = append(laws, LawPrior{Key: fmt.Sprint(k), LnD: byD})
		}
		var o Outcome
		Judge(&o, with, laws, confidence)
		passed += oneIf(o.WithLaws.Verdict == Reproduces)
		Judge(&o, without, laws, confidence)
		exactly += oneIf(o.WithLaws.Verdict == Reproduces)
	}
	rate := float64(passed) / draws
	if least := confidence - slack*math.Sqrt(confidence*(1-confidence)/draws); !(rate >= least) {
		t.Errorf("%.3f pass, want %.3f or more", rate, least)
	}
	if !(float64(exactly) < 0.8*draws) {
		t.Errorf("with the slope as exact %d of %d pass, want fewer than 80 %%", exactly, draws)
	}
	t.Logf("%.3f pass, with the slope as exact %.3f", rate, float64(exactly)/draws)
}
