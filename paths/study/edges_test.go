package study

import (
	"strings"
	"testing"
)

// threeZones is the sound study with a third zone, and a second measured element; their
// starts are given.
func threeZones(ti, al string) string {
	text := strings.Replace(sound, `  { name = "skin", width = "20 um" },`, "  { name = \"mantle\", width = \"10 um\" },\n  { name = \"skin\", width = \"10 um\" },", 1)
	start := `start = { zones = ["free", "58 ppm"], edge = "0 um" }`
	second := text[strings.Index(text, "[[crystal.element]]"):]
	second = strings.NewReplacer(`"Ti"`, `"Al"`, start, "start = "+al, "q1.csv", "q2.csv").Replace(second)
	return strings.Replace(text, start, "start = "+ti, 1) + "\n" + second
}

func edgesStart(edge string) string {
	return `{ zones = ["90 ppm", "free", "58 ppm"], edge = ` + edge + ` }`
}

func twoFiles() map[string]string {
	files := soundFiles()
	files["q2.csv"] = files["q1.csv"]
	return files
}

// One width for all boundaries, or one each, which the problem has at its boundaries.
func TestEdgesOfBoundaries(t *testing.T) {
	for _, test := range []struct {
		edge         string
		inner, outer float64 // um
		count        int
	}{
		{`"0.6 um"`, 0.6, 0.6, 1},
		{`["0.6 um", "free 0..2 um"]`, 0.6, 1, 2},
		{`["0.6 +- 0.1 um", "0 um"]`, 0.6, 0, 2},
	} {
		s, err := parse("s.toml", []byte(threeZones(edgesStart(test.edge), edgesStart(`"0 um"`))), memory(twoFiles()))
		if err != nil {
			t.Fatal(err)
		}
		c := &s.Crystals[0]
		p, _, err := c.Problem(&c.Elements[0], s.Paths[0].History)
		if err != nil {
			t.Fatal(err)
		}
		near(t, test.edge+" inside", p.Zones[0].Edge, test.inner*um)
		near(t, test.edge+" outside", p.Zones[1].Edge, test.outer*um)
		if widths := c.Elements[0].Start.Widths(); len(widths) != test.count || p.Zones[2].Edge != 0 {
			t.Errorf("%s: widths %+v, the rim's %g", test.edge, widths, p.Zones[2].Edge)
		}
	}
	t.Run("a list of one is no list", func(t *testing.T) {
		s, err := parse("s.toml", []byte(strings.Replace(sound, `edge = "0 um"`, `edge = ["free 0..2 um"]`, 1)), memory(soundFiles()))
		if err != nil {
			t.Fatal(err)
		}
		if of := &s.Crystals[0].Elements[0].Start; of.Edges != nil || !of.Edge.Ranged() {
			t.Errorf("start %+v", of)
		}
	})
}

func TestWrongEdgesOfBoundaries(t *testing.T) {
	const open = `["free 0..2 um", "free 0..1 um"]`
	for _, test := range []struct{ name, ti, al, field, problem, remedy string }{
		{"one width for two boundaries", `["0.6 um"]`, `"0 um"`, "start.edge", "1 width for 2 between the zones", "one width a boundary"},
		{"three widths", `["0.6 um", "0 um", "0 um"]`, `"0 um"`, "start.edge", "3 widths for 2 between the zones", "one for all without the brackets"},
		{"a width without a unit", `["0.6 um", 3]`, `"0 um"`, "start.edge", "without a unit", "free 0..2 um"},
		{"a width below zero", `["0.6 um", "-3 um"]`, `"0 um"`, "start.edge", "below zero", "free 0..2 um"},
		{"one open for each, one for all", open, `"free 0..2 um"`, "", "Ti and Al leave widths of the edges open, one with a width for each boundary", "in both as a list"},
		{"open in different ways", open, `["0 um", "free 0..2 um"]`, "", "Ti and Al leave the width of the edges open in different ways", "state it alike"},
	} {
		t.Run(test.name, func(t *testing.T) {
			_, err := parse("s.toml", []byte(threeZones(edgesStart(test.ti), edgesStart(test.al))), memory(twoFiles()))
			got := problems(t, err)
			if len(got) != 1 {
				t.Fatalf("%d problems, want one: %v", len(got), err)
			}
			e := got[0]
			if e.Field != strings.TrimSuffix("crystal.element."+test.field, ".") || !strings.Contains(e.Problem, test.problem) || !strings.Contains(e.Remedy, test.remedy) || e.Line == 0 {
				t.Errorf("got %v", e)
			}
		})
	}
	for _, al := range []string{`["free 0..2 um", "0.5 um"]`, `["0.5 um", "free 0..1 um"]`, `"0.5 um"`} {
		if _, err := parse("s.toml", []byte(threeZones(edgesStart(open), edgesStart(al))), memory(twoFiles())); err != nil {
			t.Errorf("%s beside %s: %v", al, open, err)
		}
	}
	t.Run("D by the element itself", func(t *testing.T) {
		text := threeZones(`{ zones = ["90 ppm", "80 ppm", "58 ppm"], edge = `+open+` }`, edgesStart(`"0 um"`))
		text = strings.Replace(text, `law = "quartz-ti-cherniak2007"`, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", own = { ln_slope = 0.1 } }`, 1)
		_, err := parse("s.toml", []byte(text), memory(twoFiles()))
		if got := problems(t, err); len(got) != 1 || !strings.Contains(got[0].Problem, "one width of its edges can be open, and 2 are") {
			t.Errorf("got %v", err)
		}
	})
}
