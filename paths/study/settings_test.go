package study

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// TestEveryKeySettings: legs have what they state and else what the study states,
// those of a repeat what the repeat states; the laws of the catalogue follow, here
// with the published formulas typed once more (Coogan and others 2005, Faak and
// others 2013, the NNO buffer of Huebner & Sato 1970).
func TestEveryKeySettings(t *testing.T) {
	s := everyKey(t)
	settings := func(i int) (out []int) {
		for _, l := range s.Paths[i].History.Legs() {
			out = append(out, l.Setting)
		}
		return out
	}
	if got, want := settings(0), []int{1, 1, 1, 1, 2, 1, 1}; !slices.Equal(got, want) {
		t.Errorf("settings of the first path %v, want %v", got, want)
	}
	if got, want := settings(1), []int{1, 3, 3, 3, 3, 3, 3, 3, 3, 3, 1, 1}; !slices.Equal(got, want) {
		t.Errorf("settings of the second path %v, want %v", got, want)
	}
	const temp = 1300.0
	rt := thermal.GasConstant * temp
	e := s.Crystals[1].Elements
	for _, test := range []struct {
		setting             int
		offset, bar, silica float64
	}{{1, 0.3, 2000, 0.6}, {2, 0, 2000, 0.6}, {3, 0.3, 4000, 0.7}} {
		log10FO2 := -24930/temp + 9.36 + 0.046*(test.bar-1)/temp + test.offset + 5
		ca := e[3].Law.Law.In(test.setting)
		near(t, "ln D of Ca", ca.LnD(temp), math.Log(1.65e-11)+0.31*math.Ln10*(log10FO2+7)-193e3/rt)
		mg := e[2].Law.Law.In(test.setting)
		near(t, "ln D of Mg", mg.LnD(temp), math.Log(1.25e-4)+2.6*math.Log(test.silica)-320.92e3/rt)
		if sr := e[0].Law.Law; sr.Where != nil {
			t.Errorf("the law of Sr depends on no condition, but has windows %v", sr.Where)
		}
	}
	if got, want := s.Settings[0].Conditions.Typed, []string{"pressure 2 kbar", "fO2 NNO", "aTiO2 0.7", "aSiO2 0.6"}; !slices.Equal(got, want) {
		t.Errorf("conditions %q, want %q", got, want)
	}
	if got, want := s.Settings[1].Of(), `leg "wake" and 1 more`; got != want {
		t.Errorf("they are of %s, want %s", got, want)
	}
}

const caStudy = `[[path]]
name = "two"
legs = [ { name = "store", hold = "1000 C", for = "1 yr" }, { name = "wake", hold = "1100 C", for = "1 yr" } ]

[[path]]
name = "one"
legs = [ { hold = "1000 C", for = "1 yr" } ]

[[crystal]]
name = "A"
mineral = "olivine"
shape = "slab"
zones = [ { name = "core", width = "90 um" }, { name = "skin", width = "40 um" } ]

[[crystal.element]]
name = "Ca"
law = "olivine-ca-coogan2005-a"
start = { zones = ["100 ppm", "70 ppm"], edge = "0 um" }
`

// inLegs gives the legs of caStudy the conditions, "" being none.
func inLegs(store, wake, other string) string {
	return strings.NewReplacer(
		`hold = "1000 C", for = "1 yr" }, {`, `hold = "1000 C", `+store+`for = "1 yr" }, {`,
		`hold = "1100 C", `, `hold = "1100 C", `+wake,
		`[ { hold = "1000 C", `, `[ { hold = "1000 C", `+other,
	).Replace(caStudy)
}

// TestLegConditions: conditions that all legs share, wherever they are stated, make a
// plain law; what holds of a path is what its own legs say.
func TestLegConditions(t *testing.T) {
	const nno, fixed = `conditions = { fO2 = "NNO" }, `, `conditions = { fO2 = "1e-7 Pa" }, `
	read := func(text string) *Study {
		t.Helper()
		s, err := parse("s.toml", []byte(text), memory(nil))
		if err != nil {
			t.Fatal(err)
		}
		return s
	}
	same := read(inLegs(nno, nno, nno)).Crystals[0].Elements[0].Law.Law
	whole := read("[conditions]\nfO2 = \"NNO\"\n" + caStudy).Crystals[0].Elements[0].Law.Law
	if same.Where != nil || len(same.Terms) != 1 || same.Terms[0] != whole.Terms[0] {
		t.Errorf("stated by every leg %+v, by the study %+v", same, whole)
	}
	s := read(inLegs(nno, fixed, nno))
	law := &s.Crystals[0].Elements[0].Law
	const held = "fO2 held at 1e-07 Pa at every temperature"
	for i, want := range []bool{true, false} {
		if got := slices.Contains(law.CautionsOn(s.Paths[i].History), held); got != want {
			t.Errorf("caution on path %q: %t, want %t", s.Paths[i].Name, got, want)
		}
	}
	if n := len(law.Law.Terms); n != 2 {
		t.Errorf("%d terms", n)
	}
	near(t, "ln D at 1e-7 Pa", law.Law.In(3).LnD(1300), math.Log(1.65e-11)-193e3/(thermal.GasConstant*1300))
}

