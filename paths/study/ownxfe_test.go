package study

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// ironStudy is a study of one element in an olivine, with its law, its unit and
// the starts of its zones.
const ironStudy = `[conditions]
pressure = "3 kbar"
fO2 = "2e-8 Pa"
[[law]]
name = "mine"
D0 = "1e-9 m2/s"
E = "250 kJ/mol"
[[path]]
name = "warm"
legs = [ { hold = "1100 C", for = "1 yr" } ]
[[crystal]]
name = "OL-1"
mineral = "olivine"
shape = "slab"
zones = [ { name = "core", width = "100 um"%s }, { name = "skin", width = "20 um"%s } ]
[[crystal.element]]
name = "%s"
law = %s
start = { zones = [%s], edge = "0 um" }
rim = "sealed"
`

// iron reads the study.
func iron(hosts [2]string, name, law, starts string) (*Study, error) {
	text := fmt.Sprintf(ironStudy, hosts[0], hosts[1], name, law, starts)
	return parse("s.toml", []byte(text), memory(nil))
}

// TestOwnXFe compares D with the formulas that the papers print, at the XFe that
// each way of writing a value stands for. By hand, 3 (XFe - 0.1) is 0.3 at XFe 0.2,
// so that D is 1.995 times that at the reference.
func TestOwnXFe(t *testing.T) {
	const (
		temp = 1350.0
		rt   = thermal.GasConstant * temp
		// ln D of the catalogue is ln 10 times a sum of numbers of size 10, and E/(R T) about 20.
		sameLnD = 1e-12 * 50
	)
	tamed := func(xFe float64) float64 {
		return math.Ln10*(-9.21+math.Log10(2e-8/1e-7)/6+3*(xFe-0.1)) - (201000+(3e8-1e5)*7e-6)/rt
	}
	opx := func(xFe float64) float64 { return math.Ln10 * (-9.54 + 2.6*xFe - 239880/(math.Ln10*rt)) }
	const olivine, pyroxene = `"olivine-femg-dohmen2007-tamed"`, `"orthopyroxene-femg-ganguly1994"`
	for _, test := range []struct {
		name, element, law, starts string
		iron                       func(c float64) float64 // of the values as kept
		want                       func(xFe float64) float64
		slope, at                  float64
	}{
		{"Fo of Mg", "Mg", olivine, `"80 Fo", "90 Fo"`, func(c float64) float64 { return 1 - c }, tamed, -3 * math.Ln10, 0.9},
		{"mole fraction of Mg", "Mg#", olivine, `"0.8 mole fraction", "0.9 mole fraction"`, func(c float64) float64 { return 1 - c }, tamed, -3 * math.Ln10, 0.9},
		{"mol% of Fo", "XFo", olivine, `"80 mol%", "90 mol%"`, func(c float64) float64 { return 1 - c/100 }, tamed, -0.03 * math.Ln10, 90},
		{"Fo of Fe", "Fe-Mg", olivine, `"80 Fo", "90 Fo"`, func(c float64) float64 { return c }, tamed, 3 * math.Ln10, 0.1},
		{"mol% of Fe", "Fe", olivine, `"20 mol%", "10 mol%"`, func(c float64) float64 { return c / 100 }, tamed, 0.03 * math.Ln10, 10},
		{"pyroxene", "Mg", pyroxene, `"0.8 mole fraction", "0.9 mole fraction"`, func(c float64) float64 { return 1 - c }, opx, -2.6 * math.Ln10, 1},
	} {
		t.Run(test.name, func(t *testing.T) {
			s, err := iron([2]string{}, test.element, test.law, test.starts)
			if err != nil {
				t.Fatal(err)
			}
			c := &s.Crystals[0]
			e := &c.Elements[0]
			near(t, "slope", e.Law.OwnSlope, test.slope)
			near(t, "at", e.Law.OwnAt, test.at)
			p, _, err := c.Problem(e, s.Paths[0].History)
			if err != nil {
				t.Fatal(err)
			}
			for i, xFe := range []float64{0.2, 0.1} {
				value := p.Zones[i].Start
				near(t, "XFe", test.iron(value), xFe)
				got := p.Law.LnD(temp) + math.Log(p.Own(value)*p.Zones[i].Times)
				if want := test.want(xFe); !(math.Abs(got-want) <= sameLnD) {
					t.Errorf("ln D at XFe %g is %.12g, want %.12g", xFe, got, want)
				}
			}
			if !slices.ContainsFunc(s.Notes, func(n string) bool { return strings.Contains(n, "XFe, on which its law depends, is ") }) {
				t.Errorf("notes %q", s.Notes)
			}
		})
	}
}

