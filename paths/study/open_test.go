package study

import (
	"fmt"
	"reflect"
	"slices"
	"strconv"
	"strings"
	"testing"

	"bankfire/thermal"
)

// openLegs1 are the legs of the study whose crystals are open.
const openLegs1 = `[ { name = "store", hold = "{store}", for = "{life}" }, { name = "wake", ramp = "800 C", for = "50 yr" } ]`

// openVary varies what stands in braces in it and in openCrystal.
const openVary = `store = { from = "690 C", to = "740 C" }
life = { from = "2 kyr", to = "5 kyr" }
edge = { from = "0 um", to = "3 um" }
core = { from = "80 ppm", to = "110 ppm" }
outside = { choices = ["40 ppm", "60 ppm"] }
late = "30 +- 2 yr"
grown = "{life} - 2 * {late}"
melt = "200 +- 10 ppm"
hot = { from = "760 C", to = "790 C" }
rate = { from = "-0.01 um/yr", to = "0.02 um/yr" }
`

// openCrystal has braces wherever a crystal may.
const openCrystal = `[[crystal]]
name = "P1"
mineral = "plagioclase"
shape = "slab"
exists_from = "{late} after start"
dissolves = { above = "{hot} + 100 K", longer = "{late}" }
grows = [ { rate = "{rate}", from = "{late} after start of wake", until = "end of wake" } ]
zones = [ { name = "core", width = "140 um", host = 0.5 }, { name = "mantle", width = "60 um", host = 0.4, added = "{grown} after start" } ]
[[crystal.element]]
name = "Sr"
law = "plagioclase-sr-giletti1994"
partition = "sr-blundy1991"
start = { zones = ["{core}", "58 ppm"], edge = "{edge}" }
rim = [ { held = "mantle" }, { held = "{outside} + 1 ppm", from = "{late} before eruption" } ]
[[crystal.element]]
name = "Mg"
law = "mine"
partition = "sr-blundy1991"
start = { melt = ["{melt}", "210 ppm"], temperature = ["{hot}", "{hot} - 10 K"] }
rim = [ { held = "mantle" }, { following = "sr-blundy1991", melt = "{melt}", from = "{late} before eruption" } ]
[[crystal]]
name = "closed"
mineral = "quartz"
shape = "slab"
zones = [ { name = "core", width = "140 um" }, { name = "mantle", width = "60 um" } ]
[[crystal.element]]
name = "Ti"
law = "mine"
start = { zones = ["80 ppm", "58 ppm"], edge = "1 um" }
rim = { held = "mantle" }
`

const openLaw = "[[law]]\nname = \"mine\"\nD0 = \"7e-8 m2/s\"\nE = \"273 kJ/mol\"\n"

func openText(count int) string {
	return openLaw + "[[family]]\nname = \"open\"\nlegs = " + openLegs1 + fmt.Sprintf("\ndraw = { method = \"halton\", count = %d }\n[family.vary]\n", count) + openVary + openCrystal
}