// TestWrongLegConditions: what cannot be is told with its leg.
func TestWrongLegConditions(t *testing.T) {
	const store = `{ name = "store", hold = "750 C", for = "800 yr" }`
	leg := func(conditions string) string {
		return `{ hold = "750 C", for = "800 yr", conditions = ` + conditions + ` }`
	}
	for _, w := range []wrong{
		{"conditions of a leg not a table", store, leg(`@"NNO"`), "", "path.legs.conditions", "a text, not a table", `conditions = { fO2 = "NNO" }`},
		{"condition of a leg mistyped", store, leg(`{ @fo2 = "NNO" }`), "", "path.legs.conditions.fo2", "unknown key", `did you mean "fO2"?`},
		{"unknown condition of a leg", store, leg(`{ @salinity = 3 }`), "", "path.legs.conditions.salinity", "unknown key", "known here: pressure, fO2, aTiO2, aSiO2"},
		{"pressure of a leg below zero", store, leg(`{ pressure = @"-2 kbar" }`), "", "path.legs.conditions.pressure", "below zero", "2 kbar"},
		{"no buffer of a leg", store, leg(`{ fO2 = @"IW" }`), "", "path.legs.conditions.fO2", "no known buffer", "NNO, QFM"},
	} {
		t.Run(w.name, func(t *testing.T) { w.check(t) })
	}
	for _, test := range []struct{ name, text, place, problem, remedy string }{
		{"on one leg only", inLegs(`conditions = { fO2 = "NNO" }, `, "", `conditions = { fO2 = "NNO" }, `), "s.toml:3:91 path.legs", `leg "wake" has no fO2, on which olivine-ca-coogan2005-a depends`, `write conditions = { fO2 = "NNO+0.3" } in it, or fO2 = "NNO+0.3" in [conditions]`},
		{"not on the other path", inLegs(`conditions = { fO2 = "NNO" }, `, `conditions = { fO2 = "QFM" }, `, ""), "s.toml:7:10 path.legs", "the hold leg on line 7 has no fO2, on which olivine-ca-coogan2005-a depends", "in it, or"},
		{"on none", caStudy, "s.toml:17:7 crystal.element.law", "this law depends on fO2, not given in this study", "write [conditions]"},
	} {
		t.Run(test.name, func(t *testing.T) {
			_, err := parse("s.toml", []byte(test.text), memory(nil))
			list := problems(t, err)
			if len(list) != 1 {
				t.Fatalf("%d problems, want 1: %v", len(list), err)
			}
			in := list[0]
			if at := fmt.Sprintf("%s:%d:%d %s", in.File, in.Line, in.Col, in.Field); at != test.place || in.Problem != test.problem || !strings.Contains(in.Remedy, test.remedy) {
				t.Errorf("%s: %q, %q", at, in.Problem, in.Remedy)
			}
		})
	}
}

// TestRimOfLegConditions: what a crystal takes up is proportional to aTiO2, so that
// at one temperature it falls to half where that does, at once.
func TestRimOfLegConditions(t *testing.T) {
	s, err := parse("s.toml", []byte(`[conditions]
pressure = "2 kbar"
aTiO2 = 0.6
aSiO2 = 1
[[path]]
name = "two magmas"
legs = [ { hold = "750 C", for = "100 yr" }, { hold = "750 C", for = "50 yr", conditions = { aTiO2 = 0.3 } } ]
[[crystal]]
name = "Q"
mineral = "quartz"
shape = "slab"
zones = [ { name = "core", width = "90 um" } ]
[[crystal.element]]
name = "Ti"
law = "quartz-ti-cherniak2007"
start = { zones = ["60 ppm"] }
rim = { following = "ti-quartz-huang2012" }
`), memory(nil))
	if err != nil {
		t.Fatal(err)
	}
	p, _, err := s.Crystals[0].Problem(&s.Crystals[0].Elements[0], s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	g := p.Outer[0].Given
	near(t, "ratio", g.At(120*thermal.Year)/g.At(40*thermal.Year), 0.5)
	if !slices.Equal(g.Jumps, []float64{100 * thermal.Year}) {
		t.Errorf("jumps at %g s", g.Jumps)
	}
}
