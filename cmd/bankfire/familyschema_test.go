package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"bankfire/paths"
	"bankfire/paths/study"
)

// TestFamiliesKeepSchema checks the summaries of families that were looked up, run, all
// barred and not screened at all, the last three of few members.
func TestFamiliesKeepSchema(t *testing.T) {
	const vary = `legs = [ { name = "store", hold = "{store}", for = "100 yr" }, { ramp = "{store}", for = "1 yr" } ]
vary = { store = { from = "LOW C", to = "760 C" } }
[[family]]
`
	family := func(name, low, count string) string {
		return "name = \"" + name + "\"\ndraw = { method = \"random\", count = " + count + " }\n" + strings.Replace(vary, "LOW", low, 1)
	}
	text := "[limits]\nlowest = \"600 C\"\n[[threshold]]\nname = \"hot\"\ntemperature = \"740 C\"\n[[family]]\n" +
		family("some", "640", "200") + family("none", "740", "3") + family("cold", "500", "2")
	text = strings.TrimSuffix(text, "[[family]]\n") + smallStudy[strings.Index(smallStudy, "[[crystal]]"):]
	dir := t.TempDir()
	for name, text := range map[string]string{"study.toml": text, "ti.csv": smallTraverse} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	for _, by := range []paths.Method{paths.ByChoice, paths.InSteps} {
		s, err := study.Read(filepath.Join(dir, "study.toml"))
		if err != nil {
			t.Fatal(err)
		}
		screening, err := paths.NewScreening(t.Context(), s, paths.ScreenOptions{Method: by})
		if err != nil {
			t.Fatal(err)
		}
		tallies := make([]paths.Tally, 3)
		from := int64(by) / int64(paths.InSteps) // in steps only the small ones
		if err := screening.Screen(t.Context(), from, 3, func(b *paths.Block) error { tallies[b.Family].Add(&b.Tally); return nil }); err != nil {
			t.Fatal(err)
		}
		r, err := screening.Finish(t.Context(), tallies)
		if err != nil {
			t.Fatal(err)
		}
		w := summarise(r, thisProgram())
		if err := resolve(t, readSchema(t)).Validate(asJSON(t, w)); err != nil {
			t.Errorf("method %d: %v", by, err)
		}
		some := w.Families[0]
		switch {
		case by == paths.ByChoice && (some.Sampled < 5 || len(some.Duration) < 2 || len(some.Shares) != 2 || *some.Shares[0].Leg != "store" || *some.Shares[1].Kind != "ramp" || some.Engines[0].Error == nil):
			t.Errorf("by table: %+v", some)
		case by == paths.InSteps && (some.Screened != 0 || some.Count != 200 || some.Engines[0].Error != nil || w.Families[1].Screened != 3):
			t.Errorf("in steps: %+v", some)
		}
	}
}
