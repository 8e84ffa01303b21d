package study

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// followingStudy is the sound study with a host, conditions and another rim, its files
// with a melt and a rim against temperature; more are pairs of old and new text.
func followingStudy(t *testing.T, conditions, rim string, more ...string) (*Study, error) {
	t.Helper()
	files := soundFiles()
	files["melt.csv"] = "T [C],Ti [ppm]\n790,1000\n770,1400\n740,2000\n"
	files["cool.csv"] = "T [C],Ti [ppm]\n740,50\n760,60\n780,90\n"
	files["cooler.csv"] = "T [C],Ti [ppm]\n740,50\n760,60\n"
	files["twice.csv"] = "T [C],Ti [ppm]\n740,50\n760,60\n760,70\n"
	files["turns.csv"] = "T [C],Ti [ppm]\n740,50\n760,60\n750,70\n"
	files["neg.csv"] = "T [C],Ti [ppm]\n740,50\n790,-1\n"
	files["cold.csv"] = "T [C],Ti [ppm]\n-300,50\n790,1\n"
	text := strings.NewReplacer(more...).Replace(sound)
	text = strings.NewReplacer("[[threshold]]\n", "[conditions]\n"+conditions+"\n[[threshold]]\n", "[[law]]\n", "[[partition]]\nname = \"kx\"\nA = \"-100 kJ/mol\"\nB = \"10 kJ/mol\"\n\n[[law]]\n",
		`{ held = "skin" }`, rim, `"100 um" }`, `"100 um", host = 0.5 }`, `"20 um" }`, `"20 um", host = 0.4 }`).Replace(text)
	return parse("s.toml", []byte(text), memory(files))
}

// valueOf is the value of a rim that follows at a time, s.
func valueOf(r diffusion.Rim, h *thermal.History, t float64) float64 {
	if r.Equilibrium == nil {
		return r.Given.At(t)
	}
	_, temp := h.At(t)
	return math.Exp(r.Equilibrium.LnA - r.Equilibrium.E/temp)
}

const magmatic = "pressure = \"2 kbar\"\naTiO2 = 0.5\n"

// TestSaturatedRim: at 750 C and 2 kbar the notes on Ti in quartz print what each
// model gives, rounded to 0.1 ppm; a wt% is 10,000 ppm, and half the activity is
// half of it, but for Thomas only nearly: by mass.
func TestSaturatedRim(t *testing.T) {
	const digit, nearly = 0.05, 1e-3
	for key, ppm := range map[string]float64{"ti-quartz-wark2006": 102.4, "ti-quartz-thomas2010": 491.1, "ti-quartz-huang2012": 123.6, "ti-quartz-zhang2020": 207.2} {
		s, err := followingStudy(t, magmatic, `{ following = "`+key+`" }`)
		if err != nil {
			t.Fatal(err)
		}
		c := &s.Crystals[0]
		p, _, err := c.Problem(&c.Elements[0], s.Paths[0].History)
		if err != nil {
			t.Fatal(err)
		}
		if got := valueOf(p.Outer[0], s.Paths[0].History, 100*yr); !(math.Abs(got-ppm/2) <= digit+nearly*got) {
			t.Errorf("%s: %g ppm, want %g", key, got, ppm/2)
		}
		if all := c.Elements[0].Solubilities(); len(all) != 1 || all[0].Row.Key != key {
			t.Errorf("%s: relations %v", key, all)
		}
		if notes := strings.Join(s.Notes, "\n"); !strings.Contains(notes, "solubility by "+key) || strings.Contains(notes, "nothing in this study depends") {
			t.Errorf("%s: notes %s", key, notes)
		}
	}
}

