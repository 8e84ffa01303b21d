package study

import (
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// roundOff is what conversions of units may leave of a typed number.
const roundOff = 1e-12

func near(t *testing.T, what string, got, want float64) {
	t.Helper()
	if diff := math.Abs(got - want); !(diff <= roundOff*math.Abs(want)) {
		t.Errorf("%s: got %.17g, want %.17g", what, got, want)
	}
}

func everyKey(t *testing.T) *Study {
	t.Helper()
	s, err := Read("testdata/every-key/study.toml")
	if err != nil {
		t.Fatal(err)
	}
	return s
}

const (
	um = 1e-6
	yr = 365.25 * 86400
	zc = 273.15
)

func TestEveryKeyTop(t *testing.T) {
	s := everyKey(t)
	if s.Title != "Every key, quartz EK-1" || s.File != "testdata/every-key/study.toml" || s.Confidence != 0.9 {
		t.Errorf("title %q, file %q, confidence %v", s.Title, s.File, s.Confidence)
	}
	if want := []string{"lock-up", "solidus"}; len(s.Thresholds) != 2 || s.Thresholds[0].Name != want[0] || s.Thresholds[1].Name != want[1] {
		t.Fatalf("thresholds %+v", s.Thresholds)
	}
	near(t, "lock-up", s.Thresholds[0].Temp, 750+zc)
	near(t, "solidus", s.Thresholds[1].Temp, 953.15)
	var names []string
	for _, in := range s.Inputs {
		names = append(names, in.Name)
		data, err := os.ReadFile(filepath.Join("testdata/every-key", in.Name))
		if err != nil {
			t.Fatal(err)
		}
		if sum := sha256.Sum256(data); in.SHA256 != hex.EncodeToString(sum[:]) {
			t.Errorf("%s has SHA-256 %s", in.Name, in.SHA256)
		}
	}
	if want := []string{"study.toml", "tt.csv", "ti.csv", "rim.csv", "rim-t.csv", "melt.csv", "an.csv"}; !slices.Equal(names, want) {
		t.Errorf("inputs %q, want %q", names, want)
	}
}

func TestEveryKeyPaths(t *testing.T) {
	s := everyKey(t)
	if len(s.Paths) != 2 || s.Paths[0].Name != "woken twice" || s.Paths[1].Name != "every other leg" {
		t.Fatalf("paths %+v", s.Paths)
	}
	first, second := s.Paths[0], s.Paths[1]
	near(t, "life of the first", first.History.Life(), (6000+80+100+5+1)*yr)
	near(t, "eruption of the first, from the top level", first.Eruption, (6000+80+100+5)*yr)
	near(t, "life of the second", second.History.Life(), (400+3*(5+2*50)+30)*yr+86400)
	near(t, "eruption of the second, its own", second.Eruption, (400+2*(5+2*50)+3)*yr)
	if p := first.Place; p.Line != 35 || p.Col != 3 || p.File != s.File {
		t.Errorf("the first path is at %+v", p)
	}
	for _, test := range []struct {
		name          string
		at            float64 // yr
		before, after float64 // C
	}{
		{"table, start", 0, 690, 690},
		{"table, jump", 300, 690, 740},
		{"table, end, and ramp from", 400, 700, 700},
		{"ramp, half way", 402.5, 740, 740},
		{"relax, from", 405, 780, 780},
		{"relax, one e-fold time", 408, 690 + 90*math.Exp(-1), 690 + 90*math.Exp(-1)},
	} {
		t.Run(test.name, func(t *testing.T) {
			before, after := second.History.At(test.at * yr)
			near(t, "before", before, test.before+zc)
			near(t, "after", after, test.after+zc)
		})
	}
	_, hot := second.History.At((400 + 3*105) * yr)
	near(t, "the dyke's start, 3 m from the middle of 20 m", hot, 1000+zc)
}

func TestEveryKeyCrystal(t *testing.T) {
	c := everyKey(t).Crystals[0]
	if c.Name != "EK-1" || c.Mineral != "quartz" || c.Shape != diffusion.Cylinder {
		t.Errorf("crystal %q of %q, %v", c.Name, c.Mineral, c.Shape)
	}
	near(t, "inner radius", c.R0, 40*um)
	near(t, "size", c.Size(), 212*um)
	want := []Zone{{Name: "core", Width: 100 * um, Times: 1}, {Name: "mantle", Width: 60 * um, Times: 0.1}, {Name: "skin", Width: 12 * um, Times: 1}}
	for i, z := range c.Zones {
		if z.Name != want[i].Name {
			t.Errorf("zone %d is %q", i, z.Name)
		}
		near(t, z.Name+" width", z.Width, want[i].Width)
		near(t, z.Name+" times", z.Times, want[i].Times)
	}
	if c.Mirrored(&c.Elements[0]) {
		t.Error("a held inner end is no centre of symmetry")
	}
}

func TestEveryKeyElement(t *testing.T) {
	e := everyKey(t).Crystals[0].Elements[0]
	if e.Name != "Ti" || e.Unit != "ppm" {
		t.Errorf("element %q in %q", e.Name, e.Unit)
	}
	if l := e.Law; l.Key != "mine" || l.Row != nil || l.Sigma != 0.3 || l.Citation != "invented for this test" ||
		!slices.Equal(l.Cautions(), []string{"no crystal has it"}) {
		t.Errorf("law %+v", l)
	}
	near(t, "TMin", e.Law.TMin, 700+zc)
	near(t, "TMax", e.Law.TMax, 1150+zc)
	near(t, "ln D at 1000 K", e.Law.Law.LnD(1000), math.Log(7.01e-8)-273e3/(thermal.GasConstant*1000))
	if !e.Start.Zones[0].Free || e.Start.Zones[1].Free || e.Start.Zones[2].Free {
		t.Errorf("start %+v", e.Start)
	}
	near(t, "mantle, bare number in wt%", e.Start.Zones[1].Value, 92)
	near(t, "skin", e.Start.Zones[2].Value, 58)
	near(t, "skin's error", e.Start.Zones[2].Sigma, 1.5)
	near(t, "edge, its upper end", e.Start.Edge.Hi, 0.8*um)
}

func TestEveryKeyRims(t *testing.T) {
	e := everyKey(t).Crystals[0].Elements[0]
	if len(e.Inner) != 1 || e.Inner[0].Kind != diffusion.Held || e.Inner[0].Zone != 0 {
		t.Errorf("inner end %+v", e.Inner)
	}
	if len(e.Rims) != 6 {
		t.Fatalf("%d rims", len(e.Rims))
	}
	if e.Rims[0].Zone != 2 || e.Rims[0].From != nil {
		t.Errorf("first rim %+v", e.Rims[0])
	}
	near(t, "held", e.Rims[1].Value.Value, 90)
	near(t, "held, error", e.Rims[1].Value.Sigma, 3)
	near(t, "held, bare", e.Rims[2].Value.Value, 80)
	if !e.Rims[3].Value.Free || e.Rims[4].Kind != diffusion.Sealed || e.Rims[5].Kind != diffusion.Prescribed {
		t.Errorf("rims %+v", e.Rims[3:])
	}
	g := e.Rims[5].Given
	if !g.BeforeEruption || !slices.Equal(g.Value, []float64{80, 80, 95, 90, 90}) {
		t.Errorf("given %+v", g)
	}
	near(t, "given, second row", g.Time[1], -5*yr)
}

func TestEveryKeyTransfer(t *testing.T) {
	s := everyKey(t)
	c := &s.Crystals[0]
	p, free, err := c.Problem(&c.Elements[1], s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	i := slices.IndexFunc(free, func(f FreeValue) bool { return f.Name == "rim 2" })
	if i < 0 || free[i].Prior != (thermal.Uncertain{Value: 60, Sigma: 5}) || !slices.Equal(p.Free[i].Outer, []float64{0, 1, 0}) {
		t.Errorf("free values %+v of %+v", free, p.Free)
	}
	for i, want := range []diffusion.Arrhenius{{LnA: math.Log(1e-3), E: 200e3 / thermal.GasConstant}, {LnA: math.Log(5 * um / yr)}} {
		r := p.Outer[1+i]
		if r.Kind != diffusion.Transfer {
			t.Errorf("rim %+v", r)
		}
		near(t, "from", r.From, float64(5+i)*86400)
		near(t, "transfer", r.Value, 60)
		near(t, "ln k0", r.Rate.LnA, want.LnA)
		near(t, "its energy", r.Rate.E, want.E)
	}
}

func TestEveryKeyFollowing(t *testing.T) {
	s := everyKey(t)
	c := &s.Crystals[1]
	e, h := &c.Elements[6], s.Paths[0].History
	p, _, err := c.Problem(e, h)
	if err != nil {
		t.Fatal(err)
	}
	rt := thermal.GasConstant * (690 + zc) // of the first leg, in a skin of An35
	for i, want := range []float64{90 * math.Exp((-26.7e3*0.35+26.7e3)/rt), 100 * math.Exp((-38.2e3*0.35+10.2e3)/rt)} {
		if r := p.Outer[i]; r.Kind != []diffusion.RimKind{diffusion.Transfer, diffusion.Following}[i] {
			t.Errorf("rim %+v", r)
		} else {
			near(t, "value", valueOf(r, h, 3*86400), want)
		}
	}
	// The path jumps where its first reheat is cut off, and passes the middle row of
	// the melt once, as it cools down.
	if g := p.Outer[2].Given; len(g.Breaks)+len(g.Jumps) != len(h.Breaks(nil))+1 || len(g.Jumps) == 0 {
		t.Errorf("breaks %v, jumps %v", g.Breaks, g.Jumps)
	}
	if all := e.Partitions(); len(all) != 2 || all[0].Key != "kx" || all[1].Key != "ba-blundy1991" {
		t.Errorf("relations %+v", all)
	}
}

// TestFollowingRims: what a rim that follows a relation is refused for where the
// crystal has a host.
func TestFollowingRims(t *testing.T) {
	const follow = `{ following = "kx", melt = %s }`
	relation := func(b string) string {
		return "[[partition]]\nname = \"kx\"\nA = \"1 kJ/mol\"\nB = \"" + b + " kJ/mol\"\n\n[[path]]\n"
	}
	for _, test := range []struct{ name, melt, b, law, want string }{
		{"free", `"free"`, "1", `"mine"`, "must be known exactly"},
		{"with an error", `"90 +- 3 ppm"`, "1", `"mine"`, "must be known exactly"},
		{"more than all", `"90 ppm"`, "400", `"mine"`, "more than all there is"},
		{"of an element that changes its own D", `"90 ppm"`, "1", `{ D0 = "7e-8 m2/s", E = "273 kJ/mol", own = { ln_slope = 0.01 } }`, "known without a path"},
		{"sound", `"90 ppm"`, "1", `"mine"`, ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := strings.NewReplacer("[[path]]\n", relation(test.b), `{ held = "skin" }`, fmt.Sprintf(follow, test.melt), `["free", "58 ppm"]`, `["70 ppm", "58 ppm"]`,
				`"quartz-ti-cherniak2007"`, test.law, `"100 um" }`, `"100 um", host = 0.5 }`, `"20 um" }`, `"20 um", host = 0.4 }`).Replace(sound)
			_, err := parse("s.toml", []byte(text), memory(soundFiles()))
			got := problems(t, err)
			if test.want == "" && err == nil {
				return
			}
			if len(got) != 1 || !strings.Contains(got[0].Problem, test.want) || !strings.HasPrefix(got[0].Field, "crystal.element.rim") {
				t.Errorf("problems %v, want %q", err, test.want)
			}
		})
	}
}

func TestEveryKeyTraverse(t *testing.T) {
	tr := everyKey(t).Crystals[0].Elements[0].Traverse
	if tr.Unit != "ppm" || tr.Spot.Kind != traverse.Gaussian {
		t.Errorf("unit %q, spot %+v", tr.Unit, tr.Spot)
	}
	near(t, "spot", tr.Spot.Width, 0.8*um/(2*math.Sqrt(2*math.Log(2))))
	if want := []int{2, 3, 4, 5, 6, 8, 9, 10}; !slices.Equal(tr.Line, want) {
		t.Errorf("rows %v, want %v: one is flagged, one outside the window", tr.Line, want)
	}
	near(t, "first position", tr.Position[0], 210*um)
	near(t, "first error, half of two", tr.Sigma[0], 1.5)
	near(t, "third error, the floor", tr.Sigma[2], 1)
	if want := []bool{false, false, false, false, false, false, false, true}; !slices.Equal(tr.Limit, want) {
		t.Errorf("limits %v", tr.Limit)
	}
	near(t, "error of a limit, a third of it", tr.Sigma[7], 23)
}

func TestEveryKeyNuisances(t *testing.T) {
	e := everyKey(t).Crystals[0].Elements
	near(t, "tilt, its upper end", e[0].Tilt.Hi, math.Pi/6)
	near(t, "origin, its lower end", e[0].Origin.Lo, -1*um)
	near(t, "tilt, known", e[1].Tilt.Value, math.Pi/18)
	near(t, "origin, its error", e[1].Origin.Sigma, 0.2*um)
	near(t, "edge", e[2].Start.Edges[0].Value, 0.4*um)
	near(t, "its error", e[2].Start.Edges[0].Sigma, 0.1*um)
	near(t, "edge of the next boundary", e[2].Start.Widths()[1].Value, 0.3*um)
	near(t, "error of three analyses, two of it", e[1].Traverse.Sigma[0], 1.5/math.Sqrt(3))
	if !e[0].Scatter || e[1].Scatter || e[1].Traverse.Limit != nil {
		t.Errorf("elements %+v", e)
	}
}

func TestEveryKeyLimits(t *testing.T) {
	s := everyKey(t)
	l := s.Limits
	near(t, "shortest life", l.Life[0], 100*yr)
	near(t, "longest life", l.Life[1], 1e4*yr)
	near(t, "lowest", l.Lowest, 600+zc)
	if len(l.Above) != 3 || len(l.Between) != 1 || l.Above[0].Most != 0 || !l.Above[2].Stretch || l.Above[1].Stretch {
		t.Fatalf("limits %+v", l)
	}
	near(t, "highest", l.Above[0].Temp, 1200+zc)
	near(t, "threshold", l.Above[1].Temp, 750+zc)
	near(t, "its longest", l.Above[1].Most, 1000*yr)
	near(t, "without a break, shortest", l.Above[2].Least, 86400)
	near(t, "between", l.Between[0].Most, 7000*yr)
	for _, p := range s.Paths {
		if got, err := l.Barred(p.History); err != nil || got != nil || p.Barred != nil {
			t.Errorf("%s is barred: %q, %q, %v", p.Name, got, p.Barred, err)
		}
	}
}

func TestEveryKeyHistory(t *testing.T) {
	if s := everyKey(t); s.Sharing.Each || s.Sharing.From == nil || s.Sharing.From.Text != "start of wake 1" {
		t.Errorf("%+v", s.Sharing)
	}
}

func TestEveryKeyExistence(t *testing.T) {
	all := everyKey(t).Crystals
	c := all[slices.IndexFunc(all, func(c Crystal) bool { return c.Name == "EK-3" })]
	if c.Exists == nil || c.Exists.Text != "1 yr after start" || c.Dissolves == nil || !c.Dissolves.Stretch {
		t.Fatalf("exists from %+v, dissolves %+v", c.Exists, c.Dissolves)
	}
	near(t, "dissolves above", c.Dissolves.Temp, 1000+zc)
	near(t, "longer", c.Dissolves.Most, 20*yr)
}

// TestDefaults holds what is assumed where a study says nothing, and that it
// says so.
func TestDefaults(t *testing.T) {
	text := strings.NewReplacer(
		"title = \"sound\"\nconfidence = \"95 %\"\n", "",
		"start = { zones = [\"free\", \"58 ppm\"], edge = \"0 um\" }\nrim = { held = \"skin\" }\n", "",
		`mineral = "quartz"`, `mineral = "zircon"`).Replace(sound)
	s, err := parse("folder/harrow.toml", []byte(text), func(name string, limit int64) ([]byte, error) {
		return memory(soundFiles())(filepath.Base(name), limit)
	})
	if err != nil {
		t.Fatal(err)
	}
	if s.Title != "harrow" || s.Confidence != 0.95 {
		t.Errorf("title %q, confidence %v", s.Title, s.Confidence)
	}
	c := s.Crystals[0]
	e := c.Elements[0]
	if !e.Start.Zones[0].Free || !e.Start.Zones[1].Free || e.Start.Edge != (Nuisance{}) || !c.Mirrored(&e) {
		t.Errorf("start %+v", e.Start)
	}
	if len(e.Rims) != 1 || e.Rims[0].Kind != diffusion.Held || e.Rims[0].Zone != 1 {
		t.Errorf("rims %+v", e.Rims)
	}
	near(t, "eruption", s.Paths[0].Eruption, 805*yr)
	notes := strings.Join(s.Notes, "\n")
	for _, want := range []string{"no edge given", "no rim given, held at the plateau of its outermost zone, skin", "law quartz-ti-cherniak2007 is for quartz, but the crystal Q1 is zircon"} {
		if !strings.Contains(notes, want) {
			t.Errorf("notes %q do not say %q", s.Notes, want)
		}
	}
}

// TestMinerals: a mineral that looks like one of the catalogue's is noted, and
// not once more as that of another law.
func TestMinerals(t *testing.T) {
	for _, test := range []struct {
		mineral string
		want    []string
	}{
		{"quartz", nil},
		{"Quartz", nil},
		{"Quarz", []string{`Q1: the catalogue has no laws for "Quarz"; did you mean "quartz"?`}},
		{"leucite", []string{"Ti: law quartz-ti-cherniak2007 is for quartz, but the crystal Q1 is leucite: is the law the right one?"}},
	} {
		t.Run(test.mineral, func(t *testing.T) {
			_, notes := measured(t, `mineral = "quartz"`, fmt.Sprintf("mineral = %q", test.mineral))
			if !slices.Equal(notes, test.want) {
				t.Errorf("notes %q, want %q", notes, test.want)
			}
		})
	}
}

// TestNamedRepeat: the name of a repeat is that of all its legs together.
func TestNamedRepeat(t *testing.T) {
	text := strings.Replace(sound, `{ name = "store", hold = "750 C", for = "800 yr" },`,
		`{ name = "wakes", repeat = 3, legs = [ { name = "store", hold = "750 C", for = "100 yr" } ] },`, 1)
	text = strings.Replace(text, "[[path]]\n", "[[path]]\neruption = \"end of wakes\"\n", 1)
	s, err := parse("s.toml", []byte(text), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "eruption", s.Paths[0].Eruption, 300*yr)
}

// TestGrammarOfThePage reads what this version knows of the study that the
// format was agreed on with.
func TestGrammarOfThePage(t *testing.T) {
	s, err := Read("testdata/harrow/study.toml")
	if err != nil {
		t.Fatal(err)
	}
	if e := s.Crystals[0].Elements[0]; e.Law.Row == nil || e.Law.Row.Key != "quartz-ti-cherniak2007" {
		t.Errorf("law %+v", e.Law)
	}
	if p := s.Paths[1]; len(p.History.Names()) < 4 {
		t.Errorf("names %+v", p.History.Names())
	}
}

// TestUnits gives start, rim and traverse in units that convert.
func TestUnits(t *testing.T) {
	text := strings.Replace(sound, `["free", "58 ppm"]`, `["0.007 wt%", 0.0058], unit = "wt %"`, 1)
	t.Run("unit of the traverse", func(t *testing.T) {
		s, err := parse("s.toml", []byte(text), memory(soundFiles()))
		if err != nil {
			t.Fatal(err)
		}
		e := s.Crystals[0].Elements[0]
		if e.Unit != "ppm" {
			t.Errorf("unit %q", e.Unit)
		}
		near(t, "core", e.Start.Zones[0].Value, 70)
		near(t, "skin", e.Start.Zones[1].Value, 58)
	})
	t.Run("unit of the start", func(t *testing.T) {
		text := text[:strings.Index(text, "traverse =")]
		s, err := parse("s.toml", []byte(text), memory(nil))
		if err != nil {
			t.Fatal(err)
		}
		if e := s.Crystals[0].Elements[0]; e.Unit != "wt%" || e.Start.Zones[1].Value != 0.0058 || e.Traverse != nil {
			t.Errorf("element %+v", e)
		}
	})
}

// TestPieceOfCrystal reads a piece that does not reach the centre.
func TestPieceOfCrystal(t *testing.T) {
	piece := strings.Replace(sound, `shape = "slab"`, "shape = \"ball\"\ninner = { radius = \"40 um\", rim = \"sealed\" }", 1)
	t.Run("inside", func(t *testing.T) {
		s, err := parse("s.toml", []byte(piece), memory(soundFiles()))
		if err != nil {
			t.Fatal(err)
		}
		c := s.Crystals[0]
		if near(t, "size", c.Size(), 160*um); c.Elements[0].Inner != nil || c.Mirrored(&c.Elements[0]) {
			t.Errorf("inner end %+v", c.Elements[0].Inner)
		}
		near(t, "first position", c.Elements[0].Traverse.Position[0], 159*um)
	})
	t.Run("beyond its inner end", func(t *testing.T) {
		files := soundFiles()
		files["q1.csv"] = "x [um],Ti [ppm]\n1,58\n130,70\n"
		_, err := parse("s.toml", []byte(piece), memory(files))
		got := problems(t, err)
		if len(got) != 1 || got[0].File != "q1.csv" || got[0].Line != 3 || !strings.Contains(got[0].Problem, "30 um from the centre, inside the inner radius") {
			t.Errorf("got %v", err)
		}
	})
}

// TestCoarseTable wants a note where straight lines between the rows of a table
// may not be what was meant.
func TestCoarseTable(t *testing.T) {
	files := soundFiles()
	files["decay.csv"] = "t [yr],T [C]\n0,900\n10,800\n20,730\n40,690\n100,680\n"
	text := strings.Replace(sound, `{ name = "store", hold = "750 C", for = "800 yr" }`, `{ table = "decay.csv", time = "t [yr]", temperature = "T [C]" }`, 1)
	s, err := parse("s.toml", []byte(text), memory(files))
	if err != nil {
		t.Fatal(err)
	}
	if len(s.Notes) != 1 || !strings.Contains(s.Notes[0], "its table is coarse") || !strings.Contains(s.Notes[0], "Ti") {
		t.Errorf("notes %q", s.Notes)
	}
}

// TestProblemsAreCollected wants every fault of a file in one go, in the order
// of its lines, and how many more there are than 20.
func TestProblemsAreCollected(t *testing.T) {
	t.Run("several", func(t *testing.T) {
		text := strings.NewReplacer(`"slab"`, `"slap"`, `"800 yr"`, "800", `"1 um fwhm"`, `"1 um"`, `"750 C"`, `"-750 C"`).Replace(sound)
		_, err := parse("s.toml", []byte(text), memory(soundFiles()))
		var fields []string
		for _, e := range problems(t, err) {
			fields = append(fields, e.Field)
		}
		want := []string{"threshold.temperature", "path.legs.hold", "path.legs.for", "crystal.shape", "crystal.element.traverse.spot"}
		if !slices.Equal(fields, want) {
			t.Errorf("got %q, want %q", fields, want)
		}
	})
	t.Run("at most 20", func(t *testing.T) {
		_, err := parse("s.toml", []byte(strings.Repeat("[[path]]\n", 50)), memory(nil))
		got := problems(t, err)
		if len(got) != maxProblems+1 {
			t.Fatalf("%d problems reported", len(got))
		}
		// Each path lacks its name and its legs, and the study a crystal.
		if want := fmt.Sprintf("s.toml: and %d more problems; mend these first", 2*50+1-maxProblems); got[maxProblems].Error() != want {
			t.Errorf("the last is %q, want %q", got[maxProblems], want)
		}
	})
	t.Run("a mistyped key is not missing as well", func(t *testing.T) {
		_, err := parse("s.toml", []byte(strings.Replace(sound, "mineral =", "minreal =", 1)), memory(soundFiles()))
		if got := problems(t, err); len(got) != 1 || got[0].Problem != "unknown key" {
			t.Errorf("got %v", err)
		}
	})
	t.Run("the study before its files", func(t *testing.T) {
		text := strings.NewReplacer(`"q1.csv"`, `"bad.csv"`, `rim = {`, "colour = 1\nrim = {").Replace(sound)
		_, err := parse("s.toml", []byte(text), memory(soundFiles()))
		got := problems(t, err)
		if len(got) != 2 || got[0].File != "s.toml" || got[1].File != "bad.csv" {
			t.Errorf("got %v", err)
		}
	})
}

// TestReadFiles tries what the file system can do to a reader.
func TestReadFiles(t *testing.T) {
	dir := t.TempDir()
	write := func(name, text string) string {
		t.Helper()
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	sparse := write("sparse.toml", "")
	if err := os.Truncate(sparse, 100<<20); err != nil {
		t.Fatal(err)
	}
	data := write("large.csv", "")
	if err := os.Truncate(data, traverse.MaxBytes+1); err != nil {
		t.Fatal(err)
	}
	tests := []struct{ name, file, problem string }{
		{"missing", filepath.Join(dir, "no.toml"), "no such file"},
		{"a folder", dir, "a folder"},
		{"100 MB", sparse, "larger than"},
		{"empty", write("empty.toml", ""), "empty"},
		{"traverse a folder", write("folder.toml", strings.Replace(sound, `"q1.csv"`, `"."`, 1)), "a folder"},
		{"traverse too large", write("large.toml", strings.Replace(sound, `"q1.csv"`, `"large.csv"`, 1)), "larger than"},
		{"traverse a study", write("self.toml", strings.Replace(sound, `"q1.csv"`, `"self.toml"`, 1)), "not in the header"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			s, err := Read(test.file)
			got := problems(t, err)
			if s != nil || len(got) == 0 || !strings.Contains(got[0].Problem, test.problem) || got[0].File == "" {
				t.Errorf("got %v, want the words %q", err, test.problem)
			}
		})
	}
	t.Run("absolute names stay out of the record", func(t *testing.T) {
		text := strings.Replace(sound, "q1.csv", filepath.ToSlash(write("q1.csv", soundFiles()["q1.csv"])), 1)
		s, err := Read(write("absolute.toml", text))
		if err != nil {
			t.Fatal(err)
		}
		if got := s.Inputs[1].Name; got != "q1.csv" {
			t.Errorf("recorded as %q", got)
		}
	})
}
