package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"bankfire/paths/study"
)

// randomFamily is a study of one crystal of any shape, of two or three zones, with a law
// of its own and a rim that is held or sealed, and a family of paths along which it
// diffuses from hardly to far, of legs of any kinds. Its data are blurred steps with
// errors.
func randomFamily(t *testing.T, r *rand.Rand, count int) *study.Study {
	t.Helper()
	within := func(lo, hi float64) float64 { return lo + (hi-lo)*r.Float64() }
	pick := func(list ...string) string { return list[r.IntN(len(list))] }
	energy := within(180, 350)                                                    // kJ/mol
	d0 := 1e-21 * math.Exp(energy*1e3/8.314462618/1023.15) * within(0.3, 3)       // m2/s
	widths := []float64{within(20, 60), within(8, 30), within(8, 30)}[r.IntN(2):] // um
	free := r.IntN(2) == 0
	var zones, plateaux []string
	values := []float64{within(60, 120), within(20, 50), within(60, 90)}
	size := 0.0
	for k, w := range widths {
		zones = append(zones, fmt.Sprintf(`{ name = "z%d", width = "%.3f um" }`, k, w))
		plateaux = append(plateaux, fmt.Sprintf(`"%.4g ppm"`, values[k]))
		if free {
			plateaux[k] = `"free"`
		}
		size += w
	}
	rim := `"sealed"`
	if r.IntN(2) == 0 {
		rim = fmt.Sprintf(`{ held = "z%d" }`, len(widths)-1)
	}
	legs := []string{`{ name = "store", hold = "{store}", for = "{wait}" }`}
	legs = append(legs, []string{
		`{ name = "wake", reheat = "{store} + 80 K", rise = "1 yr", efold = "3 yr", dwell = "{dwell}" }`,
		`{ name = "cool", ramp = "600 C", for = "{dwell}" }`,
		`{ name = "cool", relax = "500 C", efold = "{dwell}", for = "100 yr" }`,
	}[r.IntN(3)])
	text := fmt.Sprintf(`[[family]]
name = "drawn"
seed = %d
draw = { method = "random", count = %d }
legs = [ %s ]
[family.vary]
store = { from = "680 C", to = "800 C" }
wait = { from = "1 yr", to = "1 kyr", spread = "log" }
dwell = { from = "1 yr", to = "50 yr" }
[[crystal]]
name = "C"
mineral = "quartz"
shape = "%s"
zones = [ %s ]
[[crystal.element]]
name = "Ti"
law = { D0 = "%.6g m2/s", E = "%.4g kJ/mol" }
start = { zones = [ %s ], edge = "%s" }
rim = %s
traverse = { file = "ti.csv", position = "x [um]", zero = "centre", value = "Ti [ppm]", error = "%.3g ppm", spot = "%.2g um fwhm" }
`, r.IntN(1000), count, strings.Join(legs, ", "), pick("slab", "cylinder", "ball"), strings.Join(zones, ", "), d0, energy,
		strings.Join(plateaux, ", "), pick("0 um", "0.5 um", "3 um"), rim, within(0.5, 3), within(0.3, 2))
	data := "x [um],Ti [ppm]\n"
	blur, noise := within(0.5, 8), within(0.5, 3)
	for k := range 20 + r.IntN(30) {
		x := size * (float64(k) + 0.5) / 50
		y, at := values[0], 0.0
		for z := range len(widths) - 1 {
			at += widths[z]
			y += (values[z+1] - values[z]) * math.Erfc((at-x)/blur) / 2
		}
		data += fmt.Sprintf("%.6g,%.6g\n", x, y+noise*r.NormFloat64())
	}
	dir := t.TempDir()
	for name, text := range map[string]string{"study.toml": text, "ti.csv": data} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	s, err := study.Read(filepath.Join(dir, "study.toml"))
	if err != nil {
		t.Fatalf("%v\n%s", err, text)
	}
	return s
}

// missed is the true error of a run along a member, in sigma: how far what the traverse
// sees is from what it sees by a plan so fine that nothing is left of the error, with
// the values of the fit.
func missed(t *testing.T, r *runner, p *profile, path *study.Path) float64 {
	t.Helper()
	if _, err := p.solveFor(t.Context(), []float64{0}); err != nil {
		t.Fatal(err)
	}
	at := p.fitRun(0, nil)
	_, tilt, origin := p.lens.values(at.Bent)
	seen := p.lens.through(p.amounts(at).of(p.columns(0)[0]), tilt, origin)
	fine, err := newProfile(&r.elements[0], path, 2)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := fine.solveFor(t.Context(), []float64{0}); err != nil {
		t.Fatal(err)
	}
	truth := fine.lens.through(p.amounts(at).of(fine.columns(0)[0]), tilt, origin)
	worst := 0.0
	for i := range seen {
		worst = math.Max(worst, math.Abs(seen[i]-truth[i])/p.fit.Sigma[i])
	}
	return worst
}

