package study

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

const twoRegimes = `{ above = "olivine-femg-dohmen2007-tamed", below = "olivine-femg-dohmen2007-ped", at = { fO2 = "1e-10 Pa" } }`

// switched reads a study of iron in an olivine by a law, under conditions and with
// one leg's own.
func switched(law, conditions, leg string) (*Study, error) {
	return parse("s.toml", []byte(`[conditions]
`+conditions+`
[[law]]
name = "mine"
D0 = "1e-9 m2/s"
E = "250 kJ/mol"
[[path]]
name = "cooling"
legs = [
  { name = "hot", hold = "1100 C", for = "1 yr"`+leg+` },
  { name = "slow", ramp = "600 C", for = "100 yr" },
]
[[crystal]]
name = "OL-1"
mineral = "olivine"
shape = "slab"
zones = [ { name = "core", width = "100 um" }, { name = "skin", width = "20 um" } ]
[[crystal.element]]
name = "Fe-Mg"
law = `+law+`
start = { zones = ["90 Fo", "80 Fo"], edge = "0 um" }
rim = "sealed"
`), memory(nil))
}

// tamed and ped are ln D of the two regimes of Dohmen and Chakraborty (2007), at XFe
// 0.1 and 2 kbar, typed once more.
func tamed(temp, log10FO2 float64) float64 {
	return math.Ln10*(-9.21+(log10FO2+7)/6) - (201000+(2e8-1e5)*7e-6)/(thermal.GasConstant*temp)
}

func ped(temp float64) float64 {
	return math.Ln10*-8.91 - (220000+(2e8-1e5)*7e-6)/(thermal.GasConstant*temp)
}

// TestSwitch: above the fO2 of the switch one law holds, at and below it the other.
// Along a buffer that is a temperature: QFM is log10 fO2[bar] = A/T + 8.735 with
// A = -25096.3 + 0.110 x 1999 = -24876.41 at 2 kbar, and 1e-10 Pa are 1e-15 bar, so
// that it is reached at 24876.41/(8.735 + 15) = 1048.09 K, one log10 unit above QFM
// at 24876.41/(9.735 + 15) = 1005.72 K.
func TestSwitch(t *testing.T) {
	const beside = 0.02 // K, beside a switch that was calculated by hand to 0.01 K
	qfm := func(offset float64) func(float64) float64 {
		return func(temp float64) float64 { return -24876.41/temp + 8.735 + offset + 5 }
	}
	fixed := func(log10FO2 float64) func(float64) float64 { return func(float64) float64 { return log10FO2 } }
	for _, test := range []struct {
		name, law, fO2 string
		temp           float64 // of the switch
		log10FO2       func(temp float64) float64
		note           string
	}{
		{"QFM", twoRegimes, "QFM", 1048.09, qfm(0), "Fe-Mg: its law changes at 775 C, where fO2 1e-10 Pa is reached"},
		{"above QFM", twoRegimes, "QFM+1", 1005.72, qfm(1), "Fe-Mg: its law changes at 733 C, where fO2 1e-10 Pa is reached"},
		{"oxidized", twoRegimes, "1e-9 Pa", 0, fixed(-9), "Fe-Mg: its law is olivine-femg-dohmen2007-tamed at every temperature, fO2 always being above 1e-10 Pa"},
		{"reduced", twoRegimes, "1e-11 Pa", math.Inf(1), fixed(-11), "Fe-Mg: its law is olivine-femg-dohmen2007-ped at every temperature, fO2 never being above 1e-10 Pa"},
		{"just there", twoRegimes, "1e-10 Pa", math.Inf(1), fixed(-10), "Fe-Mg: its law is olivine-femg-dohmen2007-ped at every temperature"},
		{"at a temperature", strings.Replace(twoRegimes, `fO2 = "1e-10 Pa"`, `temperature = "800 C"`, 1), "QFM", 800 + zc, qfm(0), ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			s, err := switched(test.law, "pressure = \"2 kbar\"\nfO2 = \""+test.fO2+`"`, "")
			if err != nil {
				t.Fatal(err)
			}
			law := &s.Crystals[0].Elements[0].Law
			temps := []float64{700, 900, 1300, 1600}
			if test.temp > 0 && !math.IsInf(test.temp, 0) {
				temps = append(temps, test.temp-beside, test.temp+beside)
			}
			near(t, "XFe of the constants", law.OwnAt, 0.1)
			for _, temp := range temps {
				want := tamed(temp, test.log10FO2(temp))
				if !(temp > test.temp) {
					want = ped(temp)
				}
				if got := law.Law.LnD(temp); !(math.Abs(got-want) <= 1e-9) { // A of the buffer is typed to seven digits
					t.Errorf("ln D at %g K: %.12g, want %.12g", temp, got, want)
				}
			}
			if test.note != "" && !slices.ContainsFunc(s.Notes, func(n string) bool { return strings.HasPrefix(n, test.note) }) {
				t.Errorf("notes %q, want %q", s.Notes, test.note)
			}
			if law.TMin != 700+zc || law.TMax != 1300+zc {
				t.Errorf("calibrated from %g to %g K", law.TMin, law.TMax)
			}
		})
	}
}

