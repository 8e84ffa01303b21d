package study

import (
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// TestEveryKeyTimes compares D with the published formula of Petry and others 2004
// along c, typed here once more. The normal is 30 deg from c and 60 deg from a, D
// along a and b is 6 times less, and the user has it ten times faster: by hand,
// 10 (3/4 + 1/24) = 7.91667.
func TestEveryKeyTimes(t *testing.T) {
	elements := everyKey(t).Crystals[1].Elements
	law := &elements[9].Law
	const temp = 1300.0
	log10FO2 := -24930/temp + 9.36 + 0.046*1999/temp + 0.3 + 5
	alongC := math.Log(3.84e-9) + math.Ln10*(log10FO2+6)/4.25 - (220e3+(2e8-1e5)*7e-6)/(thermal.GasConstant*temp)
	near(t, "ln D", law.Law.In(1).LnD(temp), alongC+math.Log(10*(0.75+0.25/6)))
	if law.Key != "olivine-ni-petry2004" || law.Times != (thermal.Uncertain{Value: 10, Sigma: 3}) || !strings.Contains(law.Citation, "Petry") || law.TMin != 900+zc {
		t.Errorf("law %+v", law)
	}
	if p := law.Parts; len(p) != 1 || p[0].Axes != "c (6 times that along a and b)" {
		t.Errorf("parts %+v", p)
	} else {
		near(t, "share", p[0].Share, 0.75+0.25/6)
	}
	if got := law.Cautions(); !slices.Contains(got, "D times 10 +- 3, yours") || !slices.Contains(got, "constants not checked against the paper") {
		t.Errorf("cautions %q", got)
	}
	rt := thermal.GasConstant * temp
	near(t, "ln D of Fe, halved", elements[8].Law.Law.LnD(temp), math.Log(0.5e-9)-250e3/rt)
	near(t, "ln D of Mn, doubled", elements[10].Law.Law.LnD(temp), math.Log(2*7.01e-8)-273e3/rt)
	if got := elements[10].Law.Cautions(); !slices.Equal(got, []string{"D times 2 +- 0.5, yours", "no crystal has it"}) {
		t.Errorf("cautions %q", got)
	}
}

// TestTimesOfOne: the factor of one element leaves the law of another alone.
func TestTimesOfOne(t *testing.T) {
	text := strings.Replace(sound, `"quartz-ti-cherniak2007"`, `"mine"`, 1) + `[[crystal.element]]
name = "Al"
law = { like = "mine", times = 7 }
start = { zones = ["9 ppm", "8 ppm"], edge = "0 um" }
`
	s, err := parse("s.toml", []byte(text), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	one, other := s.Crystals[0].Elements[0].Law, s.Crystals[0].Elements[1].Law
	near(t, "factor", other.Law.LnD(1000)-one.Law.LnD(1000), math.Log(7))
	if one.TimesText() != "" || other.TimesText() != "D times 7, yours" {
		t.Errorf("%q, %q", one.TimesText(), other.TimesText())
	}
}

// TestRatio: with the boundary's normal along the axis of the law, or a ratio of 1,
// it is the law itself.
func TestRatio(t *testing.T) {
	d := 1e-9 * math.Exp(-273e3/(thermal.GasConstant*1000))
	for text, want := range map[string]float64{
		`{ a = "slow", ratio = 6, normal = ["0 deg", "90 deg", "90 deg"] }`:  d,
		`{ a = "slow", ratio = 6, normal = ["90 deg", "45 deg", "45 deg"] }`: d / 6,
		`{ b = "slow", ratio = 1, normal = ["60 deg", "45 deg", "60 deg"] }`: d,
		// cos2 of 62, 75 and 32 deg add up to 1.0066, as angles are measured
		`{ c = "slow", ratio = 6, normal = ["62 deg", "75 deg", "32 deg"] }`: d *
			(math.Pow(math.Cos(32*deg), 2) + (math.Pow(math.Cos(62*deg), 2)+math.Pow(math.Cos(75*deg), 2))/6),
	} {
		law, err := directedLaw(t, text)
		if err != nil {
			t.Fatal(err)
		}
		near(t, text, math.Exp(law.Law.LnD(1000)), want)
		if law.Key != "slow" || law.Citation != "invented, 1" || law.TMax != 900+zc {
			t.Errorf("law %+v", law)
		}
	}
}
