package study

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// TestEveryKeyDeviations: which constants elements rest on, one slope being the same for
// all that have it, directly or from another law.
func TestEveryKeyDeviations(t *testing.T) {
	s := everyKey(t)
	c := &s.Crystals[1]
	for name, want := range map[string][]Deviation{
		"Li":                  {{"by the host", HostSlope}},
		"La":                  {{"by the host", HostSlope}},
		"Mg by a slope of Sr": {{"plagioclase-sr-giletti1994", HostSlope}},
		"Sr":                  {{"plagioclase-sr-giletti1994", HostSlope}},
		"Ba":                  {{"kx", PartitionA}},
		"Ba in a melt":        {{"kx", PartitionA}},
		"Mg":                  nil,
		"Fe":                  nil,
	} {
		i := slices.IndexFunc(c.Elements, func(e Element) bool { return e.Name == name })
		if got := c.Deviations(&c.Elements[i]); !slices.Equal(got, want) {
			t.Errorf("%s rests on %v, want %v", name, got, want)
		}
	}
	near(t, "slope of La", c.Elements[slices.IndexFunc(c.Elements, func(e Element) bool { return e.Name == "La" })].Law.HostSlope, -9.44)
}

// deviating is a plagioclase whose host falls from An60 to An40, in equilibrium with a
// melt and a rim in equilibrium with another.
const deviating = `
[[law]]
name = "sr"
D0 = "8.3e-5 m2/s"
E = "276 kJ/mol"
host = { ln_slope = "-9 +- 0.5", at = 0.45 }

[[partition]]
name = "kx"
A = "-30.4 +- 1.1 kJ/mol"
B = "28.5 +- 0.7 kJ/mol"
at = 0.55

[[path]]
name = "p"
legs = [ { hold = "750 C", for = "100 yr" } ]

[[crystal]]
name = "C"
mineral = "plagioclase"
shape = "slab"
zones = [ { name = "core", width = "90 um", host = 0.6 }, { name = "skin", width = "40 um", host = 0.4 } ]

[[crystal.element]]
name = "Sr"
law = "sr"
partition = "kx"
start = { melt = ["90 ppm", "140 +- 7 ppm"], temperature = ["760 C", "790 C"], edge = "0 um" }
rim = { following = "kx", melt = "110 ppm" }
`

// TestDeviated: D, K and values of an element with constants off are those of the
// formulas with the constants moved, in which A turns about the host that is held.
func TestDeviated(t *testing.T) {
	s, err := parse("s.toml", []byte(deviating), nil)
	if err != nil {
		t.Fatal(err)
	}
	c := &s.Crystals[0]
	e := &c.Elements[0]
	all := []Deviation{{"sr", HostSlope}, {"kx", PartitionA}, {"kx", PartitionB}}
	if got := c.Deviations(e); !slices.Equal(got, all) {
		t.Fatalf("rests on %v", got)
	}
	const slope, a, b, temp = 1.5, -2.0, 0.5, 1000.0
	off, lnD := c.Deviated(e, all, []float64{slope, a, b})
	lnK := func(x, temp float64) float64 {
		return ((-30.4e3+a*1.1e3)*x + 28.5e3 + b*0.7e3 - a*1.1e3*0.55) / (thermal.GasConstant * temp)
	}
	p, free, err := c.Problem(off, s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "ln of D in the middle", lnD, slope*0.5*(0.5-0.45))
	for i, x := range []float64{0.6, 0.4} {
		near(t, fmt.Sprintf("ln D in zone %d", i), p.Law.LnD(temp)+math.Log(p.Zones[i].Times), math.Log(8.3e-5)-276e3/(thermal.GasConstant*temp)+(-9+slope*0.5)*(x-0.45))
		near(t, "ln K", p.LnK(x, temp), lnK(x, temp))
	}
	core, skin := 90*math.Exp(lnK(0.6, 760+thermal.ZeroCelsius)), 140*math.Exp(lnK(0.4, 790+thermal.ZeroCelsius))
	near(t, "core", p.Zones[0].Start, core)
	near(t, "skin", off.Start.Zones[1].Value, skin)
	near(t, "error of the skin", off.Start.Zones[1].Sigma, skin*0.05)
	near(t, "rim", off.Rims[0].Following.At(0, temp), 110*math.Exp(lnK(0.4, temp)))
	if len(free) != 1 || free[0].Name != "skin" {
		t.Errorf("free values %v", free)
	}
	again, _, err := c.Problem(e, s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "ln K of the element itself", again.LnK(0.5, temp), (-30.4e3*0.5+28.5e3)/(thermal.GasConstant*temp))
	near(t, "its rim", e.Rims[0].Following.Partition.A, -30.4e3)
}

