package study

import (
	"math"
	"strings"
	"testing"

	"bankfire/thermal"
)

// The law by which a host moves is that of its mineral, or the one that the study
// names.
func TestHostLaw(t *testing.T) {
	const olivine = "[conditions]\npressure = \"2 kbar\"\n"
	const unknown = "it is not known whether its host would have moved"
	for _, test := range []struct{ name, mineral, stated, conditions, key, note string }{
		{"plagioclase", "plagioclase", "", "", "plagioclase-caalnasi-grove1984", ""},
		{"olivine", "olivine", "", olivine, "olivine-femg-dohmen2007-ped", ""},
		{"olivine under fO2", "olivine", "", olivine + "fO2 = \"NNO\"\n", "olivine-femg-dohmen2007-tamed", ""},
		{"olivine under nothing", "olivine", "", "", "", unknown + ": its own law, olivine-femg-dohmen2007-ped, depends on pressure, not given in this study"},
		{"no law of the mineral", "sanidine", "", "", "", ""},
		{"its own", "sanidine", `host_law = "mine"`, "", "mine", ""},
		{"none", "plagioclase", `host_law = "none"`, "", "", ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := strings.NewReplacer(`mineral = "plagioclase"`, `mineral = "`+test.mineral+"\"\n"+test.stated, "[[threshold]]", test.conditions+"[[threshold]]").Replace(hostedStudy())
			s, err := parse("s.toml", []byte(text), memory(soundFiles()))
			if err != nil {
				t.Fatal(err)
			}
			got := ""
			if law := s.Crystals[0].HostLaw; law != nil {
				got = law.Key
			}
			if notes := strings.Join(s.Notes, "\n"); got != test.key || !strings.Contains(notes, test.note) || strings.Contains(notes, unknown) != strings.Contains(test.note, unknown) {
				t.Errorf("law %q, notes %q, want %q, %q", got, s.Notes, test.key, test.note)
			}
		})
	}
}

// Fe-Mg interdiffusion in an olivine host is that of its XFe, typed here once more
// from Dohmen and Chakraborty (2007).
func TestHostLawOfOlivine(t *testing.T) {
	text := strings.NewReplacer(`mineral = "plagioclase"`, `mineral = "olivine"`, "[[threshold]]", "[conditions]\npressure = \"1 bar\"\n[[threshold]]").Replace(hostedStudy())
	s, err := parse("s.toml", []byte(text), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	c := &s.Crystals[0]
	const temp = 1200.0
	least, most := c.Factors(&Element{Law: *c.HostLaw})
	for got, x := range map[float64]float64{least: 0.35, most: 0.55} {
		near(t, "ln D", c.HostLaw.Law.LnD(temp)+math.Log(got), math.Ln10*(-8.91+3*(x-0.1))-220e3/(thermal.GasConstant*temp))
	}
}

func TestWrongHostLaws(t *testing.T) {
	own := "[[law]]\nname = \"own\"\nD0 = \"1e-9 m2/s\"\nE = \"250 kJ/mol\"\nown = { ln_slope = 3, at = 0 }\n"
	for _, test := range []struct{ name, law, want string }{
		{"mistyped", `"plagioclase-caalnasi-grove1985"`, `not in the catalogue; nearest key is "plagioclase-caalnasi-grove1984"`},
		{"a number", "3", "a number, not a text"},
		{"own composition", `"own"`, "its own is the composition of the host"},
		{"lacks pressure", `"olivine-femg-dohmen2007-ped"`, "depends on pressure, not given"},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := strings.NewReplacer(`mineral = "plagioclase"`, "mineral = \"plagioclase\"\nhost_law = "+test.law, "[[threshold]]", own+"[[threshold]]").Replace(hostedStudy())
			_, err := parse("s.toml", []byte(text), memory(soundFiles()))
			if got := problems(t, err); len(got) != 1 || !strings.Contains(got[0].Error(), test.want) || got[0].Field != "crystal.host_law" {
				t.Errorf("problems %v, want one with %q", err, test.want)
			}
		})
	}
	_, err := parse("s.toml", []byte(strings.Replace(sound, `mineral = "quartz"`, "mineral = \"quartz\"\nhost_law = \"mine\"", 1)), memory(soundFiles()))
	if got := problems(t, err); len(got) != 1 || !strings.Contains(got[0].Error(), "this crystal has no host that could move") {
		t.Errorf("problems %v", err)
	}
}
