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

func TestEveryKeyConditions(t *testing.T) {
	c := everyKey(t).Conditions
	near(t, "pressure", c.Given[catalogue.Pressure], 2e8)
	near(t, "aSiO2", c.Given[catalogue.ASiO2], 0.6)
	near(t, "aTiO2", c.Given[catalogue.ATiO2], 0.7)
	near(t, "offset", c.Offset, 0.3)
	if c.Buffer == nil || c.Buffer.Names[0] != "NNO" || c.gives("XAn") || !c.gives(catalogue.FO2) {
		t.Errorf("conditions %+v", c)
	}
	if want := []string{"pressure 2 kbar", "fO2 NNO+0.3", "aTiO2 0.7", "aSiO2 0.6"}; !slices.Equal(c.Typed, want) {
		t.Errorf("typed %q", c.Typed)
	}
	// by hand: NNO at 1000 K and 2000 bar is -24.93 + 9.36 + 0.046 x 1999/1000 in bar, plus 5 for Pa
	near(t, "log10 fO2 at 1000 K", c.Fugacity().Log10(1000), -24.93+9.36+0.046*1.999+0.3+5)
}

// TestEveryKeyHosts compares D in each zone with the published formulas, typed
// here once more.
func TestEveryKeyHosts(t *testing.T) {
	s := everyKey(t)
	c := &s.Crystals[1]
	if !c.Hosted || c.Zones[0].Host != 0.55 || c.Zones[1].Host != 0.35 || s.Crystals[0].Hosted {
		t.Fatalf("crystal %+v", c)
	}
	const temp = 1000.0
	rt := thermal.GasConstant * temp
	log10FO2 := -24930/temp + 9.36 + 0.046*1999/temp + 0.3 + 5
	for i, want := range []func(x float64) float64{
		func(x float64) float64 { return math.Ln10*(-4.08-4.1*x) - 276e3/rt },                        // Giletti & Casserly 1994
		func(x float64) float64 { return math.Log(1e-9) + 3*x - 250e3/rt },                           // the study's own
		func(float64) float64 { return math.Log(1.25e-4) + 2.6*math.Log(0.6) - 320.92e3/rt },         // Faak et al. 2013
		func(float64) float64 { return math.Log(1.65e-11) + 0.31*math.Ln10*(log10FO2+7) - 193e3/rt }, // Coogan et al. 2005
		func(x float64) float64 { return math.Log(8.3e-5) - 9.44*(x-0.5) - 276e3/rt },                // the study's own
	} {
		e := &c.Elements[i]
		p, _, err := c.Problem(e, s.Paths[0].History)
		if err != nil {
			t.Fatal(err)
		}
		for j, times := range []float64{1, 0.5} {
			got := p.Law.In(1).LnD(temp) + math.Log(p.Zones[j].Times)
			near(t, fmt.Sprintf("ln D of %s in %s", e.Name, c.Zones[j].Name), got, want(c.Zones[j].Host)+math.Log(times))
			near(t, "host", p.Zones[j].Host, c.Zones[j].Host)
		}
		if (p.LnK != nil) != (e.Partition != nil) {
			t.Errorf("%s: coupled %v", e.Name, p.LnK != nil)
		}
	}
	least, most := c.Factors(&c.Elements[0])
	near(t, "least factor", least, math.Pow(10, -4.1*0.55))
	near(t, "largest factor", most, 0.5*math.Pow(10, -4.1*0.35))
}

func TestEveryKeyPartitions(t *testing.T) {
	e := everyKey(t).Crystals[1].Elements
	sr, ba := e[0].Partition, e[1].Partition
	if sr == nil || sr.Row == nil || ba == nil || ba.Row != nil || ba.Key != "kx" || e[2].Partition != nil {
		t.Fatalf("partitions %+v, %+v", sr, ba)
	}
	near(t, "ln K of Sr", sr.LnK(0.5, 1000), (-26.8e3*0.5+26.7e3)/(thermal.GasConstant*1000))
	near(t, "ln K of Ba", ba.LnK(0.5, 1000), (-26.7e3*0.5+26.7e3)/(thermal.GasConstant*1000))
	if !slices.Equal(sr.Cautions(), []string{catalogue.NotChecked}) || ba.Cautions() != nil {
		t.Errorf("cautions %q, %q", sr.Cautions(), ba.Cautions())
	}
	if got := e[3].Law.Cautions(); !slices.Contains(got, "the NNO buffer: "+catalogue.NotChecked) {
		t.Errorf("a law along a buffer has the cautions %q", got)
	}
}

