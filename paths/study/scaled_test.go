package study

import (
	"math"
	"slices"
	"strings"
	"testing"
)

// copied is the sound study with another element before Ti, whose start is given.
func copied(start, of string) string {
	text := strings.Replace(sound, `start = { zones = ["free", "58 ppm"], edge = "0 um" }`, "start = "+start, 1)
	return strings.Replace(text, "[[crystal.element]]", of+"[[crystal.element]]", 1)
}

const copiedP = `[[crystal.element]]
name = "P"
law = "mine"
start = { zones = ["free", "free"], edge = "0 um" }
traverse = { file = "p.csv", position = "x [um]", zero = "rim", value = "P [ppm]", error = "2 ppm", spot = "point" }

`

// pFiles are those of the sound study and P: medians of 300 in the core and of 100 in
// the skin, which begins 20 um from the rim.
func pFiles() map[string]string {
	files := soundFiles()
	files["p.csv"] = "x [um],P [ppm]\n2,90\n8,100\n12,104\n30,280\n50,320\n70,300\n"
	files["flat.csv"] = "x [um],P [ppm]\n2,90\n8,90\n12,90\n30,90\n50,90\n70,90\n"
	files["skin.csv"] = "x [um],P [ppm]\n2,90\n8,100\n12,104\n"
	files["limit.csv"] = "x [um],P [ppm]\n2,90\n8,100\n12,104\n30,<280\n"
	return files
}

// One step a zone: each is at an end of the shape, and so is the rim.
func TestScaledSteps(t *testing.T) {
	text := copied(`{ scaled = "P", lowest = "40 ppm", smooth = "steps", edge = "1 um" }`, copiedP)
	s, err := parse("s.toml", []byte(text), memory(pFiles()))
	if err != nil {
		t.Fatal(err)
	}
	c := &s.Crystals[0]
	p, free, err := c.Problem(&c.Elements[1], s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "core", p.Zones[0].Start, 0)
	near(t, "skin, where P is lowest", p.Zones[1].Start, 40)
	near(t, "edge", p.Zones[0].Edge, 1*um)
	near(t, "rim", p.Outer[0].Value, 40)
	if len(free) != 1 || free[0].Name != "at highest P" || !slices.Equal(p.Free[0].Start, []float64{1, 0}) || !slices.Equal(p.Free[0].Outer, []float64{0}) || p.Profile != nil {
		t.Errorf("free %+v of %+v", free, p.Free)
	}
}

