package study

import (
	"math"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"bankfire/thermal"
)

const deg = math.Pi / 180

// measured replaces texts of the sound study, in pairs of old and new, and
// returns its element and its notes.
func measured(t *testing.T, replace ...string) (Element, []string) {
	t.Helper()
	for i := 0; i < len(replace); i += 2 {
		if strings.Count(sound, replace[i]) != 1 {
			t.Fatalf("%q is not once in the sound study", replace[i])
		}
	}
	files := soundFiles()
	files["mg.csv"] = "x [um],Fo [mol%],XFo [mole fraction],An [%],raw [Fo],s [mol%],BSE,n\n-1,88,0.88,40,88,1,120,4\n10,84,0.84,50,84,0.5,130,9\n"
	s, err := parse("s.toml", []byte(strings.NewReplacer(replace...).Replace(sound)), memory(files))
	if err != nil {
		t.Fatal(err)
	}
	return s.Crystals[0].Elements[0], s.Notes
}

// TestNuisances: the ways in which the study may know an edge, a tilt, an origin.
func TestNuisances(t *testing.T) {
	const edge, spot = `edge = "0 um"`, `spot =`
	e, _ := measured(t)
	if diff := cmp.Diff([]Nuisance{{}, {}, {}}, []Nuisance{e.Start.Edge, e.Tilt, e.Origin}); diff != "" || e.Scatter {
		t.Errorf("of a study that does not say: %s", diff)
	}
	for _, test := range []struct {
		name, old, new string
		of             func(e Element) Nuisance
		want           Nuisance
	}{
		{"edge known", edge, `edge = "0.5 um"`, edgeOf, Nuisance{Value: 0.5 * um}},
		{"edge with a prior", edge, `edge = "0.8 +- 0.2 um"`, edgeOf, Nuisance{Value: 0.8 * um, Sigma: 0.2 * um}},
		{"edge free", edge, `edge = "free 0..2 um"`, edgeOf, Nuisance{Hi: 2 * um}},
		{"tilt known", spot, `tilt = "20 deg", spot =`, tiltOf, Nuisance{Value: 20 * deg}},
		{"tilt free", spot, `tilt = "0..30 deg", spot =`, tiltOf, Nuisance{Hi: 30 * deg}},
		{"tilt free, said so", spot, `tilt = "free 10..30 deg", spot =`, tiltOf, Nuisance{Lo: 10 * deg, Hi: 30 * deg}},
		{"tilt with a prior", spot, `tilt = "20 +- 5 deg", spot =`, tiltOf, Nuisance{Value: 20 * deg, Sigma: 5 * deg}},
		{"origin known", spot, `origin = "-0.5 um", spot =`, originOf, Nuisance{Value: -0.5 * um}},
		{"origin with a prior", spot, `origin = "0 +- 0.5 um", spot =`, originOf, Nuisance{Sigma: 0.5 * um}},
		{"origin free", spot, `origin = "free -0.5..2 um", spot =`, originOf, Nuisance{Lo: -0.5 * um, Hi: 2 * um}},
		{"origin free, cut at the rim", spot, `origin = "free -2..2 um", spot =`, originOf, Nuisance{Lo: -1 * um, Hi: 2 * um}}, // the first point is at 1 um
	} {
		t.Run(test.name, func(t *testing.T) {
			e, _ := measured(t, test.old, test.new)
			got, want := test.of(e), test.want
			for i, x := range []float64{got.Value - want.Value, got.Sigma - want.Sigma, got.Lo - want.Lo, got.Hi - want.Hi} {
				if !(math.Abs(x) <= 1e-15) { // round-off of micrometres and radians
					t.Errorf("got %+v, want %+v (field %d)", got, want, i)
				}
			}
			if got.Fixed() != (want.Sigma == 0 && want.Hi == 0) || got.Ranged() != (want.Hi > 0) {
				t.Errorf("fixed %v, ranged %v", got.Fixed(), got.Ranged())
			}
		})
	}
}

func edgeOf(e Element) Nuisance   { return e.Start.Edge }
func tiltOf(e Element) Nuisance   { return e.Tilt }
func originOf(e Element) Nuisance { return e.Origin }

func TestNuisanceMiddle(t *testing.T) {
	for want, n := range map[float64]Nuisance{3: {Value: 3, Sigma: 1}, 2: {Lo: 1, Hi: 3}} {
		if got := n.Middle(); got != want {
			t.Errorf("%+v: middle %g, want %g", n, got, want)
		}
	}
}

func TestScatter(t *testing.T) {
	if e, _ := measured(t, `spot =`, `overlap = "independent", spot =`); !e.Traverse.Independent {
		t.Error("errors not independent")
	}
	if e, _ := measured(t, `spot =`, `scatter = "free", spot =`); !e.Scatter {
		t.Error("no scatter")
	}
}