// TestDeviationsThatMatter: an element does not rest on constants of which its profile
// knows nothing.
func TestDeviationsThatMatter(t *testing.T) {
	start, _, _ := strings.Cut(deviating[strings.Index(deviating, "start = "):], "\nrim")
	coupled := strings.NewReplacer(start, `start = { zones = ["90 ppm", "80 ppm"], edge = "0 um" }`, `{ following = "kx", melt = "110 ppm" }`, `"sealed"`)
	for _, test := range []struct {
		name   string
		change *strings.Replacer
		want   string
	}{
		{"as it is", strings.NewReplacer(), "[{sr composition slope} {kx A} {kx B}]"},
		{"coupled alone", coupled, "[{sr composition slope} {kx A}]"},
		{"coupled in one host", strings.NewReplacer("host = 0.4 }", "host = 0.6 }"), "[{sr composition slope}]"},
		{"no errors", strings.NewReplacer(" +- 0.5", "", " +- 1.1", "", " +- 0.7", ""), "[]"},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := test.change.Replace(deviating)
			if test.name == "coupled in one host" {
				text = coupled.Replace(text)
			}
			s, err := parse("s.toml", []byte(text), nil)
			if err != nil {
				t.Fatal(err)
			}
			c := &s.Crystals[0]
			if got := fmt.Sprint(c.Deviations(&c.Elements[0])); got != test.want {
				t.Errorf("rests on %s, want %s", got, test.want)
			}
		})
	}
}

// TestSlopeSigma: the error of a slope is stated once and holds for all that have it,
// whichever comes first.
func TestSlopeSigma(t *testing.T) {
	text := strings.Replace(deviating, `law = "sr"`, `law = %s`, 1) + `
[[crystal.element]]
name = "Mg"
law = %s
start = { zones = ["100 ppm", "70 ppm"], edge = "0 um" }
`
	const costa, giletti = `"plagioclase-mg-costa2003"`, `"plagioclase-sr-giletti1994"`
	for name, laws := range map[string][2]string{
		"the other's first": {`{ like = ` + giletti + `, slope_sigma = 0.9 }`, costa},
		"the other's last":  {giletti, `{ like = ` + costa + `, slope_sigma = 0.9 }`},
		"both":              {`{ like = ` + giletti + `, slope_sigma = 0.9 }`, `{ like = ` + costa + `, slope_sigma = 0.9, times = 2 }`},
	} {
		s, err := parse("s.toml", fmt.Appendf(nil, text, laws[0], laws[1]), nil)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		for _, e := range s.Crystals[0].Elements {
			if d := s.Crystals[0].Deviations(&e); d[0] != (Deviation{"plagioclase-sr-giletti1994", HostSlope}) || e.Law.HostSlopeSigma != 0.9 {
				t.Errorf("%s: %s rests on %v, slope +- %g", name, e.Name, d, e.Law.HostSlopeSigma)
			}
		}
	}
	s, err := parse("s.toml", fmt.Appendf(nil, text, `{ like = `+giletti+`, slope_sigma = 0.9, at = 0.5 }`, costa), nil)
	if err != nil {
		t.Fatal(err)
	}
	c := &s.Crystals[0]
	e := &c.Elements[0]
	off, _ := c.Deviated(e, []Deviation{{"plagioclase-sr-giletti1994", HostSlope}}, []float64{2})
	for i, x := range []float64{0.6, 0.4} {
		lnD := func(e *Element) float64 { return e.Law.Law.LnD(1000) + math.Log(c.Factor(e, i)) }
		near(t, "ln of what D changes by", lnD(off)-lnD(e), 2*0.9*(x-0.5))
	}
	_, err = parse("s.toml", fmt.Appendf(nil, text, `{ like = `+giletti+`, slope_sigma = 0.9 }`, `{ like = `+costa+`, slope_sigma = 0.8 }`), nil)
	if err == nil || !strings.Contains(err.Error(), `another error of the slope of plagioclase-sr-giletti1994 than 0.9 in line 26`) {
		t.Errorf("two errors of one slope: %v", err)
	}
}