// TestSwitchByLeg: each leg has the switch of its own fO2.
func TestSwitchByLeg(t *testing.T) {
	s, err := switched(twoRegimes, "pressure = \"2 kbar\"\nfO2 = \"QFM\"", `, conditions = { fO2 = "QFM+1" }`)
	if err != nil {
		t.Fatal(err)
	}
	law := s.Crystals[0].Elements[0].Law.Law
	const temp = 1030.0 // between the two switches
	near(t, "ln D at QFM", law.In(1).LnD(temp), ped(temp))
	if got, want := law.In(2).LnD(temp), tamed(temp, -24876.41/temp+9.735+5); !(math.Abs(got-want) <= 1e-9) {
		t.Errorf("ln D at QFM+1: %.12g, want %.12g", got, want)
	}
}

// TestSwitchByDirection: a switch along c, six times less along a and b.
func TestSwitchByDirection(t *testing.T) {
	s, err := switched(`{ c = `+twoRegimes+`, ratio = 6, normal = ["90 deg", "60 deg", "30 deg"] }`, "pressure = \"2 kbar\"\nfO2 = \"QFM\"", "")
	if err != nil {
		t.Fatal(err)
	}
	const temp = 1000.0
	near(t, "ln D", s.Crystals[0].Elements[0].Law.Law.LnD(temp), ped(temp)+math.Log(0.75+0.25/6))
}

// TestSwitchAgainstTheTemperature: at enormous pressures fO2 of QFM falls as it gets
// hotter, and the law above holds in the cold.
func TestSwitchAgainstTheTemperature(t *testing.T) {
	qfm, _ := catalogue.FindBuffer("QFM")
	c := &Conditions{Given: catalogue.Conditions{catalogue.Pressure: 300e8}, Buffer: qfm} // 300 kbar
	perT := -25096.3 + 0.110*(300e3-1)
	const fO2 = 1e18 // Pa; log10 fO2 is perT/T + 8.735 + 5
	temp := perT / (18 - 13.735)
	w := switching{fO2: fO2}.windows(c)
	if w[0] == nil || w[1] == nil || !w[0].Holds(0, temp-1) || w[0].Holds(0, temp+1) || w[1].Holds(0, temp-1) || !w[1].Holds(0, temp+1) {
		t.Errorf("windows %+v and %+v, want them to meet at %g K", w[0], w[1], temp)
	}
	if w := (switching{fO2: 1e10}).windows(c); w[1] != nil { // log10 fO2 is above 13.7 at any temperature
		t.Errorf("below %+v, want nowhere", w[1])
	}
}

func TestWrongSwitches(t *testing.T) {
	const given = "pressure = \"2 kbar\"\nfO2 = \"QFM\""
	edit := func(old, new string) string { return strings.Replace(twoRegimes, old, new, 1) }
	const at = `at = { fO2 = "1e-10 Pa" }`
	for _, test := range []struct{ name, law, conditions, leg, field, problem, remedy string }{
		{"no law below", edit(`below = "olivine-femg-dohmen2007-ped", `, ""), given, "", "crystal.element.law.below", "missing", "a law for each side"},
		{"no switch", edit(", "+at, ""), given, "", "crystal.element.law.at", "missing", `at = { temperature = "800 C" }`},
		{"equal laws", edit("ped", "tamed"), given, "", "crystal.element.law.below", "the same law above and below", "name another"},
		{"switch not a table", edit(at, `at = "1e-10 Pa"`), given, "", "crystal.element.law.at", "a text, not a table", "at = { fO2"},
		{"two switches", edit(at, `at = { fO2 = "1e-10 Pa", temperature = "800 C" }`), given, "", "crystal.element.law.at", "want one of fO2 and temperature", "at = { fO2"},
		{"empty switch", edit(at, `at = {}`), given, "", "crystal.element.law.at", "want one of", "at = { fO2"},
		{"switch mistyped", edit(at, `at = { fO = "1e-10 Pa", temperature = "800 C" }`), given, "", "crystal.element.law.at.fO", "unknown key", `did you mean "fO2"?`},
		{"switch at a buffer", edit("1e-10 Pa", "QFM"), given, "", "crystal.element.law.at.fO2", "does not begin with a number", "want a pressure"},
		{"switch without fO2", `{ above = "mine", below = "olivine-femg-dohmen2007-ped", ` + at + ` }`, `pressure = "2 kbar"`, "", "crystal.element.law.at.fO2", "the laws switch at an fO2, not given in this study", "or switch at a temperature"},
		{"switch without fO2 on a leg", `{ above = "mine", below = "olivine-femg-dohmen2007-ped", ` + at + ` }`, `pressure = "2 kbar"`, `, conditions = { fO2 = "NNO" }`, "path.legs", `leg "slow" has no fO2, on which the switch at fO2 1e-10 Pa depends`, "in it, or"},
		{"slopes apart", `{ above = "mine", below = "olivine-femg-dohmen2007-ped", ` + at + ` }`, given, "", "crystal.element.law", "depend on the element itself in different ways", "one slope"},
		{"a switch in a switch", edit(`"olivine-femg-dohmen2007-ped"`, twoRegimes), given, "", "crystal.element.law.below", "a table, not a text", "a law for each side"},
	} {
		t.Run(test.name, func(t *testing.T) {
			_, err := switched(test.law, test.conditions, test.leg)
			list := problems(t, err)
			if len(list) != 1 {
				t.Fatalf("%d problems, want 1: %v", len(list), err)
			}
			in := list[0]
			if in.Field != test.field || in.Line == 0 || !strings.Contains(in.Problem, test.problem) || !strings.Contains(in.Remedy, test.remedy) {
				t.Errorf("%v", fmt.Sprint(in))
			}
		})
	}
}
