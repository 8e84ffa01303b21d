package paths

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"bankfire/diffusion/yardstick"
	"bankfire/paths/study"
)

// reheated is a family of stores that are reheated 3 to 12 times in 1000 to 3000 years, each time by a ramp, a hold and a
// relaxation: 23 legs in the mean.
const reheated = `[[family]]
name = "reheated"
draw = { method = "halton", count = COUNT }
legs = [ { hold = "{store}", for = "{life} - {wakes} * 80 yr" },
  { repeat = "{wakes}", legs = [ { reheat = "{peak}", rise = "{rise}", dwell = "{dwell}", efold = "{efold}", for = "80 yr" } ] } ]
[family.vary]
wakes = { from = 3, to = 12 }
life = { from = "1000 yr", to = "3000 yr" }
store = { from = "675 C", to = "705 C" }
peak = { from = "750 C", to = "800 C" }
rise = { from = "1 yr", to = "8 yr" }
dwell = { from = "5 yr", to = "30 yr" }
efold = { from = "5 yr", to = "20 yr" }
`

// twoLegs is a family of a store and a ramp from it.
const twoLegs = `[[family]]
name = "ramped"
draw = { method = "halton", count = COUNT }
legs = [ { hold = "{store}", for = "{life}" }, { ramp = "{peak}", for = "{rise}" } ]
[family.vary]
life = { from = "1000 yr", to = "3000 yr" }
store = { from = "675 C", to = "705 C" }
peak = { from = "750 C", to = "800 C" }
rise = { from = "1 yr", to = "80 yr" }
`

// tenfold makes the reheatings ten: 31 legs.
var tenfold = strings.NewReplacer("wakes = { from = 3, to = 12 }\n", "", `"{wakes}"`, "10", "{wakes} * 80 yr", "800 yr")

// reheatedStudy is a study of a traverse with 60 points, spread by 4 um, and that family, of so many members.
func reheatedStudy(b *testing.B, family string, count int) *study.Study {
	b.Helper()
	text := strings.Replace(family, "COUNT", strconv.Itoa(count), 1) + strings.Replace(familyCrystal, "RIM", `{ held = "mantle" }`, 1)
	var data strings.Builder
	data.WriteString("x [um],Ti [ppm]\n")
	for i := range 60 {
		x := float64(i) + 0.5
		value := 75 + 25*math.Erf((40-x)/9) + float64(i*7%5-2)
		data.WriteString(fmt.Sprintf("%g,%.1f\n", x, value))
	}
	dir := b.TempDir()
	for name, text := range map[string]string{"study.toml": text, "ti.csv": data.String()} {
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

// BenchmarkScreening is what a member takes where the diffusion integral is enough: it is drawn, built, integrated, judged by
// the table and counted. It also holds that time to steps of the reference kernel.
func BenchmarkScreening(b *testing.B) {
	for _, test := range []struct {
		name, family string
		limit        float64
	}{
		{"legs=2", twoLegs, 1.2},
		{"legs=31", tenfold.Replace(reheated), 2.2},
		{"legs=10-37", reheated, 1.6},
	} {
		b.Run(test.name, func(b *testing.B) { screeningSteps(b, test.family, test.limit) })
	}
}

// screeningSteps screens the family and holds a member to so many steps of the reference kernel.
func screeningSteps(b *testing.B, family string, limit float64) {
	const members = 512 // few, so that a busy machine leaves some measurements alone
	screening, err := NewScreening(b.Context(), reheatedStudy(b, family, members), ScreenOptions{})
	if err != nil {
		b.Fatal(err)
	}
	var counts [Barred + 1]int64
	screen := func() {
		if err := screening.Screen(b.Context(), 0, screening.Blocks(), func(block *Block) error {
			counts = block.Tally.Counts
			return nil
		}); err != nil {
			b.Fatal(err)
		}
	}
	for b.Loop() {
		screen()
	}
	if counts[Reproduces] == 0 || counts[Reproduces] == members || counts[Barred] > 0 {
		b.Fatalf("%d of %d members reproduce, %d are barred", counts[Reproduces], members, counts[Barred])
	}
	best := yardstick.Steps(screen, limit*members) / members
	b.ReportMetric(best, "reference-steps/member")
	b.ReportMetric(float64(b.N)*members/b.Elapsed().Seconds(), "members/s")
	if !(best <= limit) {
		b.Errorf("a member takes %.2f steps of the reference kernel, limit %g", best, limit)
	}
}

// BenchmarkMember is the parts of it.
func BenchmarkMember(b *testing.B) {
	s := reheatedStudy(b, reheated, 100_000)
	f, law := &s.Families[0], s.Crystals[0].Elements[0].Law.Law
	var c study.Candidate
	i := int64(0)
	b.Run("part=At", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			f.At(&c, i%f.Count())
			i++
		}
	})
	b.Run("part=LnIntegral", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			law.LnIntegral(&c.History, 0, c.History.Life())
		}
	})
}