// TestSaturatedNotes: pressures and temperatures outside those of the calibration
// are said with how far outside.
func TestSaturatedNotes(t *testing.T) {
	for _, test := range []struct{ conditions, key, want, beyond string }{
		{magmatic, "ti-quartz-thomas2010", "ti-quartz-thomas2010 is used at 2 kbar, 3 kbar below its calibrated 5 to 20 kbar", ""},
		{"pressure = \"5 kbar\"\naTiO2 = 1\n", "ti-quartz-zhang2020", "used at 5 kbar, 1 kbar above its calibrated 0.5 to 4 kbar", ""},
		{"pressure = \"10 kbar\"\naTiO2 = 1\n", "ti-quartz-huang2012", "", ""},
		{"aTiO2 = 1\n", "ti-quartz-wark2006", "no pressure given: ti-quartz-wark2006 was calibrated at 10 kbar", ""},
		{"pressure = \"2 kbar\"\naTiO2 = 1\n", "ti-quartz-wark2006", "used at 2 kbar, 8 kbar below its calibrated 10 kbar", ""},
		{"aTiO2 = 1\naSiO2 = 1\n", "ti-zircon-ferry2007", "is for zircon, but the crystal Q1 is quartz", ""},
		{magmatic, "ti-quartz-zhang2020", "", "used at 640 C, 60 C below, and at 1000 C, 100 C above its calibrated range of 700 to 900 C"},
	} {
		s, err := followingStudy(t, test.conditions, `{ following = "`+test.key+`" }`)
		if err != nil {
			t.Fatal(err)
		}
		notes := strings.Join(s.Notes, "\n")
		if !strings.Contains(notes, test.want) || test.want == "" && strings.Contains(notes, "calibrated") {
			t.Errorf("%s: notes %s, want %q", test.key, notes, test.want)
		}
		e := &s.Crystals[0].Elements[0]
		if got := s.Crystals[0].Beyond(e, s.Paths[0].History); len(got) != 0 {
			t.Errorf("%s from 750 to 780 C: %q", test.key, got)
		}
		if test.beyond == "" {
			continue
		}
		if got := e.Rims[0].Following.Solubility.beyond(640+zc, 1000+zc); !strings.HasSuffix(got, test.beyond) {
			t.Errorf("%q, want %q", got, test.beyond)
		}
	}
}

// TestRimByTemperature: tables of the melt and of the rim, straight between their
// rows, with a kink where the path passes a row.
func TestRimByTemperature(t *testing.T) {
	for _, test := range []struct {
		name, rim string
		value     func(c float64) float64
		kink      float64 // C, on the ramp from 750 to 780 C
	}{
		{"melt", `{ following = "kx", melt = "melt.csv", temperature = "T [C]", value = "Ti [ppm]" }`, func(c float64) float64 {
			melt := 2000 - 20*(c-740)
			if c > 770 {
				melt = 1400 - 20*(c-770)
			}
			return melt * math.Exp((-100e3*0.4+10e3)/(thermal.GasConstant*(c+zc)))
		}, 770},
		{"rim", `{ given = "cool.csv", temperature = "T [C]", value = "Ti [ppm]" }`, func(c float64) float64 {
			if c > 760 {
				return 60 + 1.5*(c-760)
			}
			return 50 + 0.5*(c-740)
		}, 760},
	} {
		t.Run(test.name, func(t *testing.T) {
			s, err := followingStudy(t, magmatic, test.rim)
			if err != nil {
				t.Fatal(err)
			}
			c := &s.Crystals[0]
			p, _, err := c.Problem(&c.Elements[0], s.Paths[0].History)
			if err != nil {
				t.Fatal(err)
			}
			g := p.Outer[0].Given
			for _, c := range []float64{750, 755, 762, 771, 779} {
				near(t, fmt.Sprintf("at %g C", c), g.At(800*yr+5*yr*(c-750)/30), test.value(c))
			}
			at := 800*yr + 5*yr*(test.kink-750)/30
			if !slices.ContainsFunc(g.Breaks, func(t float64) bool { return math.Abs(t-at) < 1 }) || len(g.Jumps) != 0 {
				t.Errorf("breaks at %g, jumps at %g, want a break at %g", g.Breaks, g.Jumps, at)
			}
		})
	}
}