// hostedStudy is the sound study as a plagioclase with a host.
func hostedStudy() string {
	return strings.NewReplacer(
		`mineral = "quartz"`, `mineral = "plagioclase"`,
		`width = "100 um" }`, `width = "100 um", host = 0.55 }`,
		`width = "20 um" }`, `width = "20 um", host = 0.35 }`,
		`name = "Ti"`, `name = "Sr"`,
		`law = "quartz-ti-cherniak2007"`, "law = \"plagioclase-sr-giletti1994\"\npartition = \"sr-blundy1991\"",
		`value = "Ti [ppm]"`, `value = "Ti [ppm]"`).Replace(sound)
}

func TestHostNotes(t *testing.T) {
	const bar = "[conditions]\n"
	for _, test := range []struct{ name, old, new, want string }{
		{"nothing", "", "", ""},
		{"outside the calibrated hosts", "sr-blundy1991", "sr-bindeman1998", "Sr: partition sr-bindeman1998 was calibrated for XAn 0.4 to 0.8, but zone skin has 0.35"},
		{"another element's", "sr-blundy1991", "ba-blundy1991", "Sr: partition ba-blundy1991 is for Ba: is it the right one?"},
		{"another mineral's", `"plagioclase"`, `"sanidine"`, "Sr: partition sr-blundy1991 is for plagioclase, but the crystal Q1 is sanidine: is it the right one?"},
		{"host of no use", "law = \"plagioclase-sr-giletti1994\"\npartition = \"sr-blundy1991\"", `law = "mine"`, "Q1: its host changes nothing: no element has a partition relation or a law that depends on it"},
		{"pressure of no use", "[[threshold]]", bar + "pressure = \"2 kbar\"\n[[threshold]]", "conditions: nothing in this study depends on pressure"},
		{"aSiO2 of no use", "[[threshold]]", bar + "aSiO2 = 0.6\n[[threshold]]", "conditions: nothing in this study depends on aSiO2"},
		{"aTiO2 of no use", "[[threshold]]", bar + "aTiO2 = 0.6\n[[threshold]]", "conditions: nothing in this study depends on aTiO2"},
		{"absolute fO2", "[[threshold]]", bar + "fO2 = \"1e-12 bar\"\n[[threshold]]", `fO2 is held at 1e-12 bar at every temperature`},
		{"buffer of no use", "[[threshold]]", bar + "fO2 = \"QFM\"\n[[threshold]]", "conditions: nothing in this study depends on fO2"},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := hostedStudy()
			if test.old != "" && strings.Count(text, test.old) != 1 {
				t.Fatalf("%q is there %d times", test.old, strings.Count(text, test.old))
			}
			s, err := parse("s.toml", []byte(strings.Replace(text, test.old, test.new, 1)), memory(soundFiles()))
			if err != nil {
				t.Fatal(err)
			}
			notes := strings.Join(s.Notes, "\n")
			if test.want == "" && notes != "" || !strings.Contains(notes, test.want) {
				t.Errorf("notes %q, want %q", s.Notes, test.want)
			}
		})
	}
}

