package paths

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
	"time"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/thermal"
)

const (
	year = thermal.Year
	cold = 923.15 // K
)

// woken is a path that is stored cold, held hot for ten years in the middle, and
// stored again.
func woken(t testing.TB) study.Path {
	t.Helper()
	h := built(t, []thermal.Spec{
		{Kind: thermal.SpecHold, Name: "store 1", Temp: cold, For: 3000 * year},
		{Kind: thermal.SpecHold, Name: "wake", Temp: hot, For: 10 * year},
		{Kind: thermal.SpecHold, Name: "store 2", Temp: cold, For: 2000 * year},
	})
	return study.Path{Name: "woken", History: h, Eruption: h.Life()}
}

func built(t testing.TB, specs []thermal.Spec) *thermal.History {
	t.Helper()
	h := new(thermal.History)
	if err := thermal.Build(h, specs); err != nil {
		t.Fatal(err)
	}
	return h
}

// grown is G of woken at time t, by hand.
func grown(t float64) float64 {
	d1, d2 := math.Exp(law().LnD(cold)), math.Exp(law().LnD(hot))
	in := func(from, to float64) float64 { return math.Max(0, math.Min(t, to)-from) }
	return d1*(in(0, 3000*year)+in(3010*year, 5010*year)) + d2*in(3000*year, 3010*year)
}

// The profile at any moment is that of the diffusion couple (Crank 1975, eq.
// 2.14) with the G of that moment: nothing, some, most of it in ten years of
// five thousand, all.
func TestFollowThroughAReheat(t *testing.T) {
	path := woken(t)
	end := path.History.Life()
	p := couple{core: 40, mantle: 90, reach: math.Sqrt(2 * grown(end)), spot: 0.3 * um, sigma: 0.2, points: 61, window: 15 * um}
	at := []float64{0, 1500 * year, 3000 * year, 3005 * year, 3010 * year, 4000 * year, end}
	c, err := Follow(t.Context(), p.study(nil, path), &path, at)
	if err != nil {
		t.Fatal(err)
	}
	e := c.Elements[0]
	const tol = 0.06 // ppm of 50: the error that the data, 0.2 ppm, let pass, and that of a cell's mean for its middle
	for i, s := range e.Snapshots {
		t.Run(fmt.Sprintf("after %.0f yr", at[i]/year), func(t *testing.T) {
			if s.Time != at[i] {
				t.Errorf("time %g, want %g", s.Time, at[i])
			}
			model := couple{core: p.core, mantle: p.mantle, reach: math.Sqrt(2 * grown(at[i]))}
			worst := 0.0
			for k, r := range e.Centres {
				worst = math.Max(worst, math.Abs(s.Value[k]-model.seen(r)))
			}
			near(t, "largest difference from the closed form", worst, 0, tol)
		})
	}
	if !slices.Equal(e.Snapshots[0].Value, e.Start) {
		t.Error("the snapshot at the start is not the start")
	}
	if !slices.Equal(e.Snapshots[len(at)-1].Value, e.Final) {
		t.Error("the snapshot at the end is not the end")
	}
	near(t, "ln G", e.LnG, math.Log(grown(end)), 1e-12)
	for i, want := range []float64{grown(3000 * year), grown(3010*year) - grown(3000*year), grown(end) - grown(3010*year)} {
		near(t, "share of "+e.Legs[i].Name, e.Legs[i].Share, want/grown(end), 1e-12)
	}
}

// The temperatures of legs and of stretches of several legs, by hand.
func TestTemperaturesOfLegs(t *testing.T) {
	h := built(t, []thermal.Spec{
		{Kind: thermal.SpecHold, Name: "store", Temp: cold, For: 100 * year},
		{Kind: thermal.SpecReheat, Name: "wake", Temp: hot, Rise: year, Dwell: 3 * year, Efold: 5 * year, For: 14 * year},
		{Kind: thermal.SpecRamp, From: 1000, Temp: 900, For: 50 * year},
		{Kind: thermal.SpecHold, Temp: 800, For: 6 * year},
	})
	want := []LegShare{
		{Name: "store", Duration: 100 * year, First: cold, Highest: cold, Last: cold},
		{Name: "wake", Start: 100 * year, Duration: 14 * year, First: cold, Highest: hot, Last: cold + (hot-cold)*math.Exp(-2)},
		{Name: "leg 5 (ramp)", Start: 114 * year, Duration: 50 * year, First: 1000, Highest: 1000, Last: 900},
		{Name: "leg 6 (hold)", Start: 164 * year, Duration: 6 * year, First: 800, Highest: 800, Last: 800},
	}
	got := legShares(h, law())
	if len(got) != len(want) {
		t.Fatalf("%d legs, want %d", len(got), len(want))
	}
	for i, w := range want {
		g := got[i]
		if g.Name != w.Name {
			t.Errorf("leg %d is %q, want %q", i, g.Name, w.Name)
		}
		near(t, w.Name+" starts", g.Start/year, w.Start/year, 1e-9)
		near(t, w.Name+" lasts", g.Duration/year, w.Duration/year, 1e-9)
		near(t, w.Name+" first", g.First, w.First, 1e-9)
		near(t, w.Name+" highest", g.Highest, w.Highest, 1e-9)
		near(t, w.Name+" last", g.Last, w.Last, 1e-9)
	}
}