// TestRimsThatChange: a list with every kind of rim, each from a moment of a leg.
func TestRimsThatChange(t *testing.T) {
	s, err := followingStudy(t, magmatic, `[
  { following = "kx", melt = "2000 ppm" },
  { following = "ti-quartz-huang2012", from = "100 yr after start of store" },
  { transfer = "60 +- 5 ppm", k = { k0 = "1e-3 m/s", E = "200 kJ/mol" }, from = "1 yr before end of store" },
  { held = "70 ppm", from = "end of store" },
  { given = "cool.csv", temperature = "T [C]", value = "Ti [ppm]", from = "1 yr after start of wake" },
  { following = "kx", melt = "melt.csv", temperature = "T [C]", value = "Ti [ppm]", from = "2 yr before end of wake" },
  { sealed = true, from = "1 yr before end of wake" },
]`)
	if err != nil {
		t.Fatal(err)
	}
	c := &s.Crystals[0]
	p, free, err := c.Problem(&c.Elements[0], s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	kinds := []diffusion.RimKind{diffusion.Following, diffusion.Following, diffusion.Transfer, diffusion.Held, diffusion.Prescribed, diffusion.Prescribed, diffusion.Sealed}
	for i, years := range []float64{0, 100, 799, 800, 801, 803, 804} {
		near(t, fmt.Sprintf("rim %d", i+1), p.Outer[i].From, years*yr)
		if p.Outer[i].Kind != kinds[i] {
			t.Errorf("rim %d is of kind %d", i+1, p.Outer[i].Kind)
		}
	}
	if len(free) != 2 || free[1].Name != "rim 3" || p.Free[1].Outer[2] != 1 {
		t.Errorf("free values %+v", free)
	}
}

// TestWrongFollowing: one fault, one report, at its key and with a remedy.
func TestWrongFollowing(t *testing.T) {
	const columns = `temperature = "T [C]", value = "Ti [ppm]"`
	for _, test := range []struct{ name, conditions, rim, field, problem, remedy string }{
		{"no activity", `pressure = "2 kbar"`, `{ following = "ti-quartz-huang2012" }`, "crystal.element.rim.following", "depends on aTiO2, not given", "aTiO2 = 0.6"},
		{"no pressure", `aTiO2 = 1`, `{ following = "ti-quartz-huang2012" }`, "crystal.element.rim.following", "depends on pressure, not given", `pressure = "2 kbar"`},
		{"no activity of silica", `aTiO2 = 1`, `{ following = "ti-zircon-ferry2007" }`, "crystal.element.rim.following", "depends on aSiO2, not given", "aSiO2 = 0.6"},
		{"solubility with a melt", magmatic, `{ following = "ti-quartz-huang2012", melt = "90 ppm" }`, "crystal.element.rim.melt", "without it", "leave it out"},
		{"mistyped", magmatic, `{ following = "ti-quartz-huang2021" }`, "crystal.element.rim.following", "no partition relation, solubility relation", `did you mean "ti-quartz-huang2012"?`},
		{"unknown", magmatic, `{ following = "henry" }`, "crystal.element.rim.following", "no partition relation, solubility relation", "known are kx, ba-"},
		{"melt without columns", magmatic, `{ following = "kx", melt = "melt.csv" }`, "crystal.element.rim.melt", "neither a value nor a file", "temperature ="},
		{"melt without one column", magmatic, `{ following = "kx", melt = "melt.csv", temperature = "T [C]" }`, "crystal.element.rim.value", "missing", "value ="},
		{"free melt", magmatic, `{ following = "kx", melt = "free" }`, "crystal.element.rim.melt", "known exactly", "90 ppm"},
		{"melt in no file", magmatic, `{ following = "kx", melt = "none.csv", ` + columns + ` }`, "crystal.element.rim.melt", "no such file", ""},
		{"path beyond the table", magmatic, `{ given = "cooler.csv", ` + columns + ` }`, "crystal.element.rim.given", "holds temperatures from 740 C to 760 C only, but the path needs 750 C to 780 C", "add rows"},
		{"rim beyond the table", magmatic, `[ "sealed", { following = "kx", melt = "cooler.csv", ` + columns + `, from = "start of wake" } ]`, "crystal.element.rim.melt", "but the path needs 750 C to 780 C", "add rows"},
		{"rim within the table", magmatic, `[ { following = "kx", melt = "cooler.csv", ` + columns + ` }, { sealed = true, from = "end of store" } ]`, "", "", ""},
		{"one temperature twice", magmatic, `{ given = "twice.csv", ` + columns + ` }`, "temperature", "the same temperature", "keep one"},
		{"out of order", magmatic, `{ given = "turns.csv", ` + columns + ` }`, "temperature", "not in order", "rising or falling"},
		{"below zero", magmatic, `{ given = "neg.csv", ` + columns + ` }`, "value", "below zero", "zero or more"},
		{"below absolute zero", magmatic, `{ given = "cold.csv", ` + columns + ` }`, "", "not above absolute zero", "unit"},
		{"against both", magmatic, `{ given = "cool.csv", time = "t [yr]", ` + columns + ` }`, "crystal.element.rim.time", "against temperature", "leave one"},
		{"counts", magmatic, `{ given = "cool.csv", counts = "after start", ` + columns + ` }`, "crystal.element.rim.counts", "against temperature", "leave one"},
	} {
		t.Run(test.name, func(t *testing.T) {
			_, err := followingStudy(t, test.conditions, test.rim)
			if test.problem == "" && test.remedy == "" {
				if err != nil {
					t.Error(err)
				}
				return
			}
			got := problems(t, err)
			if len(got) != 1 || test.field != "" && got[0].Field != test.field || !strings.Contains(got[0].Problem, test.problem) || !strings.Contains(got[0].Error(), test.remedy) {
				t.Errorf("problems %v, want %q: %q, %q", err, test.field, test.problem, test.remedy)
			}
		})
	}
}

// startOf is the pair that gives the following study another start.
func startOf(start string) []string {
	return []string{`{ zones = ["free", "58 ppm"], edge = "0 um" }`, start, `law = "quartz-ti-cherniak2007"`, "law = \"mine\"\npartition = \"kx\""}
}

// TestStartInEquilibrium: K times the melt, and what the models of Ti in quartz
// print for 750 and 800 C at 2 kbar; errors against finite differences of the values.
func TestStartInEquilibrium(t *testing.T) {
	const digit, step, curved = 0.05, 0.01, 1e-4
	kx := func(x, c float64) float64 { return math.Exp((-100e3*x + 10e3) / (thermal.GasConstant * (c + zc))) }
	huang := func(_, c float64) float64 { // Huang and Audetat (2012) at 2 kbar, times the activity
		return 0.5 * math.Pow(10, 5.6459-(2794.3+660.53*math.Pow(2, 0.35))/(c+zc))
	}
	for _, test := range []struct {
		name, start string
		value       func(x, c float64) float64
		melt, error [2]float64 // of core and skin
		digit       float64
	}{
		{"melt", `{ melt = ["2000 +- 300 ppm", 1400], unit = "ppm", temperature = ["750 C", "800 +- 20 C"] }`, kx, [2]float64{2000, 1400}, [2]float64{300, 0}, 0},
		{"both unsure", `{ melt = ["2000 ppm", "1400 +- 200 ppm"], temperature = ["750 C", "800 +- 20 C"], edge = "0 um" }`, kx, [2]float64{2000, 1400}, [2]float64{0, 200}, 0},
		{"saturated", `{ solubility = "ti-quartz-huang2012", temperature = ["750 C", "800 +- 20 C"], edge = "0 um" }`, huang, [2]float64{1, 1}, [2]float64{}, 0},
		{"saturated, as printed", `{ solubility = "ti-quartz-huang2012", temperature = ["750 C", "800 +- 20 C"], edge = "0 um" }`,
			func(_, c float64) float64 { return map[float64]float64{750: 123.6, 800: 181.0}[math.Round(c)] / 2 }, [2]float64{1, 1}, [2]float64{}, digit},
	} {
		t.Run(test.name, func(t *testing.T) {
			s, err := followingStudy(t, magmatic, `{ held = "skin" }`, startOf(test.start)...)
			if err != nil {
				t.Fatal(err)
			}
			for i, x := range []float64{0.5, 0.4} {
				p := s.Crystals[0].Elements[0].Start.Zones[i]
				c, off := 750+50*float64(i), 20*float64(i)
				value := test.melt[i] * test.value(x, c)
				if p.Free || !(math.Abs(p.Value-value) <= test.digit+1e-9*value) {
					t.Errorf("zone %d: %+v, want %g", i, p, value)
				}
				if test.digit > 0 {
					continue
				}
				slope := test.melt[i] * (test.value(x, c+step) - test.value(x, c-step)) / (2 * step)
				if want := math.Hypot(slope*off, test.error[i]*test.value(x, c)); !(math.Abs(p.Sigma-want) <= curved*want) {
					t.Errorf("zone %d: error %g, want %g", i, p.Sigma, want)
				}
			}
			if notes := strings.Join(s.Notes, "\n"); !strings.Contains(notes, "Ti: skin starts in equilibrium at 800 C, at ") {
				t.Errorf("notes %s", notes)
			}
		})
	}
}

// TestStartBeyond: a start outside the calibrated temperatures says so.
func TestStartBeyond(t *testing.T) {
	s, err := followingStudy(t, magmatic, `{ held = "skin" }`, startOf(`{ solubility = "ti-quartz-zhang2020", temperature = ["650 C", "800 C"], edge = "0 um" }`)...)
	if err != nil {
		t.Fatal(err)
	}
	const want = "Ti: start of core: solubility ti-quartz-zhang2020: used at 650 C, 50 C below its calibrated range of 700 to 900 C"
	if !slices.Contains(s.Notes, want) {
		t.Errorf("notes %q, want %q", s.Notes, want)
	}
	if all := s.Crystals[0].Elements[0].Solubilities(); len(all) != 1 || all[0].Row.Key != "ti-quartz-zhang2020" {
		t.Errorf("relations %+v", all)
	}
}

func TestWrongStarts(t *testing.T) {
	for _, test := range []struct{ name, conditions, start, field, problem, remedy string }{
		{"free melt", magmatic, `{ melt = ["free", "9 ppm"], temperature = ["760 C", "790 C"] }`, "melt", "cannot be free", "zones ="},
		{"one melt", magmatic, `{ melt = "9 ppm", temperature = ["760 C", "790 C"] }`, "melt", "not a list", "one value a zone"},
		{"one temperature", magmatic, `{ solubility = "ti-quartz-wark2006", temperature = ["760 C"] }`, "temperature", "1 value for 2 zones", "core, skin"},
		{"bare temperature", magmatic, `{ solubility = "ti-quartz-wark2006", temperature = [760, "790 C"] }`, "temperature", "without a unit", "790 +- 10 C"},
		{"no temperature of a rock", magmatic, `{ solubility = "ti-quartz-wark2006", temperature = ["-300 C", "790 C"] }`, "temperature", "absolute zero", "-273.15 C"},
		{"unsure temperature", magmatic, `{ solubility = "ti-quartz-wark2006", temperature = ["760 +- 700 C", "790 C"] }`, "temperature", "its error is more", "check the unit"},
		{"unknown solubility", magmatic, `{ solubility = "ti-quartz-wark2005", temperature = ["760 C", "790 C"] }`, "solubility", "no solubility relation", "ti-quartz-wark2006"},
		{"no activity", `pressure = "2 kbar"`, `{ solubility = "ti-quartz-wark2006", temperature = ["760 C", "790 C"] }`, "solubility", "depends on aTiO2, not given", "aTiO2 = 0.6"},
		{"unit of nothing", magmatic, `{ solubility = "ti-quartz-wark2006", temperature = ["760 C", "790 C"], unit = "ppm" }`, "unit", "no bare numbers", "leave it out"},
		{"more than all", magmatic, `{ melt = ["2000 +- 1e5 wt%", "9 ppm"], temperature = ["760 C", "790 C"] }`, "melt", "more than all", "check the unit"},
	} {
		t.Run(test.name, func(t *testing.T) {
			_, err := followingStudy(t, test.conditions, `{ held = "skin" }`, startOf(test.start)...)
			got := problems(t, err)
			if len(got) != 1 || got[0].Field != "crystal.element.start."+test.field || !strings.Contains(got[0].Problem, test.problem) || !strings.Contains(got[0].Remedy, test.remedy) {
				t.Errorf("problems %v, want %q: %q, %q", err, test.field, test.problem, test.remedy)
			}
		})
	}
}

// TestStartInDrawnHost: where the host of a zone is drawn anew, what it started with in
// equilibrium with the same melt goes as K, and so does a rim that is tied to it.
func TestStartInDrawnHost(t *testing.T) {
	s, err := followingStudy(t, magmatic, `{ held = "skin" }`, startOf(`{ melt = ["2000 ppm", "1400 +- 100 ppm"], temperature = ["750 C", "800 C"], edge = "0 um" }`)...)
	if err != nil {
		t.Fatal(err)
	}
	drawn := s.Crystals[0]
	drawn.Zones = slices.Clone(drawn.Zones)
	drawn.Zones[1].Host = 0.43
	p, _, err := drawn.Problem(&drawn.Elements[0], s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	ratio := math.Exp(-100e3 * 0.03 / (thermal.GasConstant * (800 + zc)))
	skin := drawn.Elements[0].Start.Zones[1].Value
	if p.Zones[0].Form != nil {
		t.Error("the core's host is as it was")
	}
	near(t, "form", p.Zones[1].Form(110*um), ratio)
	near(t, "rim", p.Outer[0].Value, ratio*skin)
	near(t, "what the plateau does to it", p.Free[0].Outer[0], ratio)
}
