package study

import (
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// TestEveryKeyDirection compares D with the published formulas of Coogan and
// others 2005 along a and b, typed here once more: the normal is 60 and 30 deg
// from them.
func TestEveryKeyDirection(t *testing.T) {
	law := everyKey(t).Crystals[1].Elements[5].Law
	const temp = 1300.0
	log10FO2 := -24930/temp + 9.36 + 0.046*1999/temp + 0.3 + 5
	rt := thermal.GasConstant * temp
	a := math.Log(1.65e-11) + 0.31*math.Ln10*(log10FO2+7) - 193e3/rt
	b := math.Log(3.47e-11) + 0.31*math.Ln10*(log10FO2+7) - 201e3/rt
	near(t, "ln D", law.Law.In(1).LnD(temp), math.Log(0.25*math.Exp(a)+0.75*math.Exp(b)))
	if want := "olivine-ca-coogan2005-a + olivine-ca-coogan2005-b"; law.Key != want || law.Row != nil || !strings.Contains(law.Citation, "Coogan") {
		t.Errorf("law %+v", law)
	}
	if got := law.Cautions(); !slices.Equal(got, []string{catalogue.NotChecked, "the NNO buffer: " + catalogue.NotChecked}) {
		t.Errorf("cautions %q, want those of both laws once", got)
	}
}

// directional are laws between which directions lie.
const directional = `[[law]]
name = "slow"
D0 = "1e-9 m2/s"
E = "273 kJ/mol"
range = "600..900 C"
citation = "invented, 1"

[[law]]
name = "hot"
D0 = "1e-8 m2/s"
E = "250 kJ/mol"
range = "1000..1200 C"
citation = "invented, 2"

[[law]]
name = "wide"
D0 = "1e-8 m2/s"
E = "250 kJ/mol"
range = "700..1200 C"
citation = "invented, 2"
caution = "of one part"

[[law]]
name = "on host"
D0 = "1e-8 m2/s"
E = "250 kJ/mol"
host = { ln_slope = 2, at = 0.5 }

[[law]]
name = "on itself"
D0 = "1e-8 m2/s"
E = "250 kJ/mol"
own = { ln_slope = 0.2, at = 60 }

[[law]]
name = "on host from 0"
D0 = "1e-8 m2/s"
E = "250 kJ/mol"
host = { ln_slope = 2 }

[[path]]
`

// directedLaw reads the sound study with a law by direction.
func directedLaw(t *testing.T, text string) (Law, error) {
	t.Helper()
	s, err := parse("s.toml", []byte(strings.NewReplacer("[[path]]\n", directional, `"quartz-ti-cherniak2007"`, text,
		`"100 um" }`, `"100 um", host = 0.5 }`, `"20 um" }`, `"20 um", host = 0.4 }`).Replace(sound)), memory(soundFiles()))
	if err != nil {
		return Law{}, err
	}
	return s.Crystals[0].Elements[0].Law, nil
}

func TestDirection(t *testing.T) {
	const temp = 1000.0
	d := func(d0, energy float64) float64 { return d0 * math.Exp(-energy/(thermal.GasConstant*temp)) }
	slow, wide := d(1e-9, 273e3), d(1e-8, 250e3)
	for _, test := range []struct {
		name, law, key, citation string
		d, lo, hi                float64
		parts                    int
	}{
		{"along c", `{ a = "mine", b = "hot", c = "slow", normal = ["90 deg", "90 deg", "180 deg"] }`, "slow", "invented, 1", slow, 600 + zc, 900 + zc, 0},
		{"between two", `{ a = "slow", b = "mine", c = "wide", normal = ["60 deg", "90 deg", "30 deg"] }`, "slow + wide", "invented, 1; invented, 2",
			0.25*slow + 0.75*wide, 700 + zc, 900 + zc, 2},
		{"two axes of one law", `{ a = "slow", b = "slow", c = "wide", normal = ["60 deg", "60 deg", "45 deg"] }`, "slow + wide", "invented, 1; invented, 2",
			0.5*slow + 0.5*wide, 700 + zc, 900 + zc, 2},
		{"of one citation", `{ a = "hot", b = "wide", c = "mine", normal = ["45 deg", "45 deg", "90 deg"] }`, "hot + wide", "invented, 2", wide, 1000 + zc, 1200 + zc, 2},
		{"rounded angles", `{ a = "slow", b = "slow", c = "slow", normal = ["54.7 deg", "54.7 deg", "55 deg"] }`, "slow", "invented, 1",
			slow * (2*math.Pow(math.Cos(54.7*deg), 2) + math.Pow(math.Cos(55*deg), 2)), 600 + zc, 900 + zc, 1},
		{"ranges apart", `{ a = "slow", b = "hot", c = "mine", normal = ["45 deg", "45 deg", "90 deg"] }`, "slow + hot", "invented, 1; invented, 2", 0.5*slow + 0.5*wide, 0, 0, 2},
		{"on the host", `{ a = "on host", b = "on host from 0", c = "mine", normal = ["45 deg", "45 deg", "90 deg"] }`, "on host + on host from 0", "",
			wide * (1 + math.E) / 2, 0, 0, 2},
	} {
		t.Run(test.name, func(t *testing.T) {
			law, err := directedLaw(t, test.law)
			if err != nil {
				t.Fatal(err)
			}
			near(t, "D", math.Exp(law.Law.LnD(temp)), test.d)
			near(t, "lower end", law.TMin, test.lo)
			near(t, "upper end", law.TMax, test.hi)
			if law.Key != test.key || law.Citation != test.citation || len(law.Parts) != test.parts {
				t.Errorf("law %+v", law)
			}
			if one := slices.Contains(law.Cautions(), "wide: of one part"); one != (len(law.Parts) > 1 && strings.Contains(law.Key, "wide")) {
				t.Errorf("cautions %q", law.Cautions())
			}
			if apart := slices.Contains(law.Cautions(), "its laws have no calibrated temperature in common"); apart != (test.name == "ranges apart") {
				t.Errorf("cautions %q", law.Cautions())
			}
		})
	}
	for key, want := range map[string]string{
		"on host":   "depend on the host in different ways",
		"on itself": "depend on the element itself in different ways",
	} {
		t.Run(key+" in two ways", func(t *testing.T) {
			_, err := directedLaw(t, `{ a = "`+key+`", b = "slow", c = "mine", normal = ["45 deg", "45 deg", "90 deg"] }`)
			if got := problems(t, err); len(got) != 1 || !strings.Contains(got[0].Problem, want) {
				t.Errorf("problems %v", err)
			}
		})
	}
}
