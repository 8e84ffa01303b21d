package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// past is a path of a hold and a common end: a wake of ten years at 780 C or of
// as long as it takes to do the same at 770 C.
func past(t testing.TB, name string, years float64, end float64) study.Path {
	t.Helper()
	h := new(thermal.History)
	wake := []thermal.Spec{{Kind: thermal.SpecRamp, Name: "wake", Temp: end, For: 10 * year}, {Kind: thermal.SpecHold, Name: "rest", Temp: end, For: 20 * year}}
	if err := thermal.Build(h, append([]thermal.Spec{{Kind: thermal.SpecHold, Name: "store", Temp: hot, For: years * year}}, wake...)); err != nil {
		t.Fatal(err)
	}
	return study.Path{Name: name, History: h, Eruption: h.Eruption()}
}

// reached is sqrt(2 G) of a path.
func reached(p study.Path) float64 {
	return math.Sqrt2 * math.Exp(law().LnIntegral(p.History, 0, p.History.Life())/2)
}

// Two invented crystals had pasts of their own, 100 and 700 yr warm, and one end.
// No path is that of both, which are at odds along each; given each its own, both
// are found; sharing what comes from the wake on, the two true pasts combine, and
// not those that end otherwise, however right for one.
func TestPlantedPasts(t *testing.T) {
	const end, other = 1053.15, 1048.15
	long, short := past(t, "long", 700, end), past(t, "short", 100, end)
	all := []study.Path{
		past(t, "middling", 300, end), long, past(t, "another end", 700, other), short, past(t, "much too long", 5000, end),
	}
	of := func(sharing study.Sharing) *Result {
		var each []*study.Study
		for i, truth := range []study.Path{long, short} {
			p := sharp()
			p.reach, p.spot, p.sigma = reached(truth), 0.3*um, 1
			each = append(each, p.study(rand.New(rand.NewPCG(53, uint64(i))), all...))
		}
		s := inCrystals(each...)
		s.Sharing = sharing
		return weighed(t, s)
	}
	names := func(paths []*study.Path) string {
		var out []string
		for _, p := range paths {
			out = append(out, p.Name)
		}
		return fmt.Sprintf("%q", out)
	}
	shared := of(study.Sharing{})
	for i := range shared.Paths {
		if v := shared.Paths[i].Outcome.Verdict; v != AtOdds {
			t.Errorf("shared: %q is %s, want at odds", all[i].Name, v)
		}
	}
	if shared.Groups != nil {
		t.Errorf("shared: %d groups", len(shared.Groups))
	}
	each := of(study.Sharing{Each: true})
	for k, want := range []string{`["long" "another end"]`, `["short"]`} {
		if got := names(each.ReproducedBy(k)); got != want {
			t.Errorf("each: Q%d is reproduced by %s, want %s", k+1, got, want)
		}
	}
	from := of(study.Sharing{From: from(t, "start of wake")})
	if len(from.Groups) != 2 {
		t.Fatalf("%d groups", len(from.Groups))
	}
	g := &from.Groups[0]
	if got := names(g.Paths); got != `["middling" "long" "short" "much too long"]` {
		t.Errorf("the first group is %s", got)
	}
	if g.Outcome.Verdict != Reproduces || g.Choices[0].Path.Name != "long" || g.Choices[1].Path.Name != "short" || g.Combinations() != 16 {
		t.Errorf("%s by %q and %q of %g", g.Outcome.Verdict, g.Choices[0].Path.Name, g.Choices[1].Path.Name, g.Combinations())
	}
	if len(g.Choices[0].Also)+len(g.Choices[1].Also) > 0 {
		t.Errorf("others would do: %s, %s", names(g.Choices[0].Also), names(g.Choices[1].Also))
	}
	near(t, "chi-square of the combination", g.Outcome.Misfit, each.Paths[1].Outcome.Crystals[0].Misfit+each.Paths[3].Outcome.Crystals[1].Misfit, 1e-9)
	near(t, "its shift factor", g.Outcome.Shift, 1, 0.1)
	alone := &from.Groups[1]
	if o, want := &alone.Outcome, &shared.Paths[2].Outcome; o.Verdict != AtOdds || math.Abs(o.Misfit-want.Misfit) > 1e-9 || alone.Combinations() != 1 {
		t.Errorf("the other end: %s with chi-square %g, shared %g", o.Verdict, o.Misfit, want.Misfit)
	}
}