// What the traverse leaves free is what Weigh found.
func TestFollowFitsAsWeighDoes(t *testing.T) {
	path := woken(t)
	p := couple{core: 40, mantle: 90, reach: math.Sqrt(2 * grown(path.History.Life())), spot: 0.3 * um, sigma: 0.02, points: 61, window: 15 * um}
	s := p.study(rand.New(rand.NewPCG(10, 1)), path)
	weighing, err := Weigh(context.Background(), s, 1)
	if err != nil {
		t.Fatal(err)
	}
	c, err := Follow(t.Context(), s, &s.Paths[0], nil)
	if err != nil {
		t.Fatal(err)
	}
	want, got := weighing.Paths[0].Profiles[0], c.Elements[0]
	if len(got.Free) != len(want.Free) {
		t.Fatalf("%d free values, want %d", len(got.Free), len(want.Free))
	}
	for i, f := range want.Free {
		// both plans are good to a tenth of the data's errors; the plateaux hang on many points
		near(t, f.Name, got.Free[i].Value, f.Value, errorAim*f.Sigma)
		near(t, "error of "+f.Name, got.Free[i].Sigma, f.Sigma, 1e-3*f.Sigma)
	}
	near(t, "ln G", got.LnG, want.LnG, 0)
	if got.NumErr > 0.1*p.sigma*3 {
		t.Errorf("numerical error %g ppm where the data's is %g: the plan was not refined", got.NumErr, p.sigma)
	}
}

// However legs are named and nested, each bit of diffusion is counted once.
func TestSharesAddUp(t *testing.T) {
	hold := func(name string, temp, years float64) thermal.Spec {
		return thermal.Spec{Kind: thermal.SpecHold, Name: name, Temp: temp, For: years * year}
	}
	reheat := thermal.Spec{Kind: thermal.SpecReheat, Name: "wake", Temp: hot, Rise: year, Dwell: 3 * year, Efold: 5 * year, For: 30 * year}
	repeat := func(name string, times int, legs ...thermal.Spec) thermal.Spec {
		return thermal.Spec{Kind: thermal.SpecRepeat, Name: name, Times: times, Legs: legs}
	}
	for _, test := range []struct {
		name  string
		specs []thermal.Spec
		want  string
	}{
		{"no names", []thermal.Spec{hold("", cold, 100), hold("", hot, 1), hold("", cold, 50)}, "leg 1 (hold), leg 2 (hold), leg 3 (hold)"},
		{"a reheat of three legs", []thermal.Spec{hold("store", cold, 100), reheat, hold("", cold, 5)}, "store, wake, leg 5 (hold)"},
		{"a repeat", []thermal.Spec{hold("store", cold, 9), repeat("", 2, hold("", cold, 5), reheat)},
			"store, leg 2 (hold), wake 1, leg 6 (hold), wake 2"},
		{"a repeat with a name of its own", []thermal.Spec{hold("", cold, 9), repeat("unrest", 2, hold("", cold, 5), reheat), hold("rest", cold, 9)},
			"leg 1 (hold), leg 2 (hold), wake 1, leg 6 (hold), wake 2, rest"},
		{"a named repeat of legs without names", []thermal.Spec{repeat("unrest", 2, hold("", cold, 5), hold("", hot, 1))}, "unrest"},
		{"names within names", []thermal.Spec{repeat("all", 1, repeat("unrest", 2, reheat2(reheat), hold("rest", cold, 2)), hold("", cold, 1))},
			"wake 1, rest 1, wake 2, rest 2, leg 9 (hold)"},
	} {
		t.Run(test.name, func(t *testing.T) {
			h := built(t, test.specs)
			shares := legShares(h, law())
			sum, length := 0.0, 0.0
			var names []string
			for _, s := range shares {
				sum, length = sum+s.Share, length+s.Duration
				names = append(names, s.Name)
			}
			near(t, "sum of the shares", sum, 1, 1e-12)
			near(t, "sum of the durations", length/h.Life(), 1, 1e-12)
			if got := strings.Join(names, ", "); got != test.want {
				t.Errorf("got %s, want %s", got, test.want)
			}
		})
	}
}

