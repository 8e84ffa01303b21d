package study

import (
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// grown is the existing study whose crystal has three zones, the outer two added, and
// rims.
func grown(t *testing.T, mantle, skin, rim string) (*Study, error) {
	t.Helper()
	text := strings.Replace(existingText(""), `{ name = "skin", width = "20 um" }`,
		`{ name = "mantle", width = "30 um"`+mantle+` }, { name = "skin", width = "20 um"`+skin+` }`, 1)
	text = strings.Replace(text, `zones = ["free", "58 ppm"]`, `zones = ["free", "70 +- 2 ppm", "58 ppm"]`, 1)
	text = strings.Replace(text, `rim = { held = "skin" }`, rim, 1)
	return parse("s.toml", []byte(text), memory(soundFiles()))
}

// atYears is a rim held from a time on, yr, in the problem.
func atYears(at, value float64) diffusion.Rim {
	return diffusion.Rim{Kind: diffusion.Held, From: at * thermal.Year, Value: value}
}

// TestRimsOfStages: what holds at the rim while each zone is outermost, on a path on
// which the mantle is added after 200 yr and the skin after 804.
func TestRimsOfStages(t *testing.T) {
	const (
		mantle  = `, added = "200 yr after start"`
		skin    = `, added = "1 yr before eruption"`
		assumed = "that was outermost: core"
		both    = assumed + ", then mantle"
		either  = `taken to be held at the plateau of the zone that was outermost`
	)
	for _, test := range []struct {
		name, mantle, skin, rim string
		want                    []diffusion.Rim
		core, prior             []float64 // how the rims go with the plateaux of core and mantle
		note                    string    // "" is none about rims
	}{
		{"tied to the last", mantle, skin, `rim = { held = "skin" }`,
			[]diffusion.Rim{atYears(0, 0), atYears(200, 70), atYears(804, 58)}, []float64{1, 0, 0}, []float64{0, 1, 0}, both},
		{"none", mantle, skin, ``,
			[]diffusion.Rim{atYears(0, 0), atYears(200, 70), atYears(804, 58)}, []float64{1, 0, 0}, []float64{0, 1, 0}, both},
		{"tied to the middle", mantle, skin, `rim = { held = "mantle" }`,
			[]diffusion.Rim{atYears(0, 0), atYears(200, 70), atYears(804, 70)}, []float64{1, 0, 0}, []float64{0, 1, 1}, assumed},
		{"a value", mantle, skin, `rim = { held = "90 ppm" }`,
			[]diffusion.Rim{atYears(0, 90), atYears(200, 90), atYears(804, 90)}, []float64{0, 0, 0}, []float64{0, 0, 0}, ""},
		{"a value from the mantle on", mantle, skin, `rim = [ { held = "90 ppm", from = "mantle added" } ]`,
			[]diffusion.Rim{atYears(0, 0), atYears(200, 90), atYears(804, 90)}, []float64{1, 0, 0}, []float64{0, 0, 0}, either},
		{"after the mantle", mantle, skin, `rim = [ { held = "90 ppm", from = "100 yr after mantle added" } ]`,
			[]diffusion.Rim{atYears(0, 0), atYears(200, 70), atYears(300, 90), atYears(804, 90)}, []float64{1, 0, 0, 0}, []float64{0, 1, 0, 0}, either},
		{"a list", mantle, skin, `rim = [ { held = "core" }, { held = "mantle", from = "mantle added" }, { held = "skin", from = "skin added" } ]`,
			[]diffusion.Rim{atYears(0, 0), atYears(200, 70), atYears(804, 58)}, []float64{1, 0, 0}, []float64{0, 1, 0}, ""},
		{"both at once", mantle, `, added = "mantle added"`, `rim = { held = "skin" }`,
			[]diffusion.Rim{atYears(0, 0), atYears(200, 58)}, []float64{1, 0}, []float64{0, 0}, both},
		{"only the skin", "", skin, `rim = { held = "skin" }`,
			[]diffusion.Rim{atYears(0, 70), atYears(804, 58)}, []float64{0, 0}, []float64{1, 0},
			"that was outermost: mantle"},
	} {
		t.Run(test.name, func(t *testing.T) {
			s, err := grown(t, test.mantle, test.skin, test.rim)
			if err != nil {
				t.Fatal(err)
			}
			c := &s.Crystals[0]
			p, free, err := c.Problem(&c.Elements[0], s.Paths[0].History)
			if err != nil {
				t.Fatal(err)
			}
			if len(p.Outer) != len(test.want) {
				t.Fatalf("rims %+v, want %+v", p.Outer, test.want)
			}
			for i, r := range p.Outer {
				if want := test.want[i]; r.Kind != want.Kind || math.Abs(r.From-want.From) > 1 || math.Abs(r.Value-want.Value) > 1e-12 {
					t.Errorf("rim %d: %+v, want %+v", i, r, want)
				}
			}
			if len(free) != 2 || !slices.Equal(p.Free[0].Outer, test.core) || !slices.Equal(p.Free[1].Outer, test.prior) {
				t.Errorf("free values %+v with rims %v", free, p.Free)
			}
			notes := strings.Join(s.Notes, "\n")
			if test.note == "" && strings.Contains(notes, "outermost") || !strings.Contains(notes, test.note) {
				t.Errorf("notes %q, want %q", s.Notes, test.note)
			}
		})
	}
}

// TestPathsOfStages: a path that ends before a zone, or has them in another order, is
// barred; on one that the crystal sees from later on times count from there.
func TestPathsOfStages(t *testing.T) {
	s, err := grown(t, `, added = "20 yr after start"`, `, added = "60 yr after start"`, `rim = { held = "skin" }`)
	if err != nil {
		t.Fatal(err)
	}
	bars, err := s.Barred(&s.Paths[1])
	if want := `Q1: the path ends before zone skin (60 yr after start)`; err != nil || len(bars) != 1 || Whys(bars)[0] != want {
		t.Errorf("barred %q, %v, want %q", Whys(bars), err, want)
	}
	s, err = grown(t, `, added = "start of wake"`, `, added = "80 yr after start"`, `rim = { held = "skin" }`)
	if in := inputError(err, thermal.Place{}); in == nil || !strings.Contains(in.Problem, "comes before mantle, on which it lies") {
		t.Errorf("got %v, %v", s, err)
	}
}

// TestExistsInStages: zones of a crystal that exists from a moment on are added in its
// own time, and not before it.
func TestExistsInStages(t *testing.T) {
	text := func(exists string) string {
		return strings.Replace(existingText(exists), `{ name = "skin", width = "20 um" }`, `{ name = "skin", width = "20 um", added = "25 yr after start" }`, 1)
	}
	s, err := parse("s.toml", []byte(text(`exists_from = "10 yr after start"`)), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	c := &s.Crystals[0]
	p, _, err := c.Problem(&c.Elements[0], s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	if got := p.Zones[1].Added; math.Abs(got-15*thermal.Year) > 1 || math.Abs(p.Outer[1].From-got) > 1 {
		t.Errorf("added %g s after it exists, rims %+v", got, p.Outer)
	}
	_, err = parse("s.toml", []byte(text(`exists_from = "28 yr after start"`)), memory(soundFiles()))
	if err == nil || !strings.Contains(err.Error(), "comes before the crystal exists") {
		t.Errorf("got %v", err)
	}
}

// TestHostOfStages: a rim that follows a relation does so in the host of the zone that
// is outermost.
func TestHostOfStages(t *testing.T) {
	s := everyKey(t)
	c := s.Crystals[1] // core An55, skin An35
	c.Zones = slices.Clone(c.Zones)
	c.Zones[1].Added = &thermal.Moment{Offset: 10 * thermal.Year}
	e, h := &c.Elements[6], s.Paths[0].History
	p, _, err := c.Problem(e, h)
	if err != nil {
		t.Fatal(err)
	}
	rt := thermal.GasConstant * (690 + zc)
	last := len(p.Outer) - 1
	if at := p.Outer[last].From; math.Abs(at-10*thermal.Year) > 1 {
		t.Fatalf("rims %+v", p.Outer)
	}
	near(t, "in the core", valueOf(p.Outer[0], h, 3600), 90*math.Exp((-26.7e3*0.55+26.7e3)/rt))
}
