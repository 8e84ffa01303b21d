package study

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"

	"bankfire/thermal"
)

// wakesLeg is a leg of reheats, six in its time on average.
const wakesLeg = `{ name = "wakes", reheats = "6 per kyr", from = "700 C", peak = { from = "750 C", to = "800 C" }, rise = { from = "1 day", to = "10 yr", spread = "log" }, dwell = { choices = ["1 yr", "5 yr"] }, efold = "2 yr", for = "1 kyr" }`

// wakesStudy has a family whose members differ by the reheats of one leg.
func wakesStudy(t *testing.T, leg, vary string, count int) *Study {
	t.Helper()
	family := fmt.Sprintf("[[family]]\nname = \"wakes\"\nlegs = [ %s ]\ndraw = { method = \"halton\", count = %d }\n%s\n[[crystal]]\n", leg, count, vary)
	s, err := parse("s.toml", []byte(strings.Replace(sound, "[[crystal]]\n", family, 1)), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// drawnWakes are the reheats of each member.
func drawnWakes(t *testing.T, f *Family) [][]thermal.Pulse {
	t.Helper()
	var c Candidate
	out := make([][]thermal.Pulse, f.Count())
	for i := range out {
		if f.At(&c, int64(i)); c.Barred != "" {
			t.Fatalf("member %d: %s", i, c.Why)
		}
		out[i] = slices.Clone(c.specs[0].Pulses)
		if n := c.Values[len(c.Values)-1]; n != float64(len(out[i])) || f.Values[len(c.Values)-1].Name != "number of wakes" {
			t.Fatalf("member %d: %v reheats, %d drawn", i, n, len(out[i]))
		}
	}
	return out
}

// far is how many standard deviations a sound sample may be off: once in two million.
const far = 5

// rarely is the tail of the Kolmogorov-Smirnov statistic that is as rare:
// 2 exp(-2 x^2) = 1e-6.
const rarely = 2.694

// ks compares a sample with a distribution, as sqrt(n) sup |F_n - F|. Source:
// Kolmogorov 1933, Giorn. Ist. Ital. Attuari 4, 83-91.
func ks(t *testing.T, what string, x []float64, below func(float64) float64) {
	t.Helper()
	x = slices.Sorted(slices.Values(x))
	n, most := float64(len(x)), 0.0
	for i, v := range x {
		p := below(v)
		most = max(most, p-float64(i)/n, float64(i+1)/n-p)
	}
	if d := math.Sqrt(n) * most; !(d <= rarely) || len(x) < 1000 {
		t.Errorf("%s: Kolmogorov-Smirnov %.3f of %d, want at most %.3f", what, d, len(x), rarely)
	}
}

// TestReheatsArePoisson: numbers, moments and times between of reheats at random are
// those of a Poisson process.
func TestReheatsArePoisson(t *testing.T) {
	const mean, members = 6.0, 5000
	all := drawnWakes(t, &wakesStudy(t, wakesLeg, "", members).Families[0])
	counts := make([]float64, members)
	var moments, after []float64
	for i, wakes := range all {
		counts[i] = float64(len(wakes))
		for _, p := range wakes {
			moments = append(moments, p.At/(1e3*yr))
		}
		if i > 0 { // members follow one another: neighbours must not go together
			after = append(after, counts[i-1])
		}
	}
	got, variance := stat.MeanVariance(counts, nil)
	if off := (got - mean) / math.Sqrt(mean/members); !(math.Abs(off) <= far) {
		t.Errorf("mean number %v, %.1f sigma off", got, off)
	}
	// Of n draws with the fourth central moment 3 L^2 + L.
	if off := (variance - mean) / math.Sqrt((2*mean*mean+mean)/members); !(math.Abs(off) <= far) {
		t.Errorf("variance of the number %v, %.1f sigma off", variance, off)
	}
	if r := stat.Correlation(counts[1:], after, nil) * math.Sqrt(members-1); !(math.Abs(r) <= far) {
		t.Errorf("numbers of neighbours go together: %.1f sigma", r)
	}
	chi, bins := 0.0, 0
	for k := range 20 {
		if want := members * (distuv.Poisson{Lambda: mean}).Prob(float64(k)); want > 5 {
			n := 0.0
			for _, c := range counts {
				if c == float64(k) {
					n++
				}
			}
			chi, bins = chi+(n-want)*(n-want)/want, bins+1
		}
	}
	if most := (distuv.ChiSquared{K: float64(bins)}).Quantile(1 - 1e-6); !(chi <= most) || bins < 10 {
		t.Errorf("chi-square of the numbers %.1f in %d bins, want at most %.1f", chi, bins, most)
	}
	ks(t, "moments", moments, func(x float64) float64 { return x }) // given their number, they are uniform
}

// TestReheatsDrawTheirOwn: times between, heights, rises and dwells of one long leg.
func TestReheatsDrawTheirOwn(t *testing.T) {
	long := strings.Replace(wakesLeg, `for = "1 kyr"`, `for = "1 Myr"`, 1)
	wakes := drawnWakes(t, &wakesStudy(t, long, "", 1).Families[0])[0]
	var gaps, heights, rises []float64
	short := 0
	last := 0.0
	for _, p := range wakes {
		gaps, last = append(gaps, (p.At-last)/(1e3*yr)), p.At
		heights, rises = append(heights, p.Peak), append(rises, math.Log(p.Rise))
		if p.Dwell == 1*yr {
			short++
		} else if p.Dwell != 5*yr {
			t.Fatalf("a dwell of %v", p.Dwell)
		}
		if p.Efold != 2*yr {
			t.Fatalf("an e-fold of %v", p.Efold)
		}
	}
	ks(t, "times between", gaps, distuv.Exponential{Rate: 6}.CDF)
	ks(t, "heights", heights, distuv.Uniform{Min: 750 + zc, Max: 800 + zc}.CDF)
	ks(t, "logarithms of rises", rises, distuv.Uniform{Min: math.Log(86400), Max: math.Log(10 * yr)}.CDF)
	n := float64(len(wakes))
	if off := (float64(short) - n/2) / math.Sqrt(n/4); !(math.Abs(off) <= far) {
		t.Errorf("%d short dwells of %v", short, n)
	}
	for what, pair := range map[string][2][]float64{"gap and height": {gaps, heights}, "height and rise": {heights, rises}, "gap and next gap": {gaps[1:], gaps[:len(gaps)-1]}} {
		if r := stat.Correlation(pair[0], pair[1], nil) * math.Sqrt(n); !(math.Abs(r) <= far) {
			t.Errorf("%s go together: %.1f sigma", what, r)
		}
	}
}

// TestReheatsOverlap: of reheats of one height, those that begin while another dwells
// are not felt, so that warm and cold times alternate as in a counter with a dead time
// D: the warm share is L D/(1 + L D) with the rate L. Its variance over a time T is
// D^2 L^-2 (D + 1/L)^-3 / T. Source: Cox 1962, Renewal Theory, chapters 7 and 9.
func TestReheatsOverlap(t *testing.T) {
	const rate, dwell, span = 6e-3, 100.0, 1e6 // a year, years
	leg := `{ name = "wakes", reheats = "6 per kyr", from = "700 C", peak = "750 C", dwell = "100 yr", efold = "1 s", for = "1 Myr" }`
	f := &wakesStudy(t, leg, "", 1).Families[0]
	var c Candidate
	f.At(&c, 0)
	share := c.History.TimeAbove(725+zc) / (span * yr)
	want := rate * dwell / (1 + rate*dwell)
	sigma := math.Sqrt(dwell * dwell / (rate * rate) / math.Pow(dwell+1/rate, 3) / span)
	if off := (share - want) / sigma; !(math.Abs(off) <= far) {
		t.Errorf("warm for %v of the time, want %v +- %v", share, want, sigma)
	}
}

// TestReheatsFollowValues: rates and ranges may be open.
func TestReheatsFollowValues(t *testing.T) {
	leg := `{ name = "wakes", reheats = "{n} per {life}", from = "{store}", peak = { from = "{store} + 20 K", to = "{store} + 50 K" }, dwell = "{dwell}", efold = { from = "{dwell}", to = "2 * {dwell}", spread = "log" }, for = "{life}" }`
	vary := "[family.vary]\nstore = { from = \"650 C\", to = \"740 C\" }\nlife = { from = \"1 kyr\", to = \"9 kyr\" }\nn = { from = 0.5, to = 9 }\ndwell = \"3 +- 0.1 yr\"\n"
	f := &wakesStudy(t, leg, vary, 2000).Families[0]
	var c Candidate
	asked, got := 0.0, 0.0
	for i := range f.Count() {
		f.At(&c, i)
		store, life, dwell := c.Values[0], c.Values[1], c.Values[3]
		asked, got = asked+c.Values[2], got+c.Values[4]
		for _, p := range c.specs[0].Pulses {
			if p.Peak < store+20 || p.Peak > store+50 || p.At > life || p.Dwell != dwell || p.Rise != 0 || p.Efold < dwell || p.Efold > 2*dwell {
				t.Fatalf("member %d with %v has %+v", i, c.Values, p)
			}
		}
		if c.Barred != "" || c.History.Life() < life*(1-1e-12) || c.History.Life() > life*(1+1e-12) {
			t.Fatalf("member %d lives %v, want %v: %s", i, c.History.Life(), life, c.Why)
		}
	}
	if off := (got - asked) / math.Sqrt(asked); !(math.Abs(off) <= far) {
		t.Errorf("%v reheats, want %v: %.1f sigma", got, asked, off)
	}
}

// TestReheatsArePure: a member's reheats do not depend on those before it, nor on how
// many are drawn; other seeds and names draw others.
func TestReheatsArePure(t *testing.T) {
	few, many := &wakesStudy(t, wakesLeg, "", 20).Families[0], &wakesStudy(t, wakesLeg, "", 5000).Families[0]
	other := &wakesStudy(t, wakesLeg, "seed = 2\n", 20).Families[0]
	var c Candidate
	for _, i := range []int64{17, 0, 19, 17} {
		var a, b, o Candidate
		few.At(&a, i)
		many.At(&c, 4000)
		many.At(&c, i)
		many.At(&b, i)
		other.At(&o, i)
		if !slices.Equal(a.History.Legs(), b.History.Legs()) || !slices.Equal(a.History.Legs(), c.History.Legs()) || !slices.Equal(a.Values, c.Values) {
			t.Errorf("member %d has %v and %v", i, a.History.Legs(), b.History.Legs())
		}
		if slices.Equal(a.History.Legs(), o.History.Legs()) {
			t.Errorf("member %d is the same with another seed", i)
		}
	}
}

func TestReheatsDoNotAllocate(t *testing.T) {
	membersDoNotAllocate(t, wakesStudy(t, wakesLeg, "", 3000))
}

// TestBarredReheats: values with which no reheats can be drawn.
func TestBarredReheats(t *testing.T) {
	for _, test := range []struct{ name, old, new, a, words string }{
		{"upside down", `"800 C"`, `"{a}"`, `{ from = "700 C", to = "800 C" }`, "the range of peak of the reheats on line 22 ends below where it begins"},
		{"log from zero", `"1 day"`, `"{a} - {a}"`, `{ from = "1 yr", to = "2 yr" }`, `the range of rise of the reheats on line 22 begins at zero, but is log`},
		{"fewer than none", `"6 per kyr"`, `"{a} per kyr"`, `{ from = -1, to = 1 }`, "the reheats on line 22 are fewer than none"},
		{"too many", `"6 per kyr"`, `"6 per {a}"`, `{ from = "1 s", to = "1 day" }`, "the reheats on line 22 are more than 12500, on average"},
		{"below the store", `"700 C"`, `"{a}"`, `{ from = "700 C", to = "800 C" }`, "the leg on line 22 cannot be"},
	} {
		t.Run(test.name, func(t *testing.T) {
			family := "[[family]]\nname = \"wakes\"\nlegs = [ " + strings.Replace(wakesLeg, test.old, test.new, 1) + " ]\ndraw = { method = \"random\", count = 500 }\n[family.vary]\na = " + test.a + "\n[[crystal]]\n"
			s, err := parse("s.toml", []byte(strings.Replace(sound, "[[crystal]]\n", family, 1)), memory(soundFiles()))
			if err != nil {
				if in := problems(t, err)[0]; !strings.Contains(in.Problem, test.words) {
					t.Fatal(err)
				}
				return // all are
			}
			var c Candidate
			barred := 0
			for i := range s.Families[0].Count() {
				if s.Families[0].At(&c, i); c.Barred == "" {
					continue
				}
				if barred++; c.Barred != test.words {
					t.Fatalf("barred for %q, want %q", c.Barred, test.words)
				}
				if len(c.Values) != 2 || math.IsNaN(c.Values[1]) {
					t.Fatalf("values %v", c.Values)
				}
			}
			if barred < 100 {
				t.Errorf("%d barred", barred)
			}
		})
	}
}

// TestWrongReheats: what cannot be meant, with its place and remedy.
func TestWrongReheats(t *testing.T) {
	change := func(old, new string) string { return strings.Replace(wakesLeg, old, new, 1) }
	for _, test := range []struct{ name, leg, field, problem, remedy string }{
		{"no rate", change(`"6 per kyr"`, `"6"`), "reheats", "not a number per time", "5 per kyr"},
		{"per nothing", change(`"6 per kyr"`, `"6 per"`), "reheats", "not a number per time", "5 per kyr"},
		{"per a length", change(`"6 per kyr"`, `"6 per km"`), "reheats", "a length where a duration belongs", ""},
		{"per a temperature", change(`"6 per kyr"`, `"6 per 5 C"`), "reheats", "a temperature where a duration belongs", ""},
		{"fewer than none", change(`"6 per kyr"`, `"-6 per kyr"`), "reheats", "below zero", ""},
		{"a number", change(`"6 per kyr"`, `6`), "reheats", "a number, not a text", "5 per kyr"},
		{"no value", change(`"6 per kyr"`, `"{n} per kyr"`), "reheats", `no value is named "n"`, "[family.vary]"},
		{"peaks upside down", change(`"750 C"`, `"850 C"`), "peak.to", "not above from", "smaller end"},
		{"log heights", change(`"800 C" }`, `"800 C", spread = "log" }`), "peak.spread", "of a temperature", "even"},
		{"log from zero", change(`"1 day"`, `"0 day"`), "rise.from", "not above zero", "log spread"},
		{"heights of time", change(`"750 C"`, `"750 yr"`), "peak.from", "", ""},
		{"choices of height", change(`["1 yr", "5 yr"]`, `["1 C", "5 C"]`), "dwell.choices", "a temperature where a duration belongs", "15 yr"},
		{"a choice below zero", change(`["1 yr", "5 yr"]`, `["1 yr", "-5 yr"]`), "dwell.choices", "below zero", ""},
		{"no relaxation", change(`efold = "2 yr", `, ``), "efold", "missing", "reheats leg needs"},
		{"in a repeat", `{ repeat = 3, legs = [ ` + wakesLeg + ` ] }`, "legs.reheats", "repeat the same", "outside"},
		{"a mistyped key", change(`dwell`, `dwel`), "dwel", "unknown key", `did you mean "dwell"?`},
	} {
		t.Run(test.name, func(t *testing.T) {
			family := "[[family]]\nname = \"wakes\"\nlegs = [ " + test.leg + " ]\ndraw = { method = \"random\", count = 5 }\n"
			_, err := parse("s.toml", []byte(strings.Replace(sound, "[[crystal]]\n", family+"\n[[crystal]]\n", 1)), memory(soundFiles()))
			list := problems(t, err)
			if len(list) == 0 {
				t.Fatal("taken")
			}
			if e := list[0]; e.Field != "family.legs."+test.field || e.Line == 0 || !strings.Contains(e.Problem, test.problem) || !strings.Contains(e.Remedy, test.remedy) {
				t.Errorf("%v\nwant field %s, %q, %q", err, test.field, test.problem, test.remedy)
			}
		})
	}
	written := strings.Replace(sound, "legs = [", "legs = [ "+wakesLeg+",", 1)
	_, err := parse("s.toml", []byte(written), memory(soundFiles()))
	if list := problems(t, err); len(list) == 0 || !strings.Contains(list[0].Problem, "written out") || cmp.Or(list[0].Line, 0) == 0 {
		t.Errorf("a path with random reheats: %v", err)
	}
}