// reheat2 is a reheat that can begin a path.
func reheat2(s thermal.Spec) thermal.Spec {
	s.From = cold
	return s
}

// TestSharesOfTheLongestPath: following the largest path that can be written leg by leg
// takes time in proportion to its legs. Ten times the legs took ten times as long;
// comparing all with all would take a hundred times.
func TestSharesOfTheLongestPath(t *testing.T) {
	least := func(legs int) time.Duration {
		h := built(t, []thermal.Spec{{Kind: thermal.SpecRepeat, Times: legs / 2, Legs: []thermal.Spec{
			{Kind: thermal.SpecHold, Name: "store", Temp: cold, For: 10 * year},
			{Kind: thermal.SpecHold, Temp: hot, For: year / 100},
		}}})
		least := time.Hour
		for range 5 {
			start := time.Now()
			if n := len(spans(h)); n != legs {
				t.Fatalf("%d stretches, want %d", n, legs)
			}
			least = min(least, time.Since(start))
		}
		return least
	}
	if few, all := least(thermal.MaxLegs/10), least(thermal.MaxLegs); all > 40*few {
		t.Errorf("a tenth of the legs takes %s, all take %s", few, all)
	}
}

// A crystal in which nothing moves stays as it was, and says so without a
// number that is none.
func TestFollowWhereNothingMoves(t *testing.T) {
	path := woken(t)
	s := sharp().study(nil, path)
	e := &s.Crystals[0].Elements[0]
	e.Law.Law = diffusion.NewLaw(0, 273e3)
	c, err := Follow(t.Context(), s, &path, []float64{1000 * year})
	if err != nil {
		t.Fatal(err)
	}
	got := c.Elements[0]
	if !slices.Equal(got.Start, got.Final) || !slices.Equal(got.Start, got.Snapshots[0].Value) || !math.IsInf(got.LnG, -1) {
		t.Errorf("ln G %g, or the profile moved", got.LnG)
	}
	for _, l := range got.Legs {
		near(t, "share of "+l.Name, l.Share, 0, 0)
	}
	r := weighed(t, s).Paths[0]
	if o := r.Outcome; o.Verdict != WrongShape || o.Shift95 != [2]float64{0, math.Inf(1)} || r.Profiles[0].StandIn != 0 {
		t.Errorf("%s, shift factor %g, stand-in temperature %g", o.Verdict, o.Shift95, r.Profiles[0].StandIn)
	}
}

// Elements without a traverse are followed all the same, and moments outside the
// path refused.
func TestFollowWithoutATraverse(t *testing.T) {
	path := woken(t)
	s := sharp().study(nil, path)
	e := &s.Crystals[0].Elements[0]
	e.Traverse, e.Start.Zones = nil, []study.Plateau{{Value: 40}, {Value: 90}}
	c, err := Follow(t.Context(), s, &path, nil)
	if err != nil {
		t.Fatal(err)
	}
	got := c.Elements[0]
	model := couple{core: 40, mantle: 90, reach: math.Sqrt(2 * grown(path.History.Life()))}
	for k, r := range got.Centres {
		near(t, fmt.Sprintf("at %g um", r/um), got.Final[k], model.seen(r), 0.06)
	}
	if notes := strings.Join(got.Notes, "; "); notes != strings.Join(lawNotes(&s.Crystals[0], e, path.History), "; ") {
		t.Errorf("notes %q", notes)
	}
	if len(got.Free) != 0 || !got.GEnough || got.WhyG == "" {
		t.Errorf("free values %v, G enough %v: %q", got.Free, got.GEnough, got.WhyG)
	}
	_, err = Follow(t.Context(), s, &path, []float64{path.History.Life() * 1.01})
	if err == nil || !strings.Contains(err.Error(), `path "woken", Ti in Q1`) {
		t.Errorf("a moment after the end: got %v, want an error that names the path", err)
	}
}

// A path that is no longer wanted is left between elements and between moments.
func TestFollowStops(t *testing.T) {
	path := woken(t)
	s := sharp().study(nil, path)
	elements := s.Crystals[0].Elements
	s.Crystals[0].Elements = append(elements, elements[0])
	const looks = 2 * 3 // at each element and both moments of each
	for asked := range int64(looks + 1) {
		ctx := &tripwire{Context: t.Context()}
		ctx.left.Store(asked)
		c, err := Follow(ctx, s, &path, []float64{year, 2 * year})
		if done := asked == looks; done && err != nil || !done && (c != nil || !errors.Is(err, context.Canceled)) {
			t.Errorf("done after %d looks of %d: got %v, %v", asked, looks, c, err)
		}
	}
}