// TestTablesAgreeWithSteps judges members of random families by the table and in steps.
// Verdicts are the same but where chi-square is so near to the critical one that its
// errors decide, and up to where curves are refined it may differ by what is stated for
// the curve of the table, and by what numerical errors as large as is stated, at each
// datum, do to it: its root is a length. So may shift factors, of which a
// standard deviation is a length of one. And true errors are within the stated ones.
func TestTablesAgreeWithSteps(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	families, members := 12, int64(3)
	switch {
	case *long:
		families = 200
	case underRace:
		families = 2
	}
	r := rand.New(rand.NewPCG(7, 2026))
	runs, beyond, passing := 0, 0, 0
	for k := range families {
		s := randomFamily(t, r, 100)
		steps := inSteps(t, s)
		e := &steps.elements[0]
		engine, err := steps.engine(t.Context(), &s.Families[0], steps.first, ByTable, Keep{})
		if err != nil {
			t.Fatal(err)
		}
		table := engine.tables[0]
		var c study.Candidate
		for i := range members {
			s.Families[0].At(&c, i*97%100)
			path := c.Path()
			lnG := e.element.Law.Law.LnIntegral(&c.History, 0, c.History.Life())
			cs, each, err := steps.lay(t.Context(), steps.quick, &path, nil)
			if err != nil {
				t.Fatal(err)
			}
			stated, err := steps.audit(cs)
			if err != nil {
				t.Fatal(err)
			}
			runs++
			if missed(t, steps, steps.quick[0], &path) > stated {
				beyond++
			}
			sum, err := settle(cs, each, Critical(s.Confidence, max(cs[0].Points-cs[0].Free, 1)))
			if err != nil {
				t.Fatal(err)
			}
			shift, shift95, err := bounds(cs, each, sum)
			if err != nil {
				t.Fatal(err)
			}
			by := table.find(lnG, s.Confidence)
			length := math.Sqrt(float64(by.Points)) * (stated + table.numErr)
			misfit := cs[0].At(0)
			allowed := tableError(by.Misfit, table.lowest) + 2*math.Sqrt(by.Misfit)*length + length*length
			far := math.Min(by.Misfit, misfit) > table.lowest+concern // no curve is refined there
			if !far && !(math.Abs(by.Misfit-misfit) <= allowed) {
				t.Errorf("family %d, member %d: chi-square %v by table, %v in steps, allowed %v", k, c.Index, by.Misfit, misfit, allowed)
			}
			glanced, sure, err := steps.slack.glanced(cs, each, &sum, s.Confidence)
			if err != nil {
				t.Fatal(err)
			}
			if near := math.Abs(misfit-Critical(s.Confidence, max(by.Degrees, 1))) <= allowed; sure && !near && glanced.Verdict != by.Verdict {
				t.Errorf("family %d, member %d: %v by table, %v in steps", k, c.Index, by.Verdict, glanced.Verdict)
			}
			if width := math.Log(by.Shift95[1] / by.Shift95[0]); width < 20 { // else the data leave a side open
				passing++
				curve := table.on(lnG)
				for q, ends := range [][2]float64{{by.Shift, shift}, {by.Shift95[0], shift95[0]}, {by.Shift95[1], shift95[1]}} {
					x, y := math.Log(ends[0]), math.Log(ends[1])
					flat := math.Abs(curve.At(x)-curve.At(y)) <= 4*curveError // both may be off by as much at two places
					if allowed := 2*shiftError + width*(0.02+length/(2*1.96)); !flat && !(math.Abs(x-y) <= allowed) {
						t.Errorf("family %d, member %d: shift factor %v %v by table, %v %v in steps (%d)", k, c.Index, by.Shift, by.Shift95, shift, shift95, q)
					}
				}
			}
		}
	}
	t.Logf("%d members, %d with a shift factor; the true error of %d is beyond the stated", runs, passing, beyond)
	if float64(beyond) > math.Max(1, 0.01*float64(runs)) {
		t.Errorf("the true error is beyond the stated one in %d of %d", beyond, runs)
	}
	if passing < runs/2 {
		t.Errorf("only %d of %d members have a shift factor", passing, runs)
	}
}
