package study

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// drawnVary are the values of the family that tests draw from.
const drawnVary = `store = { from = "650 C", to = "740 C" }
life = { from = "1 kyr", to = "3 kyr", spread = "log" }
hot = "100 +- 5 yr"
cold = "{life} - 2 * {hot}"
wakes = { from = 1, to = 3 }
rise = { choices = ["2 day", "20 day"] }
`

const drawnLegs = `[
  { name = "store", hold = "{store}", for = "{cold}" },
  { repeat = "{wakes}", legs = [ { name = "wake", reheat = "{store} + 130 K", rise = "{rise}", efold = "10 yr", for = "{hot}" } ] },
  { name = "rest", hold = "690 C", for = "1 yr" },
]`

// drawn is the sound study with a family.
func drawn(legs, vary, draw string) string {
	family := "[[family]]\nname = \"drawn\"\nlegs = " + legs + "\ndraw = " + draw + "\neruption = \"{hot} after end of store\"\n[family.vary]\n" + vary + "\n[[crystal]]\n"
	return strings.Replace(sound, "[[crystal]]\n", family, 1)
}

const drawnBy = `{ method = "halton", count = 5000 }`

func drawnStudy(t *testing.T, legs, vary, draw string) *Study {
	t.Helper()
	s, err := parse("s.toml", []byte(drawn(legs, vary, draw)), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// TestMembersAreWhatTheySay builds each member by hand from its values.
func TestMembersAreWhatTheySay(t *testing.T) {
	f := &drawnStudy(t, drawnLegs, drawnVary, drawnBy).Families[0]
	var names []string
	for i := range f.Values {
		names = append(names, f.Values[i].Name)
	}
	if want := []string{"store", "life", "hot", "wakes", "rise", "cold"}; !slices.Equal(names, want) {
		t.Fatalf("values %q, want %q", names, want)
	}
	var c Candidate
	counts := map[float64]int{}
	for i := range f.Count() {
		f.At(&c, i)
		if c.Barred != "" {
			t.Fatalf("member %d: %s", i, c.Barred)
		}
		v := c.Values
		if v[0] < 650+zc || v[0] > 740+zc || v[1] < 1e3*yr || v[1] > 3e3*yr || math.Abs(v[2]-100*yr) > 30*yr || v[5] != v[1]-2*v[2] {
			t.Fatalf("member %d has the values %v", i, v)
		}
		counts[v[3]]++
		counts[v[4]]++
		var legs []thermal.Leg
		legs = append(legs, thermal.Leg{Setting: 1, Kind: thermal.Hold, For: v[5], T0: v[0]})
		for range int(v[3]) {
			legs = append(legs, thermal.Leg{Setting: 1, Kind: thermal.Ramp, For: v[4], T0: v[0], T1: v[0] + 130},
				thermal.Leg{Setting: 1, Kind: thermal.Relax, For: v[2] - v[4], T0: v[0] + 130, T1: v[0], Tau: 10 * yr})
		}
		legs = append(legs, thermal.Leg{Setting: 1, Kind: thermal.Hold, For: yr, T0: 690 + zc})
		if got := c.History.Legs(); !slices.Equal(got, legs) {
			t.Fatalf("member %d has the legs %v, want %v", i, got, legs)
		}
		if want := v[5] + v[2]; c.History.Eruption() != want {
			t.Fatalf("member %d erupts at %v, want %v", i, c.History.Eruption(), want)
		}
	}
	for _, n := range []float64{1, 2, 3} {
		if math.Abs(float64(counts[n])-5000./3) > 200 {
			t.Errorf("%v wakes in %d members", n, counts[n])
		}
	}
	if math.Abs(float64(counts[2*86400])-2500) > 200 {
		t.Errorf("a rise of two days in %d members", counts[2*86400])
	}
}

// TestMembersArePure: a member does not depend on those before it.
func TestMembersArePure(t *testing.T) {
	f := &drawnStudy(t, drawnLegs, drawnVary, drawnBy).Families[0]
	var c Candidate
	for _, i := range []int64{17, 4999, 0, 17} {
		var alone Candidate
		f.At(&alone, i)
		f.At(&c, 3)
		f.At(&c, i)
		if !slices.Equal(c.Values, alone.Values) || !slices.Equal(c.History.Legs(), alone.History.Legs()) || !slices.Equal(c.History.Names(), alone.History.Names()) {
			t.Errorf("member %d: %v and %v", i, c.Values, alone.Values)
		}
	}
}

// TestMembersDoNotAllocate: nor do the study's limits, where they hold.
func TestMembersDoNotAllocate(t *testing.T) {
	membersDoNotAllocate(t, drawnStudy(t, drawnLegs, drawnVary, drawnBy))
}

// membersDoNotAllocate draws all members of the first family before it looks, since a
// member with more legs than any before needs memory.
func membersDoNotAllocate(t *testing.T, s *Study) {
	t.Helper()
	var c Candidate
	for i := range s.Families[0].Count() {
		s.Families[0].At(&c, i)
	}
	i := int64(0)
	if n := testing.AllocsPerRun(1000, func() {
		s.Families[0].At(&c, i)
		s.Bar(&c)
		i++
	}); n != 0 {
		t.Errorf("%v allocations a member", n)
	}
}

// TestBarredMembers: values that make no path bar the member, in words that do not
// depend on it.
func TestBarredMembers(t *testing.T) {
	for _, test := range []struct{ name, legs, vary, words, why string }{
		{"negative", `[ { name = "store", hold = "690 C", for = "{life} - {hot}" }, { hold = "690 C", for = "9 yr" } ]`, "life = { from = \"1 yr\", to = \"9 yr\" }\nhot = { from = \"1 yr\", to = \"9 yr\" }", `for = "{life} - {hot}" on line 22 is below zero`, ""},
		{"peak below", `[ { name = "store", hold = "{a}", for = "3 yr" }, { reheat = "{b}", efold = "{hot}" }, { hold = "690 C", for = "9 yr" } ]`, "a = { from = \"600 C\", to = \"800 C\" }\nb = { from = \"600 C\", to = \"800 C\" }\nhot = { choices = [\"1 yr\", \"2 yr\"] }", "the leg on line 22 cannot be", "peak below"},
		{"eruption", `[ { name = "store", hold = "690 C", for = "5 yr" } , { hold = "690 C", for = "5 yr" } ]`, `hot = { from = "1 yr", to = "9 yr" }`, `it does not have its eruption, "{hot} after end of store"`, "after the end of the path"},
	} {
		t.Run(test.name, func(t *testing.T) {
			f := &drawnStudy(t, test.legs, test.vary, drawnBy).Families[0]
			var c Candidate
			barred := 0
			for i := range f.Count() {
				if f.At(&c, i); c.Barred != "" {
					barred++
					if c.Barred != test.words || !strings.Contains(c.Why, test.why) {
						t.Fatalf("barred for %q, %q", c.Barred, c.Why)
					}
				}
			}
			if share := float64(barred) / float64(f.Count()); math.Abs(share-0.5) > 0.03 {
				t.Errorf("%v barred, want half", share)
			}
		})
	}
}

// TestWrongFamilies: what cannot be meant, with its place and remedy.
func TestWrongFamilies(t *testing.T) {
	plain := func(hold, vary string) string {
		return drawn(`[ { name = "store", hold = `+hold+`, for = "5 yr" }, { hold = "690 C", for = "{hot}" } ]`, vary+"\nhot = { from = \"1 yr\", to = \"4 yr\" }", drawnBy)
	}
	for _, test := range []struct{ name, text, field, problem, remedy string }{
		{"unknown name", plain(`"{stor}"`, `store = { from = "650 C", to = "740 C" }`), "family.legs.hold", `no value is named "stor"`, "did you mean {store}?"},
		{"wrong kind", plain(`"{hot}"`, ""), "family.legs.hold", "a duration where a temperature belongs", "750 C"},
		{"kinds that do not add", plain(`"{a} + {hot}"`, `a = { from = "650 C", to = "740 C" }`), "family.legs.hold", "a temperature and a duration do not add up", "one kind"},
		{"two levels", plain(`"{a} + 20 C"`, `a = { from = "650 C", to = "740 C" }`), "family.legs.hold", "two temperatures", "difference in K"},
		{"twice a level", plain(`"2 * {a}"`, `a = { from = "650 C", to = "740 C" }`), "family.legs.hold", "multiple of a temperature", "in K"},
		{"squared", plain(`"{a} * {a}"`, `a = { from = "650 K", to = "740 K" }`), "family.legs.hold", "a temperature times a temperature", "plain numbers"},
		{"open brace", plain(`"{a"`, `a = { from = "650 C", to = "740 C" }`), "family.legs.hold", "braces that do not match", "{life} - {hot}"},
		{"unused", plain(`"700 C"`, `a = { from = "650 C", to = "740 C" }`), "family.vary.a", "nothing uses the value", "leave it out"},
		{"upside down", plain(`"{a}"`, `a = { from = "750 C", to = "740 C" }`), "family.vary.a.to", "not above from", "smaller end first"},
		{"log from zero", drawn(`[ { name = "store", hold = "700 C", for = "{hot}" } ]`, `hot = { from = "0 yr", to = "1 yr", spread = "log" }`, drawnBy), "family.vary.hot.from", "not above zero", "log spread"},
		{"log of a temperature", plain(`"{a}"`, `a = { from = "650 C", to = "740 C", spread = "log" }`), "family.vary.a.spread", "temperature", "even"},
		{"range of two kinds", plain(`"{a}"`, `a = { from = "650 C", to = "740 yr" }`), "family.vary.a.to", "a duration, but from is a temperature", "one kind"},
		{"one choice", plain(`"{a}"`, `a = { choices = ["650 C"] }`), "family.vary.a.choices", "fewer than two", "choices = "},
		{"no error", plain(`"{a}"`, `a = "650 C"`), "family.vary.a", "does not vary", "in the legs"},
		{"tied in a ring", plain(`"{a}"`, "a = \"{b} + 1 K\"\nb = \"{a} + 1 K\""), "family.vary.a", "round about", "drawn"},
		{"repeat by a half", drawn(`[ { name = "store", repeat = "{n}", legs = [ { hold = "700 C", for = "{hot}" } ] } ]`, "n = { from = 1.0, to = 2 }\nhot = \"9 +- 1 yr\"", drawnBy), "family.legs.repeat", "not always a whole number", "whole numbers"},
		{"no such method", drawn(drawnLegs, drawnVary, `{ method = "halten", count = 5 }`), "family.draw.method", "no way to draw", `did you mean "halton"?`},
		{"none", drawn(drawnLegs, drawnVary, `{ method = "grid", count = 0 }`), "family.draw.count", "at least 1", "20000"},
		{"latin too large", drawn(drawnLegs, drawnVary, `{ method = "latin", count = 1000001 }`), "family.draw.count", "more than 1000000", "fewer"},
		{"grid too small", drawn(drawnLegs, drawnVary, `{ method = "grid", count = 5 }`), "family.draw.count", "grid of 6 members", "another method"},
		{"open conditions", drawn(`[ { name = "store", hold = "700 C", for = "{hot}", conditions = { pressure = "{p}" } } ]`, "hot = \"9 +- 1 yr\"", drawnBy), "family.legs.conditions.pressure", "do not vary", "write a value"},
		{"never a path", drawn(`[ { name = "store", hold = "700 C", for = "{hot} - 9 yr" } ]`, `hot = { from = "1 yr", to = "2 yr" }`, drawnBy), "family", "none of its first 256 members is a path", "tied to"},
	} {
		t.Run(test.name, func(t *testing.T) {
			_, err := parse("s.toml", []byte(test.text), memory(soundFiles()))
			list := problems(t, err)
			if len(list) == 0 {
				t.Fatal("taken")
			}
			if e := list[0]; e.Field != test.field || e.Line == 0 || !strings.Contains(e.Problem, test.problem) || !strings.Contains(e.Remedy, test.remedy) {
				t.Errorf("%v\nwant field %s, %q, %q", err, test.field, test.problem, test.remedy)
			}
		})
	}
}

// TestExpressions against sums made by hand.
func TestExpressions(t *testing.T) {
	n := names{name: []string{"life", "hot", "n"}, is: []measure{{dim: thermal.Duration}, {dim: thermal.Duration}, {plain: true, whole: true}}}
	values := []float64{1000, 30, 4}
	for text, want := range map[string]float64{
		"{life} - {hot}": 970, "{ life }": 1000, "2 * {hot} + 5 s": 65, "{n} * {hot} * 2": 240, "- {hot} + {life}": 970,
		"{life} - {n} * {hot} - 1 min": 820, "3 s * {n}": 12,
	} {
		e, m, refused := n.parse(text)
		if refused != nil || m.dim != thermal.Duration || e.at(values) != want {
			t.Errorf("%s is %v, want %v: %v", text, fmt.Sprint(e.at(values)), want, refused)
		}
	}
}