// TestBufferWithoutPressure: the pressure of a buffer is 1 bar unless it is given,
// and then it counts as used.
func TestBufferWithoutPressure(t *testing.T) {
	base := strings.Replace(sound, `"quartz-ti-cherniak2007"`, `"olivine-ca-coogan2005-a"`, 1)
	for _, test := range []struct {
		pressure, note string
		atBar          float64 // bar
	}{
		{"", "no pressure given: the QFM buffer is taken at 1 bar", 1},
		{"pressure = \"2 kbar\"\n", "", 2000},
	} {
		text := strings.Replace(base, "[[threshold]]", "[conditions]\n"+test.pressure+"fO2 = \"FMQ - 1\"\n[[threshold]]", 1)
		s, err := parse("s.toml", []byte(text), memory(soundFiles()))
		if err != nil {
			t.Fatal(err)
		}
		if notes := strings.Join(s.Notes, "\n"); !strings.Contains(notes, test.note) || strings.Contains(notes, "pressure") != (test.note != "") {
			t.Errorf("notes %q, want %q", notes, test.note)
		}
		log10FO2 := -25096.3/1500 + 8.735 + 0.110*(test.atBar-1)/1500 - 1 + 5
		near(t, "ln D at 1500 K", s.Crystals[0].Elements[0].Law.Law.LnD(1500),
			math.Log(1.65e-11)+0.31*math.Ln10*(log10FO2+7)-193e3/(thermal.GasConstant*1500))
	}
}

