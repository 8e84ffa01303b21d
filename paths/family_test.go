package paths

import (
	"bytes"
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
	return familyStudyOf(t, familyCrystal, count, rim, paths)
}

// familyStudyOf is the same with another crystal.
func familyStudyOf(t *testing.T, crystal string, count int, rim, paths string) *study.Study {
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
` + paths + strings.Replace(crystal, "RIM", rim, 1)
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

// screened is a study with the rows of all members of its first family.
func screened(t *testing.T, s *study.Study, jobs int) (*Result, []Row) {
	t.Helper()
	sc, err := NewScreening(t.Context(), s, ScreenOptions{Keep: Keep{All: true}, Jobs: jobs})
	if err != nil {
		t.Fatal(err)
	}
	tallies := make([]Tally, len(s.Families))
	var rows []Row
	if err := sc.Screen(t.Context(), 0, sc.Blocks(), func(b *Block) error {
		tallies[b.Family].Add(&b.Tally)
		if b.Family == 0 {
			rows = append(rows, b.Rows...)
		}
		return nil
	}); err != nil {
		t.Fatal(err)
	}
	r, err := sc.Finish(t.Context(), tallies)
	if err != nil {
		t.Fatal(err)
	}
	return r, rows
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
	r, rows := screened(t, familyStudy(t, members, stepsRim, text.String()), 2)
	if m := r.Families[0].Methods; len(m) != 1 || m[0].Table || !strings.Contains(m[0].Why, "rim") {
		t.Errorf("methods %v", m)
	}
	for i := range rows {
		m, o := &rows[i], &r.Paths[i].Outcome
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
	r, rows := screened(t, familyStudy(t, members, held, text.String()), 2)
	f := &r.Families[0]
	if !f.Methods[0].Table {
		t.Fatalf("methods %v", f.Methods)
	}
	lowest := f.Tally.Misfit
	verdicts := map[Verdict]int{}
	for i := range r.Written() {
		m, o := &rows[i*every], &r.Paths[i].Outcome
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

// TestFamilyDoesNotDependOnJobs, nor a member on how many are drawn.
func TestFamilyDoesNotDependOnJobs(t *testing.T) {
	one, rows := screened(t, familyStudy(t, 9000, `{ held = "mantle" }`, ""), 1)
	want := encoded(t, &one.Families[0].Tally)
	for _, jobs := range []int{2, 3, 8} {
		r, more := screened(t, familyStudy(t, 9000, `{ held = "mantle" }`, ""), jobs)
		if got := encoded(t, &r.Families[0].Tally); !bytes.Equal(got, want) || fmt.Sprint(more) != fmt.Sprint(rows) {
			t.Errorf("%d jobs give another tally or other rows", jobs)
		}
	}
	_, more := screened(t, familyStudy(t, 9500, `{ held = "mantle" }`, ""), 3)
	for i := range rows {
		if a, b := fmt.Sprint(rows[i]), fmt.Sprint(more[i]); a != b {
			t.Fatalf("member %d: %s and %s", i, a, b)
		}
	}
}

// exactly is the quantile of what is read of the members, without bins.
func exactly(x []float64, p float64) float64 {
	slices.Sort(x)
	return x[int(math.Ceil(p*float64(len(x))))-1]
}

// TestFamilySummary reads all members again, without bins or samples.
func TestFamilySummary(t *testing.T) {
	r, rows := screened(t, familyStudy(t, 4000, `{ held = "mantle" }`, ""), 2)
	f := &r.Families[0]
	s := &f.Summary
	law := r.Study.Crystals[0].Elements[0].Law.Law
	lists := map[*Quantiles][]float64{}
	put := func(q *Quantiles, x float64) { lists[q] = append(lists[q], x) }
	var c study.Candidate
	lnG := math.NaN() // at which the profile is the best, whatever the path
	lo, hi := math.Inf(1), math.Inf(-1)
	for i := range rows {
		m := &rows[i]
		f.Family.At(&c, m.Index)
		switch m.Verdict {
		case TooSharp:
			put(&s.More, m.Shift)
		case TooSmooth:
			put(&s.Less, m.Shift)
		case Reproduces:
			for k := range s.Values {
				put(&s.Values[k].Kept90, c.Values[k])
			}
			lo, hi = math.Min(lo, c.Values[1]), math.Max(hi, c.Values[1])
			put(&s.Life, c.History.Life())
			put(&s.Above[0], c.History.TimeAbove(760+thermal.ZeroCelsius))
			put(&s.StandIn[0], m.StandIn[0])
			g := law.LnD(m.StandIn[0]) + math.Log(c.History.Life()*m.Shift)
			if !(math.Abs(g-lnG) > 1e-6) { // to where standIn stops; true at first
				lnG = g
			} else {
				t.Fatalf("at its shift factor a member has ln G %v, another %v", g, lnG)
			}
		}
	}
	if n := len(lists[&s.Life]); int64(n) != f.Tally.Counts[Reproduces] || n < 100 || len(lists) != 8 {
		t.Fatalf("%d reproduce, counted %d", n, f.Tally.Counts[Reproduces])
	}
	for q, list := range lists {
		for k, p := range [...]float64{0.05, 0.5, 0.95} {
			want := exactly(list, p)
			if !(math.Abs(q[k]-want) <= binWidth*want) {
				t.Errorf("%v of %d: %v, want %v", p, len(list), q[k], want)
			}
		}
	}
	if s.Values[1].Kept != [2]float64{lo, hi} {
		t.Errorf("waits %v, want %v and %v", s.Values[1].Kept, lo, hi)
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

// binWidth is that of a bin, as a part of what it holds.
const binWidth = 0x1p-11

// engineOf is that of the study's first family.
func engineOf(tb testing.TB, s *study.Study) *engine {
	tb.Helper()
	sc, err := NewScreening(tb.Context(), s, ScreenOptions{})
	if err != nil {
		tb.Fatal(err)
	}
	return sc.engines[0]
}

// TestMembersCostNothing: members by the table allocate nothing.
func TestMembersCostNothing(t *testing.T) {
	e := engineOf(t, familyStudy(t, 3000, `{ held = "mantle" }`, ""))
	var w work
	w.begin(e, new(Block), 100)
	var d desk
	screen := func() {
		if err := e.judge(t.Context(), &d, w.members); err != nil {
			t.Fatal(err)
		}
	}
	if n := testing.AllocsPerRun(10, screen); n != 0 {
		t.Errorf("%v allocations for %d members", n, len(w.members))
	}
	seen := map[Verdict]int{}
	for i := range w.members {
		seen[w.members[i].Verdict]++
	}
	if seen[Reproduces] < 10 || seen[TooSharp] < 10 || seen[TooSmooth] < 10 {
		t.Errorf("verdicts %v", seen)
	}
}

func BenchmarkFamilyByTable(b *testing.B) {
	s, err := study.Read("../examples/cooler-but-longer/study.toml")
	if err != nil {
		b.Fatal(err)
	}
	sc, err := NewScreening(b.Context(), s, ScreenOptions{})
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		if err := sc.Screen(b.Context(), 0, sc.Blocks(), func(*Block) error { return nil }); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(s.Families[0].Count()*int64(b.N))/b.Elapsed().Seconds(), "members/s")
}

// TestTableIsAudited: with errors of the data so small that the usual plan is too coarse
// for the hottest members, though not where the data agree best, the table's is finer.
func TestTableIsAudited(t *testing.T) {
	s := familyStudy(t, 300, heldRim, "")
	for i := range s.Crystals[0].Elements[0].Traverse.Sigma {
		s.Crystals[0].Elements[0].Traverse.Sigma[i] = 0.1
	}
	e := engineOf(t, s)
	worst := func(refined int) (all float64) {
		var c study.Candidate
		for i := int64(0); i < 300; i += 10 {
			e.family.At(&c, i)
			path := c.Path()
			p, err := newProfile(&e.elements[0], &path, refined)
			if err != nil {
				t.Fatal(err)
			}
			r, err := p.asItIs()
			if err != nil {
				t.Fatal(err)
			}
			all = math.Max(all, r.NumErr)
		}
		return all
	}
	coarse, fine, stated := worst(0), worst(1), e.methods[0].NumErr
	t.Logf("members are off by up to %.3g sigma, with a finer plan %.3g; stated %.3g", coarse, fine, stated)
	if !(coarse > errorAim) || !(fine <= errorAim) {
		t.Fatal("the study tests nothing")
	}
	if !(stated <= errorAim) || !(stated >= fine/2) {
		t.Errorf("the table states %v, want up to %v and about %v", stated, errorAim, fine)
	}
}

// TestStandInOfWhatExisted: the stand-in temperature of a member is that of its path as
// the crystal saw it, which only existed in the end.
func TestStandInOfWhatExisted(t *testing.T) {
	crystal := strings.Replace(familyCrystal, "shape =", "exists_from = \"end of store\"\nshape =", 1)
	r, rows := screened(t, familyStudyOf(t, crystal, 6, heldRim, ""), 2)
	f := &r.Families[0]
	best, of := &rows[f.Best()], &r.Paths[f.Path].Profiles[0]
	if best.Verdict != Reproduces || !(math.Abs(best.StandIn[0]-of.StandIn) <= 2*standInResolution) {
		t.Errorf("%v, stand-in temperature %v, of its path %v", best.Verdict, best.StandIn, of.StandIn)
	}
}
