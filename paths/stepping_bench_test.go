package paths

import (
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"

	"bankfire/diffusion/yardstick"
	"bankfire/paths/study"
)

const zonedFamily = `[[family]]
name = "drawn"
draw = { method = "halton", count = 500 }
legs = [
  { name = "first", hold = "{store}", for = "100 yr" },
  { repeat = "{n}", legs = [ { name = "wake", reheat = "{top}", rise = "{rise}", efold = "{efold}", dwell = "{dwell}", for = "{every}" } ] },
]
[family.vary]
n = { from = 3, to = 12 }
store = { from = "675 C", to = "705 C" }
top = { from = "750 C", to = "800 C" }
rise = { from = "1 yr", to = "8 yr" }
dwell = { from = "5 yr", to = "30 yr" }
efold = { from = "5 yr", to = "20 yr" }
every = { from = "100 yr", to = "250 yr" }
[[crystal]]
name = "P"
mineral = "plagioclase"
shape = "slab"
zones = [{ name = "core", width = "80 um", host = 0.30 }, { name = "mid", width = "80 um", host = 0.45 }, { name = "outer", width = "40 um", host = 0.30 }]
host_law = "none"
[[crystal.element]]
name = "Sr"
law = "plagioclase-sr-giletti1994"
partition = "sr-blundy1991"
start = { zones = ["100 ppm", "40 ppm", "70 ppm"], edge = "0 um" }
rim = { held = "outer" }
traverse = { file = "sr.csv", position = "x [um]", zero = "centre", value = "Sr [ppm]", error = "2 ppm", spot = "1.5 um fwhm" }
`

// zonedStudy is strontium in a zoned plagioclase, 60 points, with a family of three to
// twelve reheats, and data that its member 3 has made.
func zonedStudy(b *testing.B) *study.Study {
	b.Helper()
	dir := b.TempDir()
	with := func(value func(i int) float64) *study.Study {
		data := "x [um],Sr [ppm]\n"
		for i := range 60 {
			data += fmt.Sprintf("%g,%g\n", 3+3.2*float64(i), value(i))
		}
		for name, text := range map[string]string{"study.toml": zonedFamily, "sr.csv": data} {
			if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o666); err != nil {
				b.Fatal(err)
			}
		}
		s, err := study.Read(filepath.Join(dir, "study.toml"))
		if err != nil {
			b.Fatal(err)
		}
		return s
	}
	s := with(func(int) float64 { return 50 })
	w, err := newWeighing(s)
	if err != nil {
		b.Fatal(err)
	}
	var c study.Candidate
	s.Families[0].At(&c, 3)
	path := c.Path()
	p, err := newProfile(&w.elements[0], &path, 0)
	if err != nil {
		b.Fatal(err)
	}
	truth, err := p.solveFor(b.Context(), []float64{0})
	if err != nil {
		b.Fatal(err)
	}
	r := rand.New(rand.NewPCG(7, 2))
	return with(func(i int) float64 { return truth[0].Model[i] + 2*r.NormFloat64() })
}

// BenchmarkFamilyInSteps is what a member costs that must be run, in steps of the
// reference kernel: at a glance, with the interval of its shift factor too as all that
// reproduce get it, in full by the exact plan as those in doubt, and like a path that is
// written out.
func BenchmarkFamilyInSteps(b *testing.B) {
	s := zonedStudy(b)
	r := inSteps(b, s)
	var c study.Candidate
	s.Families[0].At(&c, 3)
	path := c.Path()
	ctx := b.Context()
	judged := func(keep bool) func() error {
		return func() error {
			_, _, err := r.judge(ctx, &path, 1, nil, func(Verdict) bool { return keep })
			return err
		}
	}
	for _, test := range []struct {
		what  string
		limit float64 // about twice what it takes; 0 is none
		f     func() error
	}{
		{"glance", 1600, judged(false)},
		{"kept", 2100, judged(true)},
		{"exact", 0, func() error { _, err := r.exactly(ctx, &path, nil); return err }},
		{"path", 0, func() error { _, err := attempted(ctx, &r.elements[0], &path, r.laws); return err }},
	} {
		b.Run("judged="+test.what, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if err := test.f(); err != nil {
					b.Fatal(err)
				}
			}
			steps := yardstick.Steps(func() { _ = test.f() }, test.limit)
			b.ReportMetric(steps, "reference-steps")
			if test.limit > 0 && !(steps <= test.limit) {
				b.Errorf("a member takes %.0f steps of the reference kernel, limit %g", steps, test.limit)
			}
		})
	}
}