// TestXFeOfHost: a tracer has the XFe of the crystal that it moves in.
func TestXFeOfHost(t *testing.T) {
	const mn, law = `"900 ppm", "700 ppm"`, `"olivine-femg-dohmen2007-ped"`
	s, err := iron([2]string{", host = 0.2", ", host = 0.1"}, "Mn", law, mn)
	if err != nil {
		t.Fatal(err)
	}
	c := &s.Crystals[0]
	e := &c.Elements[0]
	if e.Law.OwnSlope != 0 {
		t.Error("D depends on Mn")
	}
	near(t, "factor in the core", c.Factor(e, 0), math.Pow(10, 0.3))
	near(t, "factor in the skin", c.Factor(e, 1), 1)
	const temp = 1350.0
	near(t, "ln D at XFe 0.1", e.Law.Law.LnD(temp), -8.91*math.Ln10-(220000+(3e8-1e5)*7e-6)/(thermal.GasConstant*temp))
	if want := "Mn: XFe, on which its law depends, is that of the host, which stays as it is"; !slices.Contains(s.Notes, want) {
		t.Errorf("notes %q", s.Notes)
	}
	_, err = iron([2]string{}, "Mn", law, mn)
	if got := problems(t, err); len(got) != 1 || got[0].Line != 18 || !strings.Contains(got[0].Problem, "depends on XFe, not given") || !strings.Contains(got[0].Remedy, "host = 0.12") {
		t.Errorf("problems %v", err)
	}
}

// TestXFeOfHostFile: a measured Fo is the XFe that laws ask for.
func TestXFeOfHostFile(t *testing.T) {
	for header, rows := range map[string]string{
		"Fo [mol%]": "10,90\n60,80\n", "fo [Fo]": "10,90\n60,80\n", "XFo [mole fraction]": "10,0.9\n60,0.8\n",
		"XFe [mole fraction]": "10,0.1\n60,0.2\n", "Fa [mol%]": "10,10\n60,20\n",
	} {
		text := fmt.Sprintf(ironStudy, "", "", "Mn", `"olivine-femg-dohmen2007-ped"`, `"900 ppm", "700 ppm"`)
		text = strings.Replace(text, "shape =", `host = { file = "h.csv", position = "x [um]", zero = "rim", value = "`+header+`", smooth = "steps" }`+"\nshape =", 1)
		s, err := parse("s.toml", []byte(text), memory(map[string]string{"h.csv": "x [um]," + header + "\n" + rows}))
		if err != nil {
			t.Fatal(err)
		}
		c := &s.Crystals[0]
		// 1 - 0.9 is off by a unit of round-off of 1, which is more of 0.1
		const roundOff = 1e-15
		if core, skin := c.Zones[0].Host, c.Zones[1].Host; !(math.Abs(core-0.2) <= roundOff) || !(math.Abs(skin-0.1) <= roundOff) {
			t.Errorf("%s: XFe %g in the core and %g in the skin", header, core, skin)
		}
		noted := slices.ContainsFunc(s.Notes, func(n string) bool { return strings.Contains(n, "is read as XFe") })
		if noted != strings.Contains(strings.ToLower(header), "fo") {
			t.Errorf("%s: notes %q", header, s.Notes)
		}
	}
}

// TestXFeUntold: values that count no moles do not tell XFe.
func TestXFeUntold(t *testing.T) {
	for unit, starts := range map[string]string{
		"ppm": `"900 ppm", "700 ppm"`, "%": `"45 %", "40 %"`, "grey": `"90 grey", "70 grey"`,
	} {
		for _, law := range []string{`"olivine-femg-dohmen2007-tamed"`,
			`{ a = "olivine-femg-dohmen2007-ped", b = "mine", c = "mine", normal = ["0 deg", "90 deg", "90 deg"] }`} {
			_, err := iron([2]string{}, "Mg", law, starts)
			if got := problems(t, err); len(got) != 1 || got[0].Line != 18 || !strings.Contains(got[0].Problem, "which Mg in "+unit+" does not tell") || !strings.Contains(got[0].Remedy, "Fo") {
				t.Errorf("%s by %s: problems %v", unit, law, err)
			}
		}
	}
}

// TestXFeByDirection: laws of one slope on XFe add up, whatever the value is; an
// own law of another slope does not go with them.
func TestXFeByDirection(t *testing.T) {
	const starts = `"80 Fo", "90 Fo"`
	law := func(second string) string {
		return `{ a = "olivine-femg-dohmen2007-tamed", b = "` + second + `", c = "mine", normal = ["60 deg", "30 deg", "90 deg"] }`
	}
	s, err := iron([2]string{}, "Mg", law("olivine-femg-dohmen2007-ped"), starts)
	if err != nil {
		t.Fatal(err)
	}
	const temp = 1350.0
	rt := thermal.GasConstant * temp
	pressure := (3e8 - 1e5) * 7e-6
	tamed := math.Pow(10, -9.21+math.Log10(0.2)/6) * math.Exp(-(201e3+pressure)/rt)
	ped := math.Pow(10, -8.91) * math.Exp(-(220e3+pressure)/rt)
	l := &s.Crystals[0].Elements[0].Law
	near(t, "D at XFe 0.1", math.Exp(l.Law.LnD(temp)), 0.25*tamed+0.75*ped)
	near(t, "slope", l.OwnSlope, -3*math.Ln10)
	near(t, "at", l.OwnAt, 0.9)
	_, err = iron([2]string{}, "Mg", law("mine"), starts)
	if got := problems(t, err); len(got) != 1 || got[0].Line != 18 || !strings.Contains(got[0].Problem, "depend on the element itself in different ways") {
		t.Errorf("problems %v", err)
	}
}