// By a spline, least and most of it are the two values; a rim held at a zone has the
// spline's value at the rim, or at the end of the zone that is nearest to it.
func TestScaledSpline(t *testing.T) {
	s := everyKey(t)
	c := &s.Crystals[0]
	i := slices.IndexFunc(c.Elements, func(e Element) bool { return e.Name == "B" })
	e := c.Elements[i]
	of := e.Start.Scaled
	near(t, "lowest", of.Lowest.Value, 60)
	near(t, "its error", of.Lowest.Sigma, 2)
	near(t, "highest", of.Highest.Value, 90)
	near(t, "width", of.Width, 40*um)
	p, free, err := c.Problem(&e, s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	if len(free) != 1 || free[0].Name != "at lowest Al" || free[0].Prior.Sigma != 2 {
		t.Fatalf("free %+v", free)
	}
	lo, hi := math.Inf(1), math.Inf(-1)
	for r := c.R0; r <= c.Size(); r += um / 10 {
		x := p.Profile(r)
		lo, hi = min(lo, x), max(hi, x)
		near(t, "1 and what the free value adds", 1+p.Free[0].Profile(r), 2-(x-60)/30)
	}
	const fine = 1e-3 // of where, in steps of 0.1 um, the ends are looked for
	if !(lo >= 60*(1-roundOff) && lo < 60+fine && hi <= 90*(1+roundOff) && hi > 90-fine) {
		t.Errorf("from %g to %g, want 60 to 90", lo, hi)
	}
	near(t, "rim", p.Outer[0].Value, p.Profile(c.Size()))
	near(t, "inner rim, held at the core", p.Inner[0].Value, p.Profile(c.R0))
	near(t, "what the free value adds at the rim", p.Free[0].Outer[0], p.Free[0].Profile(c.Size()))
	e.Rims = slices.Clone(e.Rims)
	e.Rims[0].Zone = 1
	if p, _, err = c.Problem(&e, s.Paths[0].History); err != nil {
		t.Fatal(err)
	}
	near(t, "rim, held at the mantle", p.Outer[0].Value, p.Profile(c.Size()-12*um))
}

// A traverse across the centre is folded, and what meets there is averaged.
func TestPlacedFolds(t *testing.T) {
	files := pFiles()
	files["p.csv"] = "x [um],P [ppm]\n-60,10\n-30,20\n0,30\n30,24\n60,14\n90,5\n"
	text := copied(`{ scaled = "P", smooth = "spline", width = "30 um" }`, strings.Replace(copiedP, `zero = "rim"`, `zero = "centre"`, 1))
	s, err := parse("s.toml", []byte(text), memory(files))
	if err != nil {
		t.Fatal(err)
	}
	of := s.Crystals[0].Elements[1].Start.Scaled
	for i, want := range [][2]float64{{0, 30}, {30 * um, 22}, {60 * um, 12}, {90 * um, 5}} {
		near(t, "position", of.Position[i], want[0])
		near(t, "value", of.Value[i], want[1])
	}
	notes := strings.Join(s.Notes, "\n")
	for _, want := range []string{"Ti: starts as P is zoned, by a spline through 4 points that averages over 30 um, taken as exact and as blurred as it was measured",
		"Ti: the width of its start, 30 um, holds few points 30 um apart", "Ti: its start is not measured over the outermost 30 um"} {
		if !strings.Contains(notes, want) {
			t.Errorf("notes %q do not say %q", notes, want)
		}
	}
}

func TestWrongScaledStarts(t *testing.T) {
	const steps = `smooth = "steps"`
	with := func(file string) string { return strings.Replace(copiedP, "p.csv", file, 1) }
	elsewhere := "\n[[crystal]]\nname = \"Q2\"\nmineral = \"quartz\"\nshape = \"slab\"\nzones = [ { name = \"core\", width = \"90 um\" } ]\n" +
		"[[crystal.element]]\nname = \"P\"\nlaw = \"mine\"\nstart = { zones = [\"90 ppm\"] }\n"
	for _, test := range []struct{ name, start, of, after, field, problem, remedy string }{
		{"no such element", `{ scaled = "Pb", ` + steps + ` }`, copiedP, "", "scaled", "no element of this crystal has this name", `did you mean "P"?`},
		{"in another crystal", `{ scaled = "P", ` + steps + ` }`, "", elsewhere, "scaled", "an element of another crystal", "same crystal"},
		{"of itself", `{ scaled = "Ti", ` + steps + ` }`, copiedP, "", "scaled", "the element itself", "hardly diffused"},
		{"not measured", `{ scaled = "P", ` + steps + ` }`, "[[crystal.element]]\nname = \"P\"\nlaw = \"mine\"\nstart = { zones = [\"9 ppm\", \"8 ppm\"], edge = \"0 um\" }\n", "", "scaled", "has no traverse", "has a traverse"},
		{"of a copy", `{ scaled = "P", ` + steps + ` }`, copiedP + strings.NewReplacer(`"P"`, `"Q"`, `{ zones = ["free", "free"], edge = "0 um" }`, `{ zones = ["free", "free"], edge = "1 um" }`, "p.csv", "limit.csv", `spot =`, `below = "skip", spot =`).Replace(copiedP),
			"", "", "", ""},
		{"the same in all zones", `{ scaled = "P", ` + steps + ` }`, with("flat.csv"), "", "scaled", "the same in all zones", "zones themselves"},
		{"the same everywhere", `{ scaled = "P", smooth = "spline", width = "20 um" }`, with("flat.csv"), "", "scaled", "the same all through the crystal", "zones themselves"},
		{"a zone without a point", `{ scaled = "P", ` + steps + ` }`, with("skin.csv"), "", "scaled", "no point of its traverse lies in zone core", "spline"},
		{"too few points", `{ scaled = "P", smooth = "spline", width = "5 um" }`, with("skin.csv"), "", "scaled", "3 points, and a spline is made of 4 to 2000", "steps"},
		{"wider than the traverse", `{ scaled = "P", smooth = "spline", width = "90 um" }`, copiedP, "", "width", "wider than the traverse, which is 68 um long", "choose a width"},
		{"below detection", `{ scaled = "P", ` + steps + ` }`, strings.Replace(with("limit.csv"), "spot =", `below = "limit", spot =`, 1), "", "scaled", "below detection", `below = "skip"`},
		{"not smoothed", `{ scaled = "P" }`, copiedP, "", "smooth", "missing", "spline"},
		{"spline without a width", `{ scaled = "P", smooth = "spline" }`, copiedP, "", "width", "missing", "8 um"},
		{"edges of a spline", `{ scaled = "P", smooth = "spline", width = "20 um", edge = "1 um" }`, copiedP, "", "edge", "a start by a spline has no edges", "steps"},
		{"with zones", `{ zones = ["free", "58 ppm"], scaled = "P", ` + steps + ` }`, copiedP, "", "scaled", "given in another way as well", "keep one"},
		{"lowest of zones", `{ zones = ["free", "58 ppm"], lowest = "9 ppm", edge = "0 um" }`, copiedP, "", "lowest", "goes with scaled", "leave it out"},
		{"lowest in words", `{ scaled = "P", lowest = "little", ` + steps + ` }`, copiedP, "", "lowest", "neither a value nor free", "58 ppm"},
		{"a number", `{ scaled = 3, ` + steps + ` }`, copiedP, "", "scaled", "a number, not a text", "another element"},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := copied(test.start, test.of) + test.after
			if test.name == "of a copy" {
				text = strings.Replace(text, `{ zones = ["free", "free"], edge = "1 um" }`, `{ scaled = "P", smooth = "steps" }`, 1)
				text = strings.Replace(text, `start = { scaled = "P", smooth = "steps" }`+"\nrim", `start = { scaled = "Q", smooth = "steps" }`+"\nrim", 1)
				test.field, test.problem, test.remedy = "scaled", "starts as a scaled copy itself", "hardly diffused"
			}
			_, err := parse("s.toml", []byte(text), memory(pFiles()))
			got := problems(t, err)
			if len(got) != 1 {
				t.Fatalf("%d problems, want one: %v", len(got), err)
			}
			e := got[0]
			if e.Field != "crystal.element.start."+test.field || !strings.Contains(e.Problem, test.problem) || !strings.Contains(e.Remedy, test.remedy) || e.Line == 0 {
				t.Errorf("got %v", e)
			}
		})
	}
	t.Run("no traverse of its own", func(t *testing.T) {
		text := copied(`{ scaled = "P", highest = "58 ppm", `+steps+` }`, copiedP)
		text = text[:strings.LastIndex(text, "traverse =")]
		_, err := parse("s.toml", []byte(text), memory(pFiles()))
		if got := problems(t, err); len(got) != 1 || got[0].Field != "crystal.element.start.lowest" || !strings.Contains(got[0].Remedy, "write the value where P is lowest") {
			t.Errorf("got %v", err)
		}
	})
	t.Run("its own D, and free", func(t *testing.T) {
		text := strings.Replace(copied(`{ scaled = "P", highest = "58 ppm", `+steps+` }`, copiedP), `law = "quartz-ti-cherniak2007"`, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol", own = { ln_slope = 0.1 } }`, 1)
		_, err := parse("s.toml", []byte(text), memory(pFiles()))
		if got := problems(t, err); len(got) != 1 || !strings.Contains(got[0].Problem, "must be known exactly: at lowest P") {
			t.Errorf("got %v", err)
		}
	})
}
