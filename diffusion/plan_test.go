package diffusion

import (
	"fmt"
	"math"
	"os/exec"
	"slices"
	"strings"
	"testing"
)

// TestCompileRefuses: what cannot be run is refused with words, never run to NaN.
func TestCompileRefuses(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	sound := func() *Problem {
		return &Problem{Zones: []Zone{{Outer: 1e-4, Start: 1}, {Outer: 2e-4}}, Law: testLaw, Outer: []Rim{{Kind: Held}}}
	}
	tests := []struct {
		name, want string
		spoil      func(p *Problem, o *Options)
	}{
		{"shape", "shape 3", func(p *Problem, _ *Options) { p.Shape = 3 }},
		{"no zones", "at least one zone", func(p *Problem, _ *Options) { p.Zones = nil }},
		{"inner radius", "inner radius NaN", func(p *Problem, _ *Options) { p.R0 = nan }},
		{"inner radius outside", "zone 0 ends at", func(p *Problem, _ *Options) { p.R0 = 1.5e-4 }},
		{"zones out of order", "zone 1 ends at", func(p *Problem, _ *Options) { p.Zones[1].Outer = 0.5e-4 }},
		{"zone without end", "zone 1 ends at +Inf", func(p *Problem, _ *Options) { p.Zones[1].Outer = inf }},
		{"start", "start NaN", func(p *Problem, _ *Options) { p.Zones[0].Start = nan }},
		{"edge", "edge -1", func(p *Problem, _ *Options) { p.Zones[0].Edge = -1 }},
		{"factor", "factor -1", func(p *Problem, _ *Options) { p.Zones[0].Times = -1 }},
		{"law", "term 0 of the law", func(p *Problem, _ *Options) { p.Law = NewLaw(nan, 1) }},
		{"negative law", "term 0 of the law", func(p *Problem, _ *Options) { p.Law = NewLaw(-1, 1) }},
		{"infinite law", "term 0 of the law", func(p *Problem, _ *Options) { p.Law = NewLaw(inf, 1) }},
		{"activation energy", "term 0 of the law", func(p *Problem, _ *Options) { p.Law = NewLaw(1, inf) }},
		{"profile", "starts at NaN", func(p *Problem, _ *Options) { p.Profile = func(float64) float64 { return nan } }},
		{"spread", "not a positive number", func(p *Problem, _ *Options) { p.Spread = func(float64) float64 { return nan } }},
		{"no spread", "not a positive number", func(p *Problem, _ *Options) { p.Spread = func(float64) float64 { return 0 } }},
		{"first rim late", "begins at 1 s", func(p *Problem, _ *Options) { p.Outer[0].From = 1 }},
		{"rims out of order", "rim 1 begins at 0 s", func(p *Problem, _ *Options) { p.Outer = append(p.Outer, Rim{}) }},
		{"held at nothing", "held at NaN", func(p *Problem, _ *Options) { p.Outer[0].Value = nan }},
		{"given by nothing", "without a function", func(p *Problem, _ *Options) { p.Outer[0].Kind = Prescribed }},
		{"following nothing", "follows nothing", func(p *Problem, _ *Options) { p.Outer[0].Kind = Following }},
		{"following no number", "follows exp(NaN", func(p *Problem, _ *Options) {
			p.Outer[0] = Rim{Kind: Following, Equilibrium: &Arrhenius{LnA: math.NaN()}}
		}},
		{"unknown rim", "no known kind", func(p *Problem, _ *Options) { p.Outer[0].Kind = 7 }},
		{"held centre", "centre of a ball", func(p *Problem, _ *Options) { p.Shape, p.Inner = Ball, []Rim{{Kind: Held}} }},
		{"free value", "free value 0", func(p *Problem, _ *Options) { p.Free = []Basis{{Start: []float64{1}}} }},
		{"free rim", "free value 0", func(p *Problem, _ *Options) {
			p.Free = []Basis{{Start: []float64{1, 0}, Outer: []float64{1, 2}}}
		}},
		{"free start", "column 1 starts at NaN", func(p *Problem, _ *Options) { p.Free = []Basis{{Start: []float64{nan, 0}}} }},
		{"cells", "make no grid", func(_ *Problem, o *Options) { o.Cells = -1 }},
		{"finest", "make no grid", func(_ *Problem, o *Options) { o.Finest = nan }},
		{"growth", "cannot grow by NaN", func(_ *Problem, o *Options) { o.Growth = nan }},
		{"growth down", "cannot grow by -0.1", func(_ *Problem, o *Options) { o.Growth = -0.1 }},
		{"faces out of order", "face 2", func(_ *Problem, o *Options) { o.Faces = []float64{0, 1e-4, 1e-4, 2e-4} }},
		{"NaN face", "face 1", func(_ *Problem, o *Options) { o.Faces = []float64{0, nan, 1e-4, 2e-4} }},
		{"boundary inside a cell", "the boundary at 0.0001 m", func(_ *Problem, o *Options) { o.Faces = []float64{0, 2e-4} }},
		{"faces inside the centre", "the faces reach", func(_ *Problem, o *Options) { o.Faces = []float64{-1, 0, 1e-4, 2e-4} }},
		{"faces outside the rim", "the faces reach", func(_ *Problem, o *Options) { o.Faces = []float64{0, 1e-4, 2e-4, 3e-4} }},
		{"fractions", "end at 0.5", func(_ *Problem, o *Options) { o.Fractions = []float64{0.5} }},
		{"fractions out of order", "fraction 1", func(_ *Problem, o *Options) { o.Fractions = []float64{0.5, 0.4, 1} }},
		{"NaN fraction", "fraction 0", func(_ *Problem, o *Options) { o.Fractions = []float64{nan, 1} }},
	}
	if _, err := Compile(sound(), Options{}); err != nil {
		t.Fatalf("the sound problem is refused: %v", err)
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			p, o := sound(), Options{}
			test.spoil(p, &o)
			if _, err := Compile(p, o); err == nil || !strings.Contains(err.Error(), test.want) {
				t.Errorf("error %v, want one with %q", err, test.want)
			}
		})
	}
}