// A third crystal with the past of the first has another path that would do, and
// the combination is what a search through all of them finds.
func TestCombinationIsTheBest(t *testing.T) {
	var all []study.Path
	for i, y := range []float64{100, 120, 300, 700} {
		all = append(all, past(t, fmt.Sprint(y), y, 1053.15+float64(i)*1e-5)) // alike to a hundredth of a mK
	}
	var each []*study.Study
	for i, truth := range []int{3, 0, 2} {
		p := sharp()
		p.reach, p.spot, p.sigma = reached(all[truth]), 0.3*um, 2
		each = append(each, p.study(rand.New(rand.NewPCG(54, uint64(i))), all...))
	}
	s := inCrystals(each...)
	s.Sharing.From = from(t, "start of wake")
	r := weighed(t, s)
	if len(r.Groups) != 1 {
		t.Fatalf("%d groups", len(r.Groups))
	}
	g := &r.Groups[0]
	least, passing := math.Inf(1), map[string]bool{}
	for i := range all {
		for j := range all {
			for k := range all {
				sum := r.Paths[i].Outcome.Crystals[0].Misfit + r.Paths[j].Outcome.Crystals[1].Misfit + r.Paths[k].Outcome.Crystals[2].Misfit
				least = math.Min(least, sum)
				if Tail(sum, g.Outcome.Degrees) >= 0.05 {
					passing[fmt.Sprint(all[i].Name, " ", all[j].Name, " ", all[k].Name)] = true
				}
			}
		}
	}
	near(t, "least chi-square", g.Outcome.Misfit, least, 1e-9)
	best := []string{g.Choices[0].Path.Name, g.Choices[1].Path.Name, g.Choices[2].Path.Name}
	for k, c := range g.Choices {
		for i := range all {
			with := slices.Clone(best)
			with[k] = all[i].Name
			want := passing[with[0]+" "+with[1]+" "+with[2]]
			got := c.Path.Name == all[i].Name || slices.Contains(c.Also, r.Paths[i].Path)
			if got != want {
				t.Errorf("crystal %d along %q: passes %v, want %v", k, all[i].Name, got, want)
			}
		}
	}
	if len(g.Choices[1].Also) == 0 {
		t.Error("no other path would do for the second")
	}
}

// Where crystals need not share a path, one that bars it leaves it to the others,
// as if they were alone.
func TestOneCrystalBars(t *testing.T) {
	p := sharp()
	build := func(crystals int) *study.Study {
		var of []*study.Study
		for i := range crystals {
			of = append(of, p.study(rand.New(rand.NewPCG(55, uint64(i))), p.path(t, "as it was", 1), p.path(t, "longer", 0.8)))
		}
		return inCrystals(of...)
	}
	two := build(2)
	two.Paths[0].Barred = []study.Bar{{Crystal: "Q2", Why: "Q2 was not there"}}
	for _, sharing := range []study.Sharing{{Each: true}, {From: from(t, "1 yr before end")}} {
		two.Sharing = sharing
		got, want := weighed(t, two), weighed(t, build(1))
		o := &got.Paths[0].Outcome
		if o.Verdict != Barred || o.Crystals[1].Verdict != Barred || !math.IsNaN(o.Crystals[1].Misfit) || o.Profiles[1].Verdict != Barred {
			t.Errorf("jointly %s, of Q2 %s with chi-square %g", o.Verdict, o.Crystals[1].Verdict, o.Crystals[1].Misfit)
		}
		o.Crystals[0].Above, o.Profiles[0].Above = 0, 0 // of another curve, sharpened elsewhere
		f := want.Paths[0].Outcome.Crystals[0]
		if f.Above = 0; o.Crystals[0] != f || o.Profiles[0] != f {
			t.Errorf("Q1: %+v, by itself %+v", o.Crystals[0], f)
		}
		if q := got.Paths[0].Profiles; !q[0].Ran() || q[1].Ran() || q[1].Crystal.Name != "Q2" {
			t.Errorf("ran %v and %v", q[0].Ran(), q[1].Ran())
		}
		if len(got.ReproducedBy(0)) == 0 || slices.Contains(got.ReproducedBy(1), got.Paths[0].Path) {
			t.Error("reproduced by the wrong paths")
		}
		for _, g := range got.Groups { // paths of two lives do not end alike a year before their end: hold against hold
			if g.Choices[1].Path != nil && g.Choices[1].Path.Name == "as it was" || g.Choices[1].Of > 1 {
				t.Errorf("Q2 was given %q of %d", g.Choices[1].Path.Name, g.Choices[1].Of)
			}
		}
	}
	two.Sharing = study.Sharing{}
	if r := weighed(t, two); r.Paths[0].Outcome.Verdict != Barred || len(r.Paths[0].Profiles) != 0 || len(r.Paths[0].Outcome.Crystals) != 0 {
		t.Errorf("shared: %s with %d profiles", r.Paths[0].Outcome.Verdict, len(r.Paths[0].Profiles))
	}
}

// The order of crystals and elements changes no bit of a combination either.
func TestPermutedHistories(t *testing.T) {
	var groups [2]*Group
	var crystals [2][]*study.Crystal
	for i := range groups {
		s := threeOfTwo(t)
		s.Sharing.From = from(t, "1 yr before end")
		if i == 1 {
			slices.Reverse(s.Crystals)
			for k := range s.Crystals {
				slices.Reverse(s.Crystals[k].Elements)
			}
		}
		r := weighed(t, s)
		if len(r.Groups) != 1 || len(r.Groups[0].Paths) != 2 {
			t.Fatalf("groups %+v", r.Groups)
		}
		groups[i], crystals[i] = &r.Groups[0], r.Crystals
	}
	if a, b := groups[0].Outcome.Finding, groups[1].Outcome.Finding; a != b {
		t.Errorf("%+v, permuted %+v", a, b)
	}
	for k, c := range crystals[0] {
		l := slices.IndexFunc(crystals[1], func(d *study.Crystal) bool { return c.Name == d.Name })
		if a, b := groups[0].Choices[k], groups[1].Choices[l]; a.Path.Name != b.Path.Name || len(a.Also) != len(b.Also) {
			t.Errorf("%s: %+v, permuted %+v", c.Name, a, b)
		}
	}
}
