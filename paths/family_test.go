package paths

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
)

const familyCrystal = `
[[crystal]]
name = "Q"
mineral = "quartz"
shape = "slab"
zones = [{ name = "core", width = "40 um" }, { name = "mantle", width = "20 um" }]
[[crystal.element]]
name = "Ti"
law = "quartz-ti-cherniak2007"
start = { zones = ["free", "free"], edge = "0 um" }
rim = RIM
traverse = { file = "ti.csv", position = "x [um]", zero = "centre", value = "Ti [ppm]", error = "2 ppm", spot = "0.8 um fwhm" }
`

// familyStudy is a small study with a family of so many members, whose rim is held or
// a rim that only steps can follow, and with the paths given.
func familyStudy(t *testing.T, count int, rim, paths string) *study.Study {
	t.Helper()
	text := `[[threshold]]
name = "hot"
temperature = "760 C"
[[family]]
name = "drawn"
draw = { method = "halton", count = ` + fmt.Sprint(count) + ` }
legs = [ { name = "store", hold = "{store}", for = "{wait}" }, { name = "wake", reheat = "{store} + 100 K", rise = "1 yr", efold = "3 yr", dwell = "{dwell}" } ]
[family.vary]
store = { from = "620 C", to = "780 C" }
wait = { from = "1 yr", to = "100 kyr", spread = "log" }
dwell = { choices = ["1 yr", "10 yr"] }
` + paths + strings.Replace(familyCrystal, "RIM", rim, 1)
	dir := t.TempDir()
	data := "x [um],Ti [ppm]\n20,98\n26,101\n30,99\n34,97\n36,92\n38,86\n39,79\n40,74\n41,69\n42,63\n44,57\n46,53\n50,51\n54,48\n"
	for name, text := range map[string]string{"study.toml": text, "ti.csv": data} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	s, err := study.Read(filepath.Join(dir, "study.toml"))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

const stepsRim = `[ { held = "mantle" }, { held = "mantle", from = "end of store" } ]`

func weighedBy(t *testing.T, s *study.Study, jobs int) *Result {
	t.Helper()
	r, err := Weigh(t.Context(), s, jobs)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// writtenOut is the member as a path of the study.
func writtenOut(f *study.Family, i int64) string {
	var c study.Candidate
	f.At(&c, i)
	return fmt.Sprintf("[[path]]\nname = \"path %d\"\nlegs = [ { name = \"store\", hold = \"%.17g K\", for = \"%.17g s\" }, "+
		"{ name = \"wake\", reheat = \"%.17g K\", rise = \"1 yr\", efold = \"3 yr\", dwell = \"%.17g s\" } ]\n", i, c.Values[0], c.Values[1], c.Values[0]+100, c.Values[2])
}

// TestMemberInStepsIsItsPath: to the last bit.
func TestMemberInStepsIsItsPath(t *testing.T) {
	const members = 6
	s := familyStudy(t, members, stepsRim, "")
	var text strings.Builder
	for i := range int64(members) {
		text.WriteString(writtenOut(&s.Families[0], i))
	}
	r := weighedBy(t, familyStudy(t, members, stepsRim, text.String()), 2)
	if m := r.Families[0].Methods; len(m) != 1 || m[0].Table || !strings.Contains(m[0].Why, "rim") {
		t.Errorf("methods %v", m)
	}
	for i := range r.Families[0].Members {
		m, o := &r.Families[0].Members[i], &r.Paths[i].Outcome
		if m.Verdict != o.Verdict || m.Misfit != o.Misfit || m.Shift != o.Shift || m.Tail != o.Tail || m.Shift95 != o.Shift95 {
			t.Errorf("member %d: %v, chi-square %v, shift %v; as a path %v, %v, %v", i, m.Verdict, m.Misfit, m.Shift, o.Verdict, o.Misfit, o.Shift)
		}
	}
}

// Between knots table and scan are each right to curveError within inner of the lowest
// chi-square, and beyond to outerError of what lies beyond; numerical errors are below
// errorAim of sigma at each point and add little.
func tableError(misfit, lowest float64) float64 {
	return 2*curveError + 2*outerError*math.Max(0, misfit-lowest-inner)
}

// TestTableAgreesWithSteps runs members of a family by themselves: same verdict unless
// chi-square is within the error of where it changes, and the same shift factor.
func TestTableAgreesWithSteps(t *testing.T) {
	const members = 200
	const held = `{ held = "mantle" }`
	s := familyStudy(t, members, held, "")
	var text strings.Builder
	const every = 10
	for i := int64(0); i < members; i += every {
		text.WriteString(writtenOut(&s.Families[0], i))
	}
	r := weighedBy(t, familyStudy(t, members, held, text.String()), 2)
	f := &r.Families[0]
	if !f.Methods[0].Table {
		t.Fatalf("methods %v", f.Methods)
	}
	lowest := f.Members[f.Best].Misfit
	verdicts := map[Verdict]int{}
	for i := range r.Written() {
		m, o := &f.Members[i*every], &r.Paths[i].Outcome
		verdicts[o.Verdict]++
		allowed := tableError(o.Misfit, lowest)
		if !(math.Abs(m.Misfit-o.Misfit) <= allowed) {
			t.Errorf("member %d: chi-square %v by table, %v in steps", i*every, m.Misfit, o.Misfit)
		}
		near := math.Abs(o.Misfit-Critical(0.95, o.Degrees)) <= allowed
		if m.Verdict != o.Verdict && !near {
			t.Errorf("member %d: %v by table, %v in steps", i*every, m.Verdict, o.Verdict)
		}
		if !(math.Abs(math.Log(m.Shift/o.Shift)) <= 2*shiftError) {
			t.Errorf("member %d: shift factor %v by table, %v in steps", i*every, m.Shift, o.Shift)
		}
	}
	if verdicts[Reproduces] < 2 || verdicts[TooSharp] < 2 || verdicts[TooSmooth] < 2 {
		t.Errorf("verdicts %v", verdicts)
	}
}

// TestFamilyDoesNotDependOnJobs, nor on how many are drawn.
func TestFamilyDoesNotDependOnJobs(t *testing.T) {
	one := weighedBy(t, familyStudy(t, 9000, `{ held = "mantle" }`, ""), 1).Families[0]
	four := weighedBy(t, familyStudy(t, 9000, `{ held = "mantle" }`, ""), 4).Families[0]
	more := weighedBy(t, familyStudy(t, 9500, `{ held = "mantle" }`, ""), 3).Families[0]
	for i := range one.Members {
		a := fmt.Sprint(one.Members[i])
		if b, c := fmt.Sprint(four.Members[i]), fmt.Sprint(more.Members[i]); a != b || a != c {
			t.Fatalf("member %d: %s, %s and %s", i, a, b, c)
		}
	}
	if one.Counts != four.Counts || one.Best != four.Best {
		t.Errorf("%v and %v", one.Counts, four.Counts)
	}
}

// TestFamilySummary counts by hand.
func TestFamilySummary(t *testing.T) {
	r := weighedBy(t, familyStudy(t, 4000, `{ held = "mantle" }`, ""), 2)
	f := &r.Families[0]
	s := f.Summary()
	kept := f.Reproducing()
	if int64(len(kept)) != f.Counts[Reproduces] || len(kept) < 100 {
		t.Fatalf("%d reproduce, counted %d", len(kept), f.Counts[Reproduces])
	}
	law := r.Study.Crystals[0].Elements[0].Law.Law
	best := &f.Members[f.Best]
	lnG := law.LnD(best.StandIn[0]) + math.Log(best.Life*best.Shift) // at which the profile is the best, whatever the path
	lo, hi, above := math.Inf(1), math.Inf(-1), 0
	for _, m := range kept {
		lo, hi = math.Min(lo, m.Values[1]), math.Max(hi, m.Values[1])
		if m.Above[0] <= s.Above[0][1] {
			above++
		}
		if g := law.LnD(m.StandIn[0]) + math.Log(m.Life*m.Shift); !(math.Abs(g-lnG) < 1e-6) { // to where standIn stops
			t.Fatalf("at its shift factor a member has ln G %v, another %v", g, lnG)
		}
	}
	if s.Values[1].Kept != [2]float64{lo, hi} {
		t.Errorf("waits %v, want %v and %v", s.Values[1].Kept, lo, hi)
	}
	if part := float64(above) / float64(len(kept)); math.Abs(part-0.5) > 0.02 {
		t.Errorf("%v of the times above are at most their median", part)
	}
	// the colder the longer: G at 620 C and 1 yr is far too little, at 780 C and 100 kyr far too much
	if i := slices.IndexFunc(s.TradeOffs, func(x TradeOff) bool { return x.A == 0 && x.B == 1 }); i < 0 || s.TradeOffs[i].Rank > -0.6 {
		t.Errorf("trade-offs %v", s.TradeOffs)
	}
	if !(s.More[0] > 1) || !(s.Less[2] < 1) {
		t.Errorf("shift factors of those that miss: %v and %v", s.More, s.Less)
	}
	if s.Values[2].Open != [2]bool{true, true} || s.Values[0].Drawn[0] < 620+thermal.ZeroCelsius {
		t.Errorf("values %+v", s.Values)
	}
}

// TestMembersCostNothing: a member by the table allocates nothing, but for the stand-in
// temperature of one that reproduces.
func TestMembersCostNothing(t *testing.T) {
	s := familyStudy(t, 3000, `{ held = "mantle" }`, "")
	w, err := newWeighing(s)
	if err != nil {
		t.Fatal(err)
	}
	sc := &screening{weighing: w, family: &s.Families[0], kept: make([]Member, 3000)}
	first, err := sc.first(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	if _, err := sc.prepare(t.Context(), first); err != nil {
		t.Fatal(err)
	}
	var c study.Candidate
	lnG := make([]float64, 1)
	run := func(i int64) Verdict {
		sc.family.At(&c, i)
		sc.study.Bar(&c)
		m := Member{}
		if err := sc.member(t.Context(), &c, &m, lnG); err != nil {
			t.Fatal(err)
		}
		return m.Verdict
	}
	missing := slices.DeleteFunc([]int64{0, 1, 2, 3, 4, 5, 6, 7, 8, 9}, func(i int64) bool { return run(i) == Reproduces })
	if n := testing.AllocsPerRun(100, func() {
		for _, i := range missing {
			run(i)
		}
	}); n != 0 || len(missing) < 3 {
		t.Errorf("%v allocations for %d members", n, len(missing))
	}
}

func BenchmarkFamilyByTable(b *testing.B) {
	s, err := study.Read("../examples/cooler-but-longer/study.toml")
	if err != nil {
		b.Fatal(err)
	}
	w, err := newWeighing(s)
	if err != nil {
		b.Fatal(err)
	}
	sc := &screening{weighing: w, family: &s.Families[0], kept: make([]Member, s.Families[0].Count())}
	first, err := sc.first(b.Context())
	if err != nil {
		b.Fatal(err)
	}
	if _, err := sc.prepare(b.Context(), first); err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		if _, err := sc.all(b.Context(), 1); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(len(sc.kept)*b.N)/b.Elapsed().Seconds(), "members/s")
}
