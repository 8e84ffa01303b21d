package paths

import (
	"fmt"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"bankfire/paths/study"
)

// openedCrystal has braces in its starts, rims and moments; Al of it is the same for all
// members.
const openedCrystal = `
[[crystal]]
name = "Q"
mineral = "quartz"
shape = "slab"
zones = [{ name = "core", width = "40 um" }, { name = "mantle", width = "20 um" }]
[[crystal.element]]
name = "Ti"
law = "quartz-ti-cherniak2007"
start = { zones = ["free", "{mantle}"], edge = "{edge}" }
rim = [ { held = "mantle" }, { held = "{rim}", from = "{late} before eruption" } ]
traverse = { file = "ti.csv", position = "x [um]", zero = "centre", value = "Ti [ppm]", error = "2 ppm", spot = "0.8 um fwhm" }
[[crystal.element]]
name = "Al"
law = "quartz-ti-cherniak2007"
start = { zones = ["free", "free"], edge = "0 um" }
rim = { held = "mantle" }
traverse = { file = "al.csv", position = "x [um]", zero = "centre", value = "Al [ppm]", error = "2 ppm", spot = "0.8 um fwhm" }
`

const openedLegs = `legs = [ { name = "store", hold = "{store}", for = "{wait}" }, { name = "wake", ramp = "800 C", for = "9 yr" } ]
`

const openedFamily = `[[family]]
name = "open"
draw = METHOD
` + openedLegs + `[family.vary]
store = { from = "640 C", to = "760 C" }
wait = { from = "1 yr", to = "10 kyr", spread = "log" }
edge = { from = "0 um", to = "1.5 um" }
mantle = "50 +- 1 ppm"
rim = { choices = ["40 ppm", "55 ppm"] }
late = { from = "1 yr", to = "8 yr" }
`

// openedStudy reads a study with two traverses beside it.
func openedStudy(t *testing.T, text string) *study.Study {
	t.Helper()
	dir := t.TempDir()
	data := "x [um],Ti [ppm]\n20,98\n26,101\n30,99\n34,97\n36,92\n38,86\n39,79\n40,74\n41,69\n42,63\n44,57\n46,53\n50,51\n54,48\n"
	for name, text := range map[string]string{"study.toml": text, "ti.csv": data, "al.csv": strings.Replace(data, "Ti", "Al", 1)} {
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

func drawnOpen(method string) string {
	return strings.Replace(openedFamily, "METHOD", method, 1) + openedCrystal
}

// typed is the study of one member, its values typed where its braces are.
func typed(f *study.Family, c *study.Candidate) string {
	text := fmt.Sprintf("[[path]]\nname = \"open, member %d\"\n%s%s", c.Index, openedLegs, openedCrystal)
	units := map[string]string{"store": "K", "wait": "s", "edge": "m", "mantle": "ppm", "rim": "ppm", "late": "s"}
	for k, v := range f.Values {
		text = strings.ReplaceAll(text, "{"+v.Name+"}", strconv.FormatFloat(c.Values[k], 'g', -1, 64)+" "+units[v.Name])
	}
	return text
}

// TestOpenMembersAreTheirPaths: with crystals that differ from member to member each
// gets, to the last bit, what it gets as a path of a study with its values written out.
func TestOpenMembersAreTheirPaths(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	const members = 6
	s := openedStudy(t, drawnOpen(fmt.Sprintf(`{ method = "halton", count = %d }`, members)))
	r, rows := screened(t, s, 2)
	f := &s.Families[0]
	for n, want := range []FamilyMethod{{Why: "its start is open in the family"}, {Table: true}} {
		if got := r.Families[0].Methods[n]; got.Table != want.Table || want.Why != "" && got.Why != want.Why {
			t.Errorf("method %d: %+v, want %+v", n, got, want)
		}
	}
	sc, err := NewScreening(t.Context(), s, ScreenOptions{Keep: Keep{All: true}, Method: InSteps})
	if err != nil {
		t.Fatal(err)
	}
	var inSteps []Row
	if err := sc.Screen(t.Context(), 0, sc.Blocks(), func(b *Block) error { inSteps = append(inSteps, b.Rows...); return nil }); err != nil {
		t.Fatal(err)
	}
	verdicts := map[Verdict]bool{}
	for i := range f.Count() {
		var c study.Candidate
		f.At(&c, i)
		want := weighedBy(t, openedStudy(t, typed(f, &c)), 1).Paths[0].Outcome
		got := inSteps[i]
		if got.Verdict != want.Verdict || got.Misfit != want.Misfit || got.Shift != want.Shift || got.Tail != want.Tail {
			t.Errorf("member %d: %+v, want %+v", i, got, want.Finding)
		}
		// With a table for Al the sum differs by that table's error alone.
		const tableError = 1e-2
		if d := rows[i].Misfit - want.Misfit; !(d < tableError*(1+want.Misfit) && d > -tableError*(1+want.Misfit)) {
			t.Errorf("member %d: chi-square %v with a table, want %v", i, rows[i].Misfit, want.Misfit)
		}
		verdicts[got.Verdict] = true
	}
	if len(verdicts) < 2 {
		t.Errorf("verdicts %v: want several", verdicts)
	}
	best := r.Families[0].Best()
	var c study.Candidate
	f.At(&c, best)
	want := weighedBy(t, openedStudy(t, typed(f, &c)), 1).Paths[0]
	if got := r.Paths[0]; got.Outcome.Misfit != want.Outcome.Misfit || got.Profiles[0].Free[0] != want.Profiles[0].Free[0] || got.Path.Name != want.Path.Name {
		t.Errorf("the best, %+v, want %+v", got.Outcome.Finding, want.Outcome.Finding)
	}
	course, err := Follow(t.Context(), s, s.Member(want.Path.Name), nil)
	if err != nil {
		t.Fatal(err)
	}
	for k := range want.Profiles[0].Final {
		if course.Elements[0].Free[0].Value != want.Profiles[0].Free[0].Value || course.Elements[0].Centres[k] != want.Profiles[0].Centres[k] {
			t.Fatalf("followed, core %v, want %v", course.Elements[0].Free[0], want.Profiles[0].Free[0])
		}
	}
}

// TestOpenGrid: a grid over choices of a rim has each as often.
func TestOpenGrid(t *testing.T) {
	text := strings.NewReplacer(`mantle = "50 +- 1 ppm"`, `mantle = { choices = ["48 ppm", "51 ppm", "54 ppm"] }`, `edge = { from = "0 um", to = "1.5 um" }`, `edge = { choices = ["0 um", "2 um"] }`).Replace(drawnOpen(`{ method = "grid", count = 12 }`))
	s := openedStudy(t, text)
	f := &s.Families[0]
	seen := map[string]int{}
	for i := range f.Count() {
		var c study.Candidate
		f.At(&c, i)
		path := c.Path()
		e := &path.Crystal(&s.Crystals[0]).Elements[0]
		seen[fmt.Sprint(e.Rims[1].Value.Value, e.Start.Zones[1].Value, e.Start.Edge.Value)]++
	}
	if f.Count() != 12 || len(seen) != 12 {
		t.Errorf("%d members, rims, mantles and edges %v", f.Count(), seen)
	}
}