// TestRunRefuses: jobs that are none.
func TestRunRefuses(t *testing.T) {
	p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: testLaw}
	plan, other := newPlan(t, p, Options{}), newPlan(t, p, Options{})
	h := holdOf(t, 1e-10)
	for name, job := range map[string]Job{
		"no course":            {},
		"another plan's":       {Course: newCourse(t, other, h)},
		"a course of no plan":  {Course: new(Course)},
		"NaN multiplier":       {Course: newCourse(t, plan, h), LnM: math.NaN()},
		"unbounded multiplier": {Course: newCourse(t, plan, h), LnM: math.Inf(1)},
	} {
		if err := plan.Run(make([]Field, 1), []Job{job}); err == nil {
			t.Errorf("Run: %s: no error", name)
		}
		if err := plan.Audit(new(Field), job); err == nil {
			t.Errorf("Audit: %s: no error", name)
		}
	}
	odd := newPlan(t, p, Options{Faces: uniform(0, testSize, 9)})
	if err := odd.Audit(new(Field), Job{Course: newCourse(t, odd, h)}); err == nil {
		t.Error("Audit: nine cells do not pair up, but no error")
	}
}

// TestGrid: on random crystals the default grid has every boundary on a face, at
// least eight cells between two of them, neighbours within a ratio of 1.2, and
// half of it is a grid again.
func TestGrid(t *testing.T) {
	for i := range 100 {
		r := source(2, i)
		p := randomProblem(r, holdOf(t, 1e-10), 1)
		plan := newPlan(t, p, Options{Cells: 20 + r.IntN(300), Finest: p.size() * logUniform(r, 1e-3, 1)})
		faces := plan.Faces()
		from := 0
		for j, mark := range segments(p) {
			at := slices.Index(faces, mark)
			if at < 0 || j > 0 && at-from < minSegment {
				t.Fatalf("problem %d: boundary %d at %g m is face %d, the one before %d", i, j, mark, at, from)
			}
			from = at
		}
		if s := steepness(faces); !(s <= steepest) {
			t.Fatalf("problem %d: neighbours differ by a factor of %g", i, s)
		}
		if plan.halved == nil {
			t.Fatalf("problem %d: %d cells cannot be halved", i, len(faces)-1)
		}
		total := volume(p.Shape, p.R0, p.size())
		if diff := content(plan, ones(len(faces)-1))/total - 1; !(math.Abs(diff) <= 1e-13) { // 300 additions
			t.Fatalf("problem %d: the cells' volumes miss the crystal's by %g", i, diff)
		}
	}
}

func ones(n int) []float64 {
	c := make([]float64, n)
	for i := range c {
		c[i] = 1
	}
	return c
}

