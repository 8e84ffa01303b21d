package paths

import (
	"fmt"
	"math"
	"testing"

	"bankfire/diffusion/catalogue"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// The facts here are common practice, no source: what everybody who uses these
// clocks knows, and a program that gives anything else has a mistake.

// published is the catalogue's law as a study holds it.
func publishedLaw(t *testing.T, key string) study.Law {
	t.Helper()
	row, err := catalogue.Find(key)
	if err != nil {
		t.Fatal(err)
	}
	law, err := row.Law(nil)
	if err != nil {
		t.Fatal(err)
	}
	return study.Law{Key: key, Row: row, Law: law, TMin: row.TMin, TMax: row.TMax, Citation: row.Citation}
}

// implied is the time, s, that a traverse implies under the law at one
// temperature, K: the life of a path at that temperature times its shift factor.
func implied(t *testing.T, law study.Law, temp float64) float64 {
	t.Helper()
	life := 5000 * thermal.Year
	path := study.Path{Name: "stored", History: history(t, thermal.Leg{Kind: thermal.Hold, For: life, T0: temp}), Eruption: life}
	s := sharp().study(nil, path)
	s.Crystals[0].Elements[0].Law = law
	o := weighed(t, s).Paths[0].Outcome
	if o.Shift95[0] == 0 || math.IsInf(o.Shift95[1], 1) {
		t.Fatalf("shift factor from %g to %g: the traverse bounds nothing", o.Shift95[0], o.Shift95[1])
	}
	return life * o.Shift
}

// Common practice, no source: the two published laws of Ti in quartz differ by
// about 1200 at 750 C, and so do the storage times that they read from one
// traverse.
func TestPracticeRivalLawsDifferAsTheirTimes(t *testing.T) {
	fast, slow := publishedLaw(t, "quartz-ti-cherniak2007"), publishedLaw(t, "quartz-ti-jollands2020")
	const temp = 750 + thermal.ZeroCelsius
	ratio := implied(t, slow, temp) / implied(t, fast, temp)
	near(t, "ratio of the times", ratio, 1200, 60) // "about"
	byHand := math.Exp(fast.Law.LnD(temp) - slow.Law.LnD(temp))
	near(t, "ratio of the times over that of the diffusivities", ratio/byHand, 1, 0.01) // the shift factor's 1 %
}

// Common practice, no source: if storage was cooler, still more time is needed,
// by the Arrhenius ratio.
func TestPracticeCoolerStorageNeedsMoreTime(t *testing.T) {
	for _, test := range []struct {
		key    string
		energy float64 // J/mol, as printed
	}{{"quartz-ti-cherniak2007", 273e3}, {"quartz-ti-jollands2020", 311e3}} {
		t.Run(test.key, func(t *testing.T) {
			law := publishedLaw(t, test.key)
			const hottest = 780 + thermal.ZeroCelsius
			first := implied(t, law, hottest)
			last := first
			for _, temp := range []float64{750, 720, 690, 660} {
				temp += thermal.ZeroCelsius
				needed := implied(t, law, temp)
				if !(needed > last) {
					t.Errorf("%g K needs %g s, not more than what is hotter, %g s", temp, needed, last)
				}
				want := math.Exp(test.energy / thermal.GasConstant * (1/temp - 1/hottest))
				near(t, fmt.Sprintf("ratio at %g K over that of Arrhenius", temp), needed/first/want, 1, 0.01) // the shift factor's 1 %
				last = needed
			}
		})
	}
}

// Common practice, no source: ten days of heating in a million years of storage
// are not missed.
func TestPracticeAPulseIsNotMissed(t *testing.T) {
	const days, life = 10 * 86400.0, 1e6 * thermal.Year
	d1, d2 := math.Exp(law().LnD(773.15)), math.Exp(law().LnD(1473.15))
	path := study.Path{Name: "pulse", Eruption: life + days, History: history(t,
		thermal.Leg{Kind: thermal.Hold, For: life / 2, T0: 773.15}, thermal.Leg{Kind: thermal.Hold, For: days, T0: 1473.15},
		thermal.Leg{Kind: thermal.Hold, For: life / 2, T0: 773.15})}
	p := sharp()
	p.reach = math.Sqrt(2 * (d1*life + d2*days))
	if !(d2*days > d1*life) {
		t.Fatalf("the pulse, %g m2, is to do more than the storage, %g m2", d2*days, d1*life)
	}
	near(t, "shift factor", weighed(t, p.study(nil, path)).Paths[0].Outcome.Shift, 1, 0.01)
}
