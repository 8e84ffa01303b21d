package paths

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// from is a moment as a study writes it.
func from(t testing.TB, text string) *thermal.Moment {
	t.Helper()
	m, err := thermal.ParseMoment(text)
	if err != nil {
		t.Fatal(err)
	}
	return &m
}

// A crystal that exists from a moment on has diffused as much as the path does
// from there: G by hand, in the shift factor to the 1 % that is promised, in ln G
// and in the stand-in temperature over the time that it existed.
func TestWeighOfACrystalThatExistsLater(t *testing.T) {
	const promised = 0.01
	path := woken(t)
	end := path.History.Life()
	for _, test := range []struct {
		moment string
		at     float64 // yr
	}{{"start", 0}, {"3004 yr after start", 3004}, {"1 kyr before end", 4010}} {
		t.Run(test.moment, func(t *testing.T) {
			g := grown(end) - grown(test.at*year)
			p := sharp()
			p.reach = math.Sqrt(2 * g)
			p.spot, p.window, p.sigma = 0.2*p.reach, 5*p.reach, 0.2
			s := p.study(nil, path)
			s.Crystals[0].Exists = from(t, test.moment)
			r := weighed(t, s)
			q := &r.Paths[0].Profiles[0]
			near(t, "shift factor", r.Paths[0].Outcome.Shift, 1, promised)
			near(t, "ln G", q.LnG, math.Log(g), 1e-9)
			near(t, "D at the stand-in temperature", math.Exp(law().LnD(q.StandIn))*(end-test.at*year)/g, 1, 1e-6)
			if r.Paths[0].Life != end {
				t.Errorf("life %g s, that of the path is %g s", r.Paths[0].Life, end)
			}
		})
	}
}

// What a crystal that exists later sees is a path by itself: its rims, whatever
// their kind and whether they hold before, over or after the moment, are those that
// the same crystal has on the rest of the path.
func TestExistenceCutsRims(t *testing.T) {
	const tol = 1e-6 // of chi-square: steps in time are found to 1e-12 of their legs
	year := thermal.Year
	whole := history(t, thermal.Leg{Kind: thermal.Hold, For: 500 * year, T0: hot}, thermal.Leg{Kind: thermal.Ramp, For: 300 * year, T0: hot, T1: hot + 20})
	rest := history(t, thermal.Leg{Kind: thermal.Hold, For: 200 * year, T0: hot}, thermal.Leg{Kind: thermal.Ramp, For: 300 * year, T0: hot, T1: hot + 20})
	held := func(v float64, text string) study.Rim {
		r := study.Rim{Kind: diffusion.Held, Zone: -1, Value: study.Plateau{Value: v}}
		if text != "" {
			r.From = from(t, text)
		}
		return r
	}
	series := func(text string, first, last float64) study.Rim {
		r := study.Rim{Kind: diffusion.Prescribed, Zone: -1, Given: &study.Series{
			Time: []float64{first * year, (first + last) / 2 * year, (first + last) / 2 * year, last * year}, Value: []float64{90, 70, 100, 60}}}
		if text != "" {
			r.From = from(t, text)
		}
		return r
	}
	table := study.Rim{Kind: diffusion.Prescribed, Zone: -1, Following: &study.Following{
		Table: &study.ByTemperature{Temp: []float64{hot - 1, hot + 10, hot + 21}, Value: []float64{90, 60, 80}}}}
	for _, test := range []struct {
		name          string
		before, after []study.Rim
	}{
		{"one", []study.Rim{{Kind: diffusion.Held, Zone: 1}}, []study.Rim{{Kind: diffusion.Held, Zone: 1}}},
		{"superseded", []study.Rim{held(20, ""), held(70, "100 yr after start"), held(110, "100 yr before end")},
			[]study.Rim{held(70, ""), held(110, "100 yr before end")}},
		{"a file over the moment", []study.Rim{series("", 0, 800)}, []study.Rim{{Kind: diffusion.Prescribed, Zone: -1, Given: &study.Series{
			Time: []float64{0, 100 * year, 100 * year, 500 * year}, Value: []float64{75, 70, 100, 60}}}}},
		{"a file after it", []study.Rim{held(20, ""), series("400 yr after start", 400, 800)}, []study.Rim{held(20, ""), series("100 yr after start", 100, 500)}},
		{"a file that begins with the crystal", []study.Rim{series("", 300, 800)}, []study.Rim{series("", 0, 500)}},
		{"a table against temperature", []study.Rim{table}, []study.Rim{table}},
	} {
		t.Run(test.name, func(t *testing.T) {
			p := sharp()
			p.reach, p.points, p.window = 6*um, 31, 50*um
			s := p.study(rand.New(rand.NewPCG(52, 1)), study.Path{Name: "whole", History: whole, Eruption: whole.Life()})
			s.Crystals[0].Exists = from(t, "300 yr after start")
			s.Crystals[0].Elements[0].Rims = test.before
			got := weighed(t, s).Paths[0].Outcome
			s = p.study(rand.New(rand.NewPCG(52, 1)), study.Path{Name: "rest", History: rest, Eruption: rest.Life()})
			s.Crystals[0].Elements[0].Rims = test.after
			want := weighed(t, s).Paths[0].Outcome
			near(t, "chi-square over that of the rest", got.Misfit/want.Misfit, 1, tol)
			if got.Degrees != want.Degrees {
				t.Errorf("%d degrees, want %d", got.Degrees, want.Degrees)
			}
		})
	}
}

// To follow is to see the crystal begin: it does not change before it exists, and
// its legs are what is left of those of the path.
func TestFollowACrystalThatExistsLater(t *testing.T) {
	path := woken(t)
	s := sharp().study(nil, path)
	s.Crystals[0].Exists = from(t, "3004 yr after start")
	c, err := Follow(t.Context(), s, &path, []float64{0, 2000 * year, 3010 * year})
	if err != nil {
		t.Fatal(err)
	}
	e := &c.Elements[0]
	for i, v := range e.Snapshots[1].Value {
		if v != e.Start[i] || e.Snapshots[0].Value[i] != v {
			t.Fatalf("it diffuses before it exists: %g from %g ppm", v, e.Start[i])
		}
	}
	g := grown(3010*year) - grown(3004*year)
	model := couple{core: e.Free[0].Value, mantle: e.Free[1].Value, reach: math.Sqrt(2 * g)}
	for i, r := range e.Centres {
		near(t, "after six years", e.Snapshots[2].Value[i], model.seen(r), 0.1)
	}
	near(t, "its first leg begins", e.Legs[0].Start, 3004*year, 1)
	near(t, "and lasts", e.Legs[0].Duration, 6*year, 1)
	if notes := strings.Join(e.Notes, "; "); !strings.Contains(notes, "Q1 exists from 3.004 kyr after the start of the path") {
		t.Errorf("notes %q", notes)
	}
}