// TestEdgeMeans compares the start of an edge with quadrature over each cell.
func TestEdgeMeans(t *testing.T) {
	for shape := Slab; shape <= Ball; shape++ {
		t.Run(shape.String(), func(t *testing.T) {
			p := &Problem{Shape: shape, R0: 0.2, Zones: []Zone{{Outer: 1, Start: 3, Edge: 0.4}, {Outer: 1.5, Start: -1, Edge: 0.05}, {Outer: 2, Start: 2}}, Law: testLaw}
			plan := newPlan(t, p, Options{})
			want := make([]float64, len(plan.Centres()))
			addProfile(want, shape, plan.grid, func(r float64) float64 {
				step := func(at, s float64) float64 { return math.Erfc((at-r)/s/math.Sqrt2) / 2 }
				return 3 - 4*step(1, 0.1) + 3*step(1.5, 0.0125)
			})
			wantClose(t, "start", plan.Start(0), want, 1e-12) // eight Gauss points over cells of a tenth of an edge
		})
	}
}

// TestEvents: the solution is damped anew where a rim changes or jumps, at no
// other time.
func TestEvents(t *testing.T) {
	at := func(float64) float64 { return 0 }
	p := &Problem{
		Zones: []Zone{{Outer: testSize}}, Law: testLaw,
		Inner: []Rim{{Kind: Held, From: -3}, {Kind: Sealed, From: 5}},
		Outer: []Rim{{Kind: Prescribed, Given: &Given{At: at, Breaks: []float64{2}, Jumps: []float64{1, 4, 9}}}, {Kind: Held, From: 4},
			{Kind: Prescribed, From: 7, Given: &Given{At: at, Jumps: []float64{0, 7, 8, 8}}}},
	}
	if got, want := newPlan(t, p, Options{}).events, []float64{1, 4, 5, 7, 8}; !slices.Equal(got, want) {
		t.Errorf("events %v, want %v", got, want)
	}
}

// TestGEnough: decided by the kinds of rim.
func TestGEnough(t *testing.T) {
	given := &Given{At: func(float64) float64 { return 1 }}
	tests := []struct {
		name string
		rims []Rim
		want bool
	}{
		{"sealed", nil, true},
		{"held", []Rim{{Kind: Held}}, true},
		{"given", []Rim{{Kind: Prescribed, Given: given}}, false},
		{"changed", []Rim{{Kind: Held}, {Kind: Sealed, From: 1}}, false},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: testLaw, Outer: test.rims}
			if why, ok := newPlan(t, p, Options{}).GEnough(); ok != test.want || why == "" {
				t.Errorf("%v because %q, want %v", ok, why, test.want)
			}
		})
	}
}

// TestDefaultFractions: they rise to 1, begin with the damped steps, and no step
// is longer than a hundredth or much longer than the one before.
func TestDefaultFractions(t *testing.T) {
	for _, moving := range []bool{false, true} {
		for _, growth := range []float64{0.02, 0.1, 0.5} {
			t.Run(fmt.Sprintf("moving=%v/growth=%g", moving, growth), func(t *testing.T) {
				fractions := defaultFractions(defaultDamped, growth, moving)
				if err := checkFractions(fractions); err != nil {
					t.Fatal(err)
				}
				at, df := 0.0, firstFraction
				for i, f := range fractions {
					if longest := longestStep * growth / defaultGrowth; !(f-at <= longest*2) || !(f-at <= df*(1+growth)*(1+1e-6) || f == 1) {
						t.Fatalf("step %d of %d is %g after %g", i, len(fractions), f-at, df)
					}
					at, df = f, f-at
				}
			})
		}
	}
}

// TestNothingIsFused: on processors that can fuse a product and a sum, the
// compiler must not do so in the solver, or other machines (and other numbers of
// paths side by side) would get other bits.
func TestNothingIsFused(t *testing.T) {
	if testing.Short() {
		t.Skip("compiles for another processor")
	}
	cmd := exec.Command("go", "build", "-gcflags=-S", ".")
	cmd.Env = append(cmd.Environ(), "GOARCH=arm64", "CGO_ENABLED=0")
	listing, err := cmd.CombinedOutput()
	if err != nil {
		t.Skipf("cannot compile for arm64 here: %v", err)
	}
	seen := false
	for line := range strings.Lines(string(listing)) {
		inSolver := strings.Contains(line, "/sweep") || strings.Contains(line, "/run")
		seen = seen || inSolver
		for _, fused := range []string{"FMADDD", "FMSUBD", "FNMADDD", "FNMSUBD"} {
			if inSolver && strings.Contains(line, "\t"+fused+"\t") {
				t.Errorf("fused: %s", strings.TrimSpace(line))
			}
		}
	}
	if !seen {
		t.Error("the listing shows nothing of the solver")
	}
}