func readOpen(t *testing.T, text string) *Study {
	t.Helper()
	s, err := parse("s.toml", []byte(text), memory(nil))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// writtenOut is the study with the values of a member typed where its braces are, in SI.
func writtenOut(f *Family, c *Candidate) string {
	text := openLaw + "[[path]]\nname = \"written\"\nlegs = " + openLegs1 + "\n" + openCrystal
	value := map[string]float64{}
	for k := range f.Values {
		value[f.Values[k].Name] = c.Values[k]
	}
	exact := func(x float64, unit string) string { return strconv.FormatFloat(x, 'g', -1, 64) + " " + unit }
	pairs := []string{ // sums first
		"{hot} + 100 K", exact(value["hot"]+100, "K"), "{hot} - 10 K", exact(value["hot"]-10, "K"), "{outside} + 1 ppm", exact(value["outside"]+1, "ppm"),
	}
	for name, unit := range map[string]string{"store": "K", "life": "s", "edge": "m", "core": "ppm", "late": "s", "grown": "s", "melt": "ppm", "hot": "K", "rate": "m/s"} {
		pairs = append(pairs, "{"+name+"}", exact(value[name], unit))
	}
	return strings.NewReplacer(pairs...).Replace(text)
}

// TestOpenCrystalsAreWrittenOnes: a member's crystals make the same problems, to the
// bit, as those of the study with its values written out.
func TestOpenCrystalsAreWrittenOnes(t *testing.T) {
	s := readOpen(t, openText(60))
	f := &s.Families[0]
	var c Candidate
	edges := map[float64]bool{}
	for i := range f.Count() {
		f.At(&c, i)
		s.Bar(&c)
		if c.Barred != "" {
			t.Fatalf("member %d: %s, %s", i, c.Barred, c.Why)
		}
		written := readOpen(t, writtenOut(f, &c))
		path := c.Path()
		if !slices.Equal(path.History.Legs(), written.Paths[0].History.Legs()) {
			t.Fatalf("member %d: legs %v, want %v", i, path.History.Legs(), written.Paths[0].History.Legs())
		}
		for j := range s.Crystals {
			got, want := path.Crystal(&s.Crystals[j]), &written.Crystals[j]
			if got.Dissolves != nil && (got.Dissolves.Temp != want.Dissolves.Temp || got.Dissolves.Most != want.Dissolves.Most) {
				t.Errorf("member %d dissolves %+v, want %+v", i, got.Dissolves, want.Dissolves)
			}
			for k := range got.Elements {
				a, _, err := got.Problem(&got.Elements[k], path.History)
				if err != nil {
					t.Fatal(err)
				}
				b, _, err := want.Problem(&want.Elements[k], written.Paths[0].History)
				if err != nil {
					t.Fatal(err)
				}
				if !reflect.DeepEqual(a.Zones, b.Zones) || !reflect.DeepEqual(a.Outer, b.Outer) || !reflect.DeepEqual(a.Moves, b.Moves) {
					t.Fatalf("member %d, %s:\n%+v\n%+v, want\n%+v\n%+v", i, got.Elements[k].Name, a.Zones, a.Outer, b.Zones, b.Outer)
				}
			}
		}
		edges[path.Crystal(&s.Crystals[0]).Elements[0].Start.Edge.Value] = true
	}
	if len(edges) != 60 {
		t.Errorf("%d different edges", len(edges))
	}
}

// TestOpenSaysWhatIs: which elements a family cannot share a table for.
func TestOpenSaysWhatIs(t *testing.T) {
	s := readOpen(t, openText(5))
	var got []string
	for _, c := range s.Crystals {
		for _, e := range c.Elements {
			got = append(got, e.Open)
		}
	}
	if want := []string{"when zones of its crystal were added", "when zones of its crystal were added", ""}; !slices.Equal(got, want) {
		t.Errorf("open are %q, want %q", got, want)
	}
	if !slices.ContainsFunc(s.Notes, func(note string) bool {
		return strings.Contains(note, `crystal.element.start.edge = "{edge}"`) && strings.Contains(note, `in the middle of family "open"`)
	}) {
		t.Errorf("notes %q", s.Notes)
	}
}

// TestOpenMembersByName: a member that goes by its name has its crystals.
func TestOpenMembersByName(t *testing.T) {
	s := readOpen(t, openText(20))
	var c Candidate
	s.Families[0].At(&c, 17)
	p := s.Member("open, member 17")
	if got := p.Crystal(&s.Crystals[0]).Elements[0].Start.Edge.Value; got != c.Values[2] {
		t.Errorf("edge %v, want %v", got, c.Values[2])
	}
}

// TestOpenCrystalsBar: values with which a crystal cannot be bar the member.
func TestOpenCrystalsBar(t *testing.T) {
	text := strings.Replace(openText(200), `edge = { from = "0 um", to = "3 um" }`, `edge = { from = "0 um", to = "3 m" }`, 1)
	s := readOpen(t, text)
	var c Candidate
	barred := 0
	for i := range s.Families[0].Count() {
		if s.Families[0].At(&c, i); c.Barred != "" {
			barred++
			if !strings.HasPrefix(c.Barred, "crystal.element.start.edge on line ") || c.Why != "more than 1 m" {
				t.Fatalf("%q, %q", c.Barred, c.Why)
			}
		}
	}
	if barred < 100 || barred > 160 { // two thirds of an even range
		t.Errorf("%d barred of 200", barred)
	}
}

// TestWrongOpen: braces in crystals that cannot be meant.
func TestWrongOpen(t *testing.T) {
	for _, test := range []struct{ name, old, new, field, problem, remedy string }{
		{"unknown name", `edge = "{edge}"`, `edge = "{edgy} + {edge}"`, "crystal.element.start.edge", `no value is named "edgy"`, "did you mean {edge}?"},
		{"wrong kind", `edge = "{edge}"`, `edge = "{core}"`, "crystal.element.start.edge", "a concentration in ppm where a length belongs", ""},
		{"a time as a value", `"{core}"`, `"{late}"`, "crystal.element.start.zones", "a duration where a concentration belongs", "58 ppm"},
		{"a temperature as a moment", `"{grown} after start"`, `"{hot} after start"`, "crystal.zones.added", "a temperature where a duration belongs", ""},
		{"a bare duration", `"{grown} after start"`, `"{grown}"`, "crystal.zones.added", "a duration, not a moment", "after start"},
		{"a rate of growth", `rate = "{rate}"`, `rate = "{edge}"`, "crystal.grows.rate", "a length where a velocity belongs", "5 um/yr"},
		{"a width", `width = "140 um"`, `width = "100 um + {edge}"`, "crystal.zones.width", "does not vary within a family", "starts, in rims and in moments"},
		{"unused", `edge = "{edge}"`, `edge = "1 um"`, "family.vary.edge", "nothing uses the value", "in a leg or a crystal"},
		{"two units", `"{outside} + 1 ppm"`, `"{outside} + 1 mole fraction"`, "crystal.element.rim.held", "a concentration in ppm and a concentration in mole fraction do not add up", ""},
		{"a written path beside it", "[[crystal]]", "[[path]]\nname = \"written\"\nlegs = [ { hold = \"700 C\", for = \"9 kyr\" } ]\n[[crystal]]", "crystal.zones.added", `open, but path "written" is written out`, "a family"},
		{"another family without it", "[[crystal]]", "[[family]]\nname = \"other\"\nlegs = [ { hold = \"{edge}\", for = \"9 kyr\" } ]\ndraw = { method = \"halton\", count = 5 }\n[family.vary]\nedge = { from = \"700 C\", to = \"800 C\" }\n[[crystal]]", "crystal.zones.added", `family "other": no value is named "grown"`, "every family"},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := strings.Replace(openText(5), test.old, test.new, 1)
			_, err := parse("s.toml", []byte(text), memory(nil))
			list := problems(t, err)
			if !slices.ContainsFunc(list, func(e *thermal.InputError) bool {
				return e.Field == test.field && e.Line > 0 && strings.Contains(e.Problem, test.problem) && strings.Contains(e.Remedy, test.remedy)
			}) {
				t.Errorf("%v\nwant field %s, %q, %q", err, test.field, test.problem, test.remedy)
			}
		})
	}
}

func BenchmarkOpenCrystals(b *testing.B) {
	s, err := parse("s.toml", []byte(openText(1000)), memory(nil))
	if err != nil {
		b.Fatal(err)
	}
	var c Candidate
	for i := int64(0); b.Loop(); i++ {
		s.Families[0].At(&c, i%1000)
	}
}