// TestMeasuredUnits: what Fo, An and grey levels are of an element.
func TestMeasuredUnits(t *testing.T) {
	const column = `value = "Ti [ppm]"`
	const name, zones, law = "name = \"Ti\"\nlaw = \"quartz-ti-cherniak2007\"", `["free", "58 ppm"]`, "\nlaw = \"mine\""
	for _, test := range []struct {
		name            string
		replace         []string
		unit            string
		grey            bool
		values, sigmas  []float64
		plateaux, notes []string
	}{
		{"Fo of Fe", []string{name, `name = "Fe-Mg"` + law, zones, `["free", "86 +- 2 Fo"]`, column, `value = "Fo [mol%]"`},
			"mole fraction", false, []float64{0.12, 0.16}, []float64{0.04 * 0.88, 0.04 * 0.84}, []string{"free", "0.14 +- 0.02"},
			[]string{"mg.csv: Fe-Mg is read as the mole fraction 1 - Fo/100"}},
		{"Fo of Mg, as a mole fraction", []string{name, `name = "Mg"` + law, zones, `["free", "86 mol%"]`, column, `value = "XFo"`, `"4 %"`, `{ column = "s [mol%]", sigmas = 1 }`},
			"mole fraction", false, []float64{0.88, 0.84}, []float64{0.01, 0.005}, []string{"free", "0.86"},
			[]string{"mg.csv: Mg is read as the mole fraction Fo/100"}},
		{"Fo in its own unit", []string{name, `name = "Fe"` + law, zones, `["free", "0.14 mole fraction"]`, column, `value = "raw"`, `"4 %"`, `{ column = "s [mol%]", sigmas = 1 }`},
			"mole fraction", false, []float64{0.12, 0.16}, []float64{0.01, 0.005}, []string{"free", "0.14"},
			[]string{"mg.csv: Fe is read as the mole fraction 1 - Fo/100"}},
		{"An of Na", []string{name, `name = "NaSi-CaAl"` + law, zones, `["free", "40 An"]`, column, `value = "An"`, `"4 %"`, `"2 An"`},
			"mole fraction", false, []float64{0.6, 0.5}, []float64{0.02, 0.02}, []string{"free", "0.6"},
			[]string{"mg.csv: NaSi-CaAl is read as the mole fraction 1 - An/100"}},
		{"grey between two plateaux", []string{name, `name = "Fe-Mg"` + law, zones, `["90 Fo", "84 Fo"]`, column, `value = "BSE", unit = "grey"`, `"4 %"`, `"2 grey"`},
			"mole fraction", true, []float64{120, 130}, []float64{2, 2}, []string{"0.1", "0.16"}, nil},
		{"grey with everything free", []string{name, `name = "Fe-Mg"` + law, zones, `["free", "free"]`, column, `value = "BSE [grey]"`},
			"grey", false, []float64{120, 130}, []float64{4.8, 5.2}, []string{"free", "free"},
			[]string{"Fe-Mg: no value is stated, so all are fitted in grey levels"}},
		{"grey with a plateau in grey", []string{name, `name = "Fe-Mg"` + law, zones, `["free", "131 grey"]`, column, `value = "BSE [grey]"`},
			"grey", false, []float64{120, 130}, []float64{4.8, 5.2}, []string{"free", "131"}, nil},
	} {
		t.Run(test.name, func(t *testing.T) {
			replace := append([]string{`file = "q1.csv"`, `file = "mg.csv", origin = "free 0..2 um"`}, test.replace...)
			e, notes := measured(t, replace...)
			if e.Unit != test.unit || e.Traverse.Grey != test.grey {
				t.Errorf("unit %q, grey %v", e.Unit, e.Traverse.Grey)
			}
			for i := range test.values {
				near(t, "value", e.Traverse.Value[i], test.values[i])
				near(t, "sigma", e.Traverse.Sigma[i], test.sigmas[i])
			}
			for i, p := range e.Start.Zones {
				checkPlateau(t, p, test.plateaux[i])
			}
			for _, n := range test.notes {
				if !slices.Contains(notes, n) {
					t.Errorf("notes %q, want among them %q", notes, n)
				}
			}
		})
	}
}

func checkPlateau(t *testing.T, p Plateau, want string) {
	t.Helper()
	if want == "free" || p.Free {
		if !p.Free || want != "free" {
			t.Errorf("plateau %+v, want %s", p, want)
		}
		return
	}
	w, err := thermal.ParseUncertain(want+" mole fraction", thermal.Concentration)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "plateau", p.Value, w.Value)
	near(t, "its error", p.Sigma, w.Sigma)
}

func TestBelow(t *testing.T) {
	e, _ := measured(t, `"q1.csv"`, `"below.csv"`, `spot =`, `below = "limit", spot =`)
	if !slices.Equal(e.Traverse.Limit, []bool{false, true}) || e.Traverse.Value[1] != 5 {
		t.Errorf("traverse %+v", e.Traverse)
	}
	e, notes := measured(t, `"q1.csv"`, `"below.csv"`, `spot =`, `below = "skip", spot =`)
	if len(e.Traverse.Value) != 1 || !slices.Contains(notes, "below.csv: 1 value below detection left out") {
		t.Errorf("traverse %+v, notes %q", e.Traverse, notes)
	}
}

func TestAnalyses(t *testing.T) {
	for text, want := range map[string][]float64{
		`{ column = "s [mol%]", analyses = 4 }`:               {0.005, 0.0025},
		`{ column = "s [mol%]", sigmas = 2, analyses = 4 }`:   {0.0025, 0.00125},
		`{ column = "s [mol%]", sigmas = 1, analyses = "n" }`: {0.005, 0.5 / 300},
	} {
		e, _ := measured(t, "name = \"Ti\"\nlaw = \"quartz-ti-cherniak2007\"", "name = \"Mg\"\nlaw = \"mine\"", `"58 ppm"]`, `"free"]`,
			`file = "q1.csv"`, `file = "mg.csv", origin = "1 um"`, `value = "Ti [ppm]"`, `value = "Fo"`, `"4 %"`, text)
		for i, s := range want {
			near(t, text, e.Traverse.Sigma[i], s)
		}
	}
}