// TestFugacityConstant: a law at an fO2 that stays the same says so.
func TestFugacityConstant(t *testing.T) {
	text := strings.Replace(sound, `"quartz-ti-cherniak2007"`, `"olivine-ca-coogan2005-a"`, 1)
	text = strings.Replace(text, "[[threshold]]", "[conditions]\nfO2 = \"1e-12 bar\"\n[[threshold]]", 1)
	s, err := parse("s.toml", []byte(text), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	law := s.Crystals[0].Elements[0].Law
	if got := law.Cautions(); !slices.Contains(got, "fO2 held at 1e-07 Pa at every temperature") {
		t.Errorf("cautions %q", got)
	}
	// At the reference of the paper's fO2 term, 1e-7 Pa, nothing is added.
	near(t, "ln D", law.Law.LnD(1500), math.Log(1.65e-11)-193e3/(thermal.GasConstant*1500))
}

func TestWrongHosts(t *testing.T) {
	const law, skin, core = `law = "quartz-ti-cherniak2007"`, `{ name = "skin", width = "20 um" }`, `{ name = "core", width = "100 um" }`
	const threshold = "[[threshold]]"
	given := func(line string) string { return "[conditions]\n" + line + "\n" + threshold }
	const slab = `shape = "slab"`
	const zones = core + ",\n  " + skin
	hosts := func(x string) string {
		return `{ name = "core", width = "100 um", host = ` + x + " },\n" + `{ name = "skin", width = "20 um", host = 0.3 }`
	}
	list := []wrong{
		{"host law without a host", law, `law = @"plagioclase-sr-giletti1994"`, "", "crystal.element.law", "depends on XAn, not given", "give every zone of the crystal its host, such as host = 0.55"},
		{"own host law without a host", law, `law = @{ D0 = "1e-9 m2/s", E = "250 kJ/mol", host = { ln_slope = 3, at = 0 } }`, "", "crystal.element.law", "depends on the host", "host = 0.55"},
		{"named host law without a host", `E = "273 kJ/mol"` + "\n\n[[path]]", `E = "273 kJ/mol"` + "\nhost = { ln_slope = @\"3 +- x\" }\n\n[[path]]", "", "law.host.ln_slope", "not a plain number", "10 +- 3"},
		{"host law known too badly", law, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", host = { ln_slope = @"-9 +- 40" } }`, "", "crystal.element.law.host.ln_slope", "not from -100 to 100 with 3 standard deviations", "ln_slope"},
		{"slope of no law", law, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", host = { slope_of = @"plagioclase-sr-gilleti1994" } }`, "", "crystal.element.law.host.slope_of", "catalogue", "plagioclase-sr-giletti1994"},
		{"slope of a law without", law, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", host = { slope_of = @"plagioclase-mg-faak2013" } }`, "", "crystal.element.law.host.slope_of", "does not depend on a host", "slope_of ="},
		{"two slopes", law, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", host = { slope_of = "plagioclase-sr-giletti1994", ln_slope = @3 } }`, "", "crystal.element.law.host.ln_slope", "beside one taken from another law", "leave one"},
		{"host law without a slope", law, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", host = @{ at = 0 } }`, "", "crystal.element.law.host.ln_slope", "missing", "ln_slope = -9.4"},
		{"host law too steep", law, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", host = { ln_slope = @-3000 } }`, "", "crystal.element.law.host.ln_slope", "not from -100 to 100", "ln_slope"},
		{"host law at no host", law, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", host = { ln_slope = 0, at = @50 } }`, "", "crystal.element.law.host.at", "not from 0 to 1", "mole fraction"},
		{"host law mistyped", law, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", host = { @lnslope = 3, ln_slope = 0 } }`, "", "crystal.element.law.host.lnslope", "unknown key", `did you mean "ln_slope"?`},
		{"partition without a host", law, law + "\npartition = @\"sr-blundy1991\"", "", "crystal.element.partition", "needs the host's composition", "host = 0.55"},
		{"partition of no key", law, law + "\npartition = @\"sr-blundy1992\"", "", "crystal.element.partition", "no partition relation of the catalogue", "sr-blundy1991"},
		{"host in one zone", skin, `{ name = "skin", width = "20 um", host = 0.3 }`, "s.toml:24:9", "crystal.zones", "no host in core, but in skin", "every zone"},
		{"host in per cent", zones, hosts(`@55`), "", "crystal.zones.host", "not from 0 to 1", "host = 0.55 for An55"},
		{"host with its error in per cent", zones, hosts(`@"0.55 +- 2"`), "", "crystal.zones.host", "more than 0.28", `"0.55 +- 0.02"`},
		{"uncertain host in per cent", zones, hosts(`@"55 +- 2"`), "", "crystal.zones.host", "not from 0 to 1", `"0.55 +- 0.02"`},
		{"host with a unit", zones, hosts(`@"0.55 mole fraction"`), "", "crystal.zones.host", "has a unit", "10 +- 3"},
		{"host of a zone in a list", zones, hosts(`@[0.55]`), "", "crystal.zones.host", "a list, not a text", `"0.55 +- 0.02"`},
		{"host of a zone from a file", zones, hosts(`@{ file = "an.csv" }`), "", "crystal.zones.host", "a table, not the host of one zone", "once for the crystal"},
		{"host in two ways", "shape = \"slab\"\nzones = [\n  " + zones, "shape = \"slab\"\nhost = " + hostFile("@", "", "") + "\nzones = [\n" + hosts("0.5"), "", "crystal.host", "have a host already", "one way"},
		{"host not smoothed", slab, slab + "\nhost = @" + strings.Replace(hostFile("", "", ""), `, smooth = "steps"`, "", 1), "", "crystal.host.smooth", "missing", "steps"},
		{"host by a spline of no width", slab, slab + "\nhost = @" + hostFile("", `"steps"`, `"spline"`), "", "crystal.host.width", "missing", "8 um"},
		{"host by a spline of a bare width", slab, slab + "\nhost = " + hostFile("", `"steps"`, `"spline", width = @8`), "", "crystal.host.width", "without a unit", "in quotes"},
		{"host by a spline wider than all", slab, slab + "\nhost = " + hostFile("", `"steps"`, `"spline", width = @"120 um"`), "", "crystal.host.width", "wider than the traverse, which is 98 um long", "spacing"},
		{"host by a spline through few points", slab, slab + "\nhost = " + hostFile("", `"an.csv"`, `@"few.csv", width = "8 um"`, `"steps"`, `"spline"`), "", "crystal.host.file", "2 points", "steps"},
		{"host in steps of a width", slab, slab + "\nhost = " + hostFile("", `"steps"`, `"steps", width = @"8 um"`), "", "crystal.host.width", "steps have no width", "spline"},
		{"host with a bare error", slab, slab + "\nhost = " + hostFile("", `"steps"`, `"steps", error = @0.01`), "", "crystal.host.error", "without a unit", ""},
		{"host with an error mistyped", slab, slab + "\nhost = " + hostFile("", `"steps"`, `"steps", error = { @colum = "s", size = "2 %" }`), "", "crystal.host.error.colum", "unknown key", `did you mean "column"?`},
		{"host with an error of ppm", slab, slab + "\nhost = " + hostFile("", `"steps"`, `"steps", error = @"2 ppm"`), "", "crystal.host.error", "does not convert", "unit of the values"},
		{"host smoothed otherwise", slab, slab + "\nhost = " + hostFile("", `"steps"`, `@"step"`), "", "crystal.host.smooth", "no way to smooth", `did you mean "steps"?`},
		{"host in weight", slab, slab + "\nhost = " + hostFile("", `"XAn [mole fraction]"`, `@"An wt [wt%]"`), "", "crystal.host.value", "a host is a mole fraction", "mol%"},
		{"host of no file", slab, slab + "\nhost = " + hostFile("", `"an.csv"`, `@"none.csv"`), "", "crystal.host.file", "no such file", ""},
		{"host beyond the rim", slab, slab + "\nhost = " + hostFile("", `"an.csv"`, `"far.csv"`), "far.csv:3:0", "position", "outside the crystal", "widths"},
		{"host above one", slab, slab + "\nhost = " + hostFile("", `"an.csv"`, `"much.csv"`), "much.csv:2:0", "value", "no mole fraction", "unit"},
		{"host in one zone only", slab, slab + "\nhost = " + hostFile("", `"an.csv"`, `@"few.csv"`), "", "crystal.host.file", "no point of the host lies in zone core", "by hand"},
		{"partition without B", threshold, "[[@partition]]\nname = \"kx\"\nA = \"-1 kJ/mol\"\n" + threshold, "", "partition.B", "missing", "26.7 kJ/mol"},
		{"partition without a unit", threshold, "[[partition]]\nname = \"kx\"\nA = @-26.7\nB = \"0 kJ/mol\"\n" + threshold, "", "partition.A", "without a unit", "-26.7 kJ/mol"},
		{"partition beyond bounds", threshold, "[[partition]]\nname = \"kx\"\nA = @\"-26.7e3 kJ/mol\"\nB = \"0 kJ/mol\"\n" + threshold, "", "partition.A", "more than 500 kJ/mol", "check the unit"},
		{"partition named like a published one", threshold, "[[partition]]\nname = @\"sr-blundy1991\"\nA = \"-1 kJ/mol\"\nB = \"0 kJ/mol\"\n" + threshold, "", "partition.name", "of the catalogue", "another name"},
		{"fO2 law without fO2", law, `law = @"olivine-ca-coogan2005-a"`, "", "crystal.element.law", "depends on fO2, not given", `write [conditions] and below it fO2 = "NNO+0.3"; or run bankfire laws olivine-ca-coogan2005-a`},
		{"pressure law without pressure", law, `law = @"garnet-fe-ganguly1998"`, "", "crystal.element.law", "depends on pressure, not given", `pressure = "2 kbar"`},
		{"aSiO2 law without aSiO2", law, `law = @"plagioclase-mg-faak2013"`, "", "crystal.element.law", "depends on aSiO2, not given", "aSiO2 = 0.6"},
		{"no such buffer", threshold, given(`fO2 = @"IW+1"`), "", "conditions.fO2", "no known buffer", "known are NNO, QFM, FMQ"},
		{"buffer in lower case", threshold, given(`fO2 = @"nno"`), "", "conditions.fO2", "no known buffer", `did you mean "NNO"?`},
		{"offset of no number", threshold, given(`fO2 = @"NNO+half"`), "", "conditions.fO2", "no number of log10 units", "NNO+0.3"},
		{"offset too large", threshold, given(`fO2 = @"NNO+30"`), "", "conditions.fO2", "more than 10 log10 units", "NNO+0.3"},
		{"fO2 bare", threshold, given(`fO2 = @-7`), "", "conditions.fO2", "without a unit", "1e-7 Pa"},
		{"fO2 of no pressure", threshold, given(`fO2 = @"7 C"`), "", "conditions.fO2", "is a temperature", "want a pressure"},
		{"pressure bare", threshold, given(`pressure = @2`), "", "conditions.pressure", "without a unit", "2 kbar"},
		{"pressure below zero", threshold, given(`pressure = @"-2 kbar"`), "", "conditions.pressure", "below zero", "2 kbar"},
		{"activity of none", threshold, given(`aSiO2 = @0`), "", "conditions.aSiO2", "not above 0", "1 is saturation"},
		{"activity in quotes", threshold, given(`aTiO2 = @"0.6"`), "", "conditions.aTiO2", "a text, not a number", "such as 0.6"},
		{"condition mistyped", threshold, given(`@presure = "2 kbar"`), "", "conditions.presure", "unknown key", `did you mean "pressure"?`},
		{"conditions not a table", `title = "sound"`, `conditions = @"2 kbar"`, "", "conditions", "a text, not a table", "[conditions]"},
	}
	for _, w := range list {
		t.Run(w.name, func(t *testing.T) { w.check(t) })
	}
}

// hostFile is a host from a file with a mark before it and some things changed.
func hostFile(mark string, oldnew ...string) string {
	const sound = `{ file = "an.csv", position = "x [um]", zero = "rim", value = "XAn [mole fraction]", smooth = "steps" }`
	return mark + strings.NewReplacer(oldnew...).Replace(sound)
}

// TestHostFile: each zone has the median of the points in it, counted from either
// end and in either unit.
func TestHostFile(t *testing.T) {
	for name, host := range map[string]string{
		"from the rim":    hostFile("", "", ""),
		"in mol%":         hostFile("", `"XAn [mole fraction]"`, `"An [mol%]"`),
		"unit beside":     hostFile("", `"XAn [mole fraction]"`, `"bare", unit = "mole fraction"`),
		"from the centre": hostFile("", `"x [um]", zero = "rim"`, `"from middle [um]", zero = "centre"`),
	} {
		t.Run(name, func(t *testing.T) {
			text := strings.NewReplacer(`, host = 0.55`, "", `, host = 0.35`, "", `shape = "slab"`, "shape = \"slab\"\nhost = "+host).Replace(hostedStudy())
			s, err := parse("s.toml", []byte(text), memory(soundFiles()))
			if err != nil {
				t.Fatal(err)
			}
			c := s.Crystals[0]
			if !c.Hosted || len(s.Inputs) != 3 {
				t.Errorf("hosted %v, %d inputs", c.Hosted, len(s.Inputs))
			}
			near(t, "core, the median of four", c.Zones[0].Host, 0.545)
			near(t, "skin, the median of three", c.Zones[1].Host, 0.36)
			if want := "Q1: host of zone core is 0.545, the median of 4 points from 0.41 to 0.56"; !slices.Contains(s.Notes, want) {
				t.Errorf("notes %q lack %q", s.Notes, want)
			}
		})
	}
}

// TestWrongHosted holds faults that need a study with a host.
func TestWrongHosted(t *testing.T) {
	const own = "[[partition]]\nname = \"mykx\"\nA = \"-400 kJ/mol\"\nB = \"0 kJ/mol\"\n[[threshold]]"
	for _, test := range []struct{ name, old, new, want string }{
		{"partition of the study mistyped", `"sr-blundy1991"`, `"mykz"`, `did you mean "mykx"?`},
		{"grey levels", `value = "Ti [ppm]"`, `value = "Ti [ppm]", unit = "grey"`, ""},
		{"too cold for the relation", `"sr-blundy1991"`, `"mykx"`, "its partition relation gives K = exp("},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := strings.Replace(hostedStudy(), "[[threshold]]", own, 1)
			text = strings.Replace(text, test.old, test.new, 1)
			text = strings.Replace(text, `hold = "750 C"`, `hold = "-200 C"`, 1)
			files := soundFiles()
			if test.name == "grey levels" {
				files["q1.csv"] = "x [um],Ti [grey]\n1,58\n30,70\n"
				text = strings.Replace(text, `value = "Ti [ppm]", unit = "grey"`, `value = "Ti [grey]"`, 1)
				text = strings.Replace(text, `zones = ["free", "58 ppm"]`, `zones = ["free", "free"]`, 1)
				test.want = "relative values have no zero"
			}
			_, err := parse("s.toml", []byte(text), memory(files))
			if got := problems(t, err); len(got) != 1 || !strings.Contains(got[0].Error(), test.want) {
				t.Errorf("problems %v, want one with %q", err, test.want)
			}
		})
	}
}
