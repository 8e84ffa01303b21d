package paths

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"sync/atomic"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
	"github.com/google/go-cmp/cmp"
)

const um = 1e-6

// couple is an invented study whose truth is known in closed form: two zones
// that were once uniform, far from both ends of a slab, seen by a Gaussian spot.
type couple struct {
	core, mantle float64 // ppm
	reach        float64 // sqrt(2 G) of the truth, m
	spot         float64 // standard deviation, m; 0 is a point
	sigma        float64 // of the data, ppm
	points       int
	window       float64 // half the length of the traverse, m
}

// sharp is a couple that a good probe resolves well.
func sharp() couple {
	return couple{core: 40, mantle: 90, reach: 3 * um, spot: 0.34 * um, sigma: 0.5, points: 41, window: 12 * um}
}

const (
	boundary = 60 * um // from the centre, as far as from the rim
	hot      = 1023.15 // K
)

// seen is the truth at r as the spot sees it:
//
//	c = (c1 + c2)/2 + (c2 - c1)/2 erf((r - b)/(2 sqrt(G + spot^2/2))),
//
// the diffusion couple of Crank (1975), The Mathematics of Diffusion, eq. 2.14,
// whose convolution with a Gaussian adds to the variance 2 G.
func (p couple) seen(r float64) float64 {
	width := math.Sqrt(2 * (p.reach*p.reach + p.spot*p.spot))
	return (p.core+p.mantle)/2 + (p.mantle-p.core)/2*math.Erf((r-boundary)/width)
}

// law is invented.
func law() diffusion.Law { return diffusion.NewLaw(7e-8, 273e3) }

// path holds 750 C until the truth has diffused divided by m: its shift factor
// is m.
func (p couple) path(t testing.TB, name string, m float64) study.Path {
	t.Helper()
	life := p.reach * p.reach / 2 / m / math.Exp(law().LnD(hot))
	return study.Path{Name: name, History: history(t, thermal.Leg{Kind: thermal.Hold, For: life, T0: hot}), Eruption: life}
}

func history(t testing.TB, legs ...thermal.Leg) *thermal.History {
	t.Helper()
	h := new(thermal.History)
	if err := h.Set(legs); err != nil {
		t.Fatal(err)
	}
	return h
}

// study is the couple measured, with noise unless rng is nil, and both
// plateaux left free.
func (p couple) study(rng *rand.Rand, paths ...study.Path) *study.Study {
	line := &traverse.Traverse{Name: "invented.csv", Unit: "ppm", Independent: true}
	if p.spot > 0 {
		line.Spot = traverse.Spot{Kind: traverse.Gaussian, Width: p.spot}
	}
	for i := range p.points {
		r := boundary + p.window*(2*float64(i)/float64(p.points-1)-1)
		line.Position = append(line.Position, r)
		value := p.seen(r)
		if rng != nil {
			value += p.sigma * rng.NormFloat64()
		}
		line.Value = append(line.Value, value)
		line.Sigma = append(line.Sigma, p.sigma)
		line.Line = append(line.Line, i+2)
	}
	return &study.Study{
		Title: "invented", File: "study.toml", Confidence: 0.95, Paths: paths,
		Crystals: []study.Crystal{{
			Name: "Q1", Mineral: "quartz", Shape: diffusion.Slab,
			Zones: []study.Zone{{Name: "core", Width: boundary, Times: 1}, {Name: "mantle", Width: boundary, Times: 1}},
			Elements: []study.Element{{
				Name: "Ti", Unit: "ppm", Law: study.Law{Law: law()},
				Start:    study.Start{Zones: []study.Plateau{{Free: true}, {Free: true}}},
				Rims:     []study.Rim{{Kind: diffusion.Held, Zone: 1}},
				Traverse: line,
			}},
		}},
	}
}

func weighed(t testing.TB, s *study.Study) *Result {
	t.Helper()
	r, err := Weigh(context.Background(), s, 2)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// Without noise the shift factor is what the path was made with, to the 1 % that
// is promised, over six decades; plateaux come out to a hundredth of their error.
func TestWeighFindsTheShiftFactor(t *testing.T) {
	const promised = 0.01
	p := sharp()
	ms := []float64{1e-3, 3e-3, 0.04, 0.3, 0.9, 1, 1.1, 2.5, 17, 200, 1e3}
	var list []study.Path
	for _, m := range ms {
		list = append(list, p.path(t, fmt.Sprintf("m = %g", m), m))
	}
	r := weighed(t, p.study(nil, list...))
	for i, m := range ms {
		t.Run(list[i].Name, func(t *testing.T) {
			o := &r.Paths[i].Outcome
			near(t, "shift factor", o.Shift/m, 1, promised)
			want := map[bool]Verdict{true: TooSharp, false: TooSmooth}[m > 1]
			if math.Abs(m-1) < 0.2 {
				want = Reproduces // noiseless, and 20 % is within what the data can tell
			}
			if o.Verdict != want {
				t.Errorf("verdict %s, want %s", o.Verdict, want)
			}
			if !(o.Shift95[0] < o.Shift68[0] && o.Shift68[0] < m && m < o.Shift68[1] && o.Shift68[1] < o.Shift95[1]) {
				t.Errorf("intervals %g and %g do not nest about %g", o.Shift68, o.Shift95, m)
			}
			near(t, "ln G", r.Paths[i].Profiles[0].LnG, math.Log(p.reach*p.reach/2/m), 1e-9)
			if m != 1 {
				return
			}
			f := r.Paths[i].Profiles[0].Free
			near(t, "core", f[0].Value, p.core, 0.05*f[0].Sigma)
			near(t, "mantle", f[1].Value, p.mantle, 0.05*f[1].Sigma)
			near(t, "stand-in temperature", r.Paths[i].Profiles[0].StandIn, hot, 1e-3)
		})
	}
}

// The numerical error counts at the shift factor, not only where the path is:
// one that hardly diffuses is solved well by any plan, and would be called of
// wrong shape for the errors of the solver.
func TestWeighIsFineEnoughAtTheShiftFactor(t *testing.T) {
	if underRace {
		t.Skip("solves on 800 cells, one path after the other")
	}
	p := couple{core: 40, mantle: 90, reach: 0.3 * um, sigma: 0.005, points: 41, window: 1.2 * um}
	r := weighed(t, p.study(nil, p.path(t, "as it was", 1), p.path(t, "far too short", 1000)))
	for i, m := range []float64{1, 1000} {
		o := &r.Paths[i].Outcome
		near(t, "shift factor", o.Shift/m, 1, 1e-3)
		if want := []Verdict{Reproduces, TooSharp}[i]; o.Verdict != want {
			t.Errorf("verdict %s, want %s", o.Verdict, want)
		}
	}
	near(t, "shift factors against each other", r.Paths[1].Outcome.Shift/r.Paths[0].Outcome.Shift, 1000, 0.1)
	if q := r.Paths[1].Profiles[0]; !(q.NumErr > errorAim) || len(q.Notes) == 0 {
		t.Errorf("error of %g sigma at the shift factor and notes %q, want what no plan of ours brings below %g said", q.NumErr, q.Notes, errorAim)
	}
}

// As few points as can be judged: the two plateaux and the shift leave nothing.
func TestWeighOfThreePoints(t *testing.T) {
	p := sharp()
	p.points, p.window = 3, 6*um
	as, short := p.path(t, "as it was", 1), p.path(t, "too short", 10)
	s := p.study(nil, as, short)
	line := s.Crystals[0].Elements[0].Traverse
	line.Position[1] -= 2 * um // at the boundary itself any amount of diffusion gives the mean
	line.Value[1] = p.seen(line.Position[1])
	r := weighed(t, s)
	for i, want := range []Verdict{Reproduces, TooSharp} {
		if o := &r.Paths[i].Outcome; o.Verdict != want || o.Degrees != 1 {
			t.Errorf("path %d: %s with %d degrees (misfit %g), want %s with 1", i, o.Verdict, o.Degrees, o.Misfit, want)
		}
	}
	p.points = 2
	_, err := Weigh(context.Background(), p.study(nil, as), 1)
	var in *thermal.InputError
	if !errors.As(err, &in) || !strings.Contains(err.Error(), "as it was") {
		t.Errorf("two points for two plateaux: got %v, want an input error that names the path", err)
	}
}

// A start that was not two plain zones cannot be blamed on the path.
func TestWeighCallsAWrongStart(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 1))
	p := sharp()
	for _, test := range []struct {
		name  string
		plant func(r float64) float64 // ppm
	}{
		{"a band beside the boundary", func(r float64) float64 { return 6 * math.Exp(-square((r-boundary-7*um)/um)) }},
		{"a core that was zoned", func(r float64) float64 { return 3 * math.Sin(r/um) }},
		{"a mantle that rises", func(r float64) float64 { return math.Max(0, r-boundary-2*um) / um }},
	} {
		t.Run(test.name, func(t *testing.T) {
			s := p.study(rng, p.path(t, "as it was", 1), p.path(t, "too short", 30))
			line := s.Crystals[0].Elements[0].Traverse
			for i, r := range line.Position {
				line.Value[i] += test.plant(r)
			}
			for _, path := range weighed(t, s).Paths {
				if path.Outcome.Verdict != WrongShape {
					t.Errorf("%s: %s, want wrong shape", path.Path.Name, path.Outcome.Verdict)
				}
			}
		})
	}
}

// A profile no wider than the spot sets only an upper limit on diffusion; where
// the spot blurs everything, nothing is known.
func TestWeighAtTheLimitsOfKnowing(t *testing.T) {
	// sharper than the spot can see
	p := couple{core: 40, mantle: 90, reach: 0.05 * um, spot: 1 * um, sigma: 1, points: 41, window: 6 * um}
	r := weighed(t, p.study(nil, p.path(t, "as it was", 1), p.path(t, "a thousand times as long", 1e-3)))
	if o := &r.Paths[0].Outcome; o.Verdict != Reproduces || o.Shift95[0] != 0 || !(o.Shift95[1] > 1) || math.IsInf(o.Shift95[1], 1) {
		t.Errorf("as it was: %s, shift factor from %g to %g, want an upper limit above 1 alone", o.Verdict, o.Shift95[0], o.Shift95[1])
	}
	if o := &r.Paths[1].Outcome; o.Verdict != TooSmooth || o.Shift95[0] != 0 || !(o.Shift95[1] < 1) {
		t.Errorf("too long: %s, shift factor from %g to %g, want an upper limit below 1 alone", o.Verdict, o.Shift95[0], o.Shift95[1])
	}
	near(t, "both limits are one of G", r.Paths[1].Outcome.Shift95[1]/r.Paths[0].Outcome.Shift95[1], 1e-3, 1e-5)
	// a traverse that sees one plateau only
	p = couple{core: 40, mantle: 40, reach: 1 * um, spot: 1 * um, sigma: 1, points: 41, window: 6 * um}
	r = weighed(t, p.study(nil, p.path(t, "any", 1)))
	if o := &r.Paths[0].Outcome; o.Verdict != Reproduces || o.Shift95 != [2]float64{0, math.Inf(1)} {
		t.Errorf("no contrast: %s, shift factor from %g to %g, want no information", o.Verdict, o.Shift95[0], o.Shift95[1])
	}
}

// several is a study of many paths with noise.
func several(t testing.TB, n int) *study.Study {
	p := sharp()
	var list []study.Path
	for i := range n {
		list = append(list, p.path(t, fmt.Sprintf("path %d", i), math.Exp(3*math.Sin(float64(i)))))
	}
	return p.study(rand.New(rand.NewPCG(7, 2)), list...)
}

// The number of paths at a time changes nothing, to the bit.
func TestWeighSameBitsWhateverTheJobs(t *testing.T) {
	s := several(t, 5)
	want, err := Weigh(context.Background(), s, 1)
	if err != nil {
		t.Fatal(err)
	}
	for _, jobs := range []int{0, 2, 4, 8} {
		got, err := Weigh(context.Background(), s, jobs)
		if err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(want, got, sameBits); diff != "" {
			t.Errorf("%d jobs: %s", jobs, diff)
		}
	}
	// nor do the paths beside it change a path, but for how far it lies above the
	// own best fit, which is the best along all of them
	alone := *s
	alone.Paths = s.Paths[3:4]
	got, err := Weigh(context.Background(), &alone, 1)
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range []*PathResult{&want.Paths[3], &got.Paths[0]} {
		p.Outcome.Above, p.Outcome.Profiles[0].Above, p.Outcome.Crystals[0].Above = 0, 0, 0
	}
	if diff := cmp.Diff(want.Paths[3], got.Paths[0], sameBits); diff != "" {
		t.Errorf("alone: %s", diff)
	}
}

// sameBits compares numbers by their bits and what is only pointed to by where it is.
var sameBits = cmp.Options{
	cmp.Comparer(func(a, b float64) bool { return math.Float64bits(a) == math.Float64bits(b) }),
	cmp.Comparer(func(a, b *study.Study) bool { return true }),
	cmp.Comparer(func(a, b *study.Path) bool { return a.Name == b.Name && a.History == b.History }),
	cmp.Comparer(func(a, b *study.Crystal) bool { return a == b }),
	cmp.Comparer(func(a, b *study.Element) bool { return a == b }),
}

// Every path that fails is named, at most 20 of them, and there is no half
// result to be taken for a whole one.
func TestWeighNamesThePathsThatFail(t *testing.T) {
	s := several(t, 30)
	moment, err := thermal.ParseMoment("end of wake 2")
	if err != nil {
		t.Fatal(err)
	}
	e := &s.Crystals[0].Elements[0]
	e.Rims = append(e.Rims, study.Rim{Kind: diffusion.Sealed, Zone: -1, From: &moment, Place: thermal.Place{File: "study.toml", Line: 9, Col: 3}})
	r, err := Weigh(context.Background(), s, 2)
	if r != nil || err == nil {
		t.Fatalf("got %v, %v, want an error and no result", r, err)
	}
	lines := strings.Split(err.Error(), "\n")
	if len(lines) != mostErrors {
		t.Errorf("%d errors, want %d", len(lines), mostErrors)
	}
	for i, line := range lines {
		if name := fmt.Sprintf("path %q, Ti in Q1: study.toml:9:3", s.Paths[i].Name); !strings.Contains(line, name) {
			t.Errorf("error %d is %q, want it to begin with %q", i, line, name)
		}
	}
	e.Traverse = nil
	var in *thermal.InputError
	if _, err := Weigh(context.Background(), s, 2); !errors.As(err, &in) || in.Remedy == "" {
		t.Errorf("no traverse: got %v, want an input error with a remedy", err)
	}
}

// tripwire is a context that is done as soon as it has been asked often enough.
type tripwire struct {
	context.Context
	left atomic.Int64
}

func (c *tripwire) Err() error {
	if c.left.Add(-1) < 0 {
		return context.Canceled
	}
	return nil
}

// A weighing that is no longer wanted stops in the middle of a path, and says
// nothing of the paths it has done.
func TestWeighStops(t *testing.T) {
	done, cancel := context.WithCancel(context.Background())
	cancel()
	if r, err := Weigh(done, several(t, 3), 2); r != nil || !errors.Is(err, context.Canceled) {
		t.Errorf("already done: got %v, %v", r, err)
	}
	for _, asked := range []int64{1, 5, 20} {
		ctx := &tripwire{Context: context.Background()}
		ctx.left.Store(asked)
		if r, err := Weigh(ctx, several(t, 3), 2); r != nil || !errors.Is(err, context.Canceled) {
			t.Errorf("done after %d looks: got %v, %v", asked, r, err)
		}
		if left := ctx.left.Load(); left < -20 {
			t.Errorf("done after %d looks, yet looked %d times more", asked, -left)
		}
	}
}

// Two elements of one crystal share the path. If they agree the joint interval is
// narrower by the root of two; if they want different amounts of diffusion no
// shift fits both, though each passes by itself.
func TestWeighOfTwoElements(t *testing.T) {
	p := sharp()
	for _, test := range []struct {
		name  string
		times float64 // by how much more the law lets the second move
		want  Verdict
	}{
		{"agree", 1, Reproduces},
		{"differ", 20, AtOdds},
	} {
		t.Run(test.name, func(t *testing.T) {
			s := p.study(nil, p.path(t, "as it was", 1))
			second := s.Crystals[0].Elements[0]
			second.Name, second.Law.Law = "Al", diffusion.NewLaw(7e-8*test.times, 273e3)
			s.Crystals[0].Elements = append(s.Crystals[0].Elements, second)
			o := &weighed(t, s).Paths[0].Outcome
			if o.Verdict != test.want || len(o.Profiles) != 2 {
				t.Fatalf("%s with %d profiles, want %s with 2", o.Verdict, len(o.Profiles), test.want)
			}
			near(t, "shift factor of the first", o.Profiles[0].Shift, 1, 0.01)
			near(t, "shift factor of the second", o.Profiles[1].Shift*test.times, 1, 0.01)
			if o.Points != 2*p.points || o.Degrees != 2*p.points-4 {
				t.Errorf("%d degrees of %d points, want %d of %d", o.Degrees, o.Points, 2*p.points-4, 2*p.points)
			}
			if test.want != Reproduces {
				return
			}
			width := func(f Finding) float64 { return math.Log(f.Shift68[1] / f.Shift68[0]) }
			near(t, "width over that of one", width(o.Finding)/width(o.Profiles[0]), 1/math.Sqrt2, 0.01)
		})
	}
}

// In a ball a core of radius b that was uniform in a boundless mantle is
//
//	c = (c1-c2)/2 (erf((b-r)/w) + erf((b+r)/w)) - (c1-c2) w/(2 r sqrt pi) (exp(-((b-r)/w)^2) - exp(-((b+r)/w)^2)) + c2,
//
// w = 2 sqrt G (Crank 1975, eq. 3.8).
func TestWeighOfABall(t *testing.T) {
	p := couple{core: 40, mantle: 90, reach: 4 * um, sigma: 0.3, points: 41, window: 14 * um}
	const b = 20 * um
	s := p.study(nil, p.path(t, "as it was", 1), p.path(t, "too short", 50))
	c := &s.Crystals[0]
	c.Shape = diffusion.Ball
	c.Zones[0].Width, c.Zones[1].Width = b, 60*um
	line := c.Elements[0].Traverse
	w := math.Sqrt2 * p.reach
	for i := range line.Position {
		line.Position[i] += b - boundary
		r := line.Position[i]
		in, out := (b-r)/w, (b+r)/w
		line.Value[i] = p.mantle + (p.core-p.mantle)*((math.Erf(in)+math.Erf(out))/2-
			w/(2*r*math.Sqrt(math.Pi))*(math.Exp(-in*in)-math.Exp(-out*out)))
	}
	r := weighed(t, s)
	for i, m := range []float64{1, 50} {
		near(t, "shift factor", r.Paths[i].Outcome.Shift/m, 1, 0.01)
	}
}

// What other analyses know of a plateau is a measurement like the others: it
// narrows what the traverse alone leaves open, and costs no degree of freedom.
func TestWeighWithKnownPlateaux(t *testing.T) {
	p := sharp()
	p.window = 3 * um // too short to see either plateau
	path := p.path(t, "as it was", 1)
	width := func(core, mantle study.Plateau) (float64, *PathResult) {
		s := p.study(nil, path)
		s.Crystals[0].Elements[0].Start.Zones = []study.Plateau{core, mantle}
		r := &weighed(t, s).Paths[0]
		near(t, "shift factor", r.Outcome.Shift, 1, 0.02)
		return math.Log(r.Outcome.Shift68[1] / r.Outcome.Shift68[0]), r
	}
	open, free := width(study.Plateau{Free: true}, study.Plateau{Free: true})
	narrower, known := width(study.Plateau{Value: p.core, Sigma: 1}, study.Plateau{Value: p.mantle, Sigma: 1})
	narrowest, fixed := width(study.Plateau{Value: p.core}, study.Plateau{Value: p.mantle})
	if !(open > 1.5*narrower && narrower > 1.5*narrowest) {
		t.Errorf("widths %g free, %g known, %g fixed, want each much narrower than the one before", open, narrower, narrowest)
	}
	for _, r := range []struct {
		path          *PathResult
		degrees, free int
	}{{free, p.points - 2, 2}, {known, p.points, 2}, {fixed, p.points, 0}} {
		if got := r.path.Outcome.Degrees; got != r.degrees || len(r.path.Profiles[0].Free) != r.free {
			t.Errorf("%d degrees and %d values, want %d and %d", got, len(r.path.Profiles[0].Free), r.degrees, r.free)
		}
	}
	for i, want := range []float64{p.core, p.mantle} {
		f := known.Profiles[0].Free[i]
		near(t, f.Name, f.Value, want, 0.05)
		if !f.HasPrior || !(f.Sigma < 1) {
			t.Errorf("%s: %+v, want a prior that the traverse has narrowed", f.Name, f)
		}
	}
}

// A zone that the traverse does not reach is said to be unseen, takes no degree
// of freedom and changes nothing else.
func TestWeighWithAZoneOutOfSight(t *testing.T) {
	p := sharp()
	path := p.path(t, "too short", 5)
	without := &weighed(t, p.study(nil, path)).Paths[0]
	s := p.study(nil, path)
	c := &s.Crystals[0]
	c.Zones = append(c.Zones, study.Zone{Name: "skin", Width: 12 * um, Times: 1})
	e := &c.Elements[0]
	e.Start.Zones = append(e.Start.Zones, study.Plateau{Free: true})
	e.Rims[0].Zone = 2
	with := &weighed(t, s).Paths[0]
	if a, b := with.Outcome, without.Outcome; a.Verdict != b.Verdict || a.Degrees != b.Degrees {
		t.Errorf("%s with %d degrees, without the zone %s with %d", a.Verdict, a.Degrees, b.Verdict, b.Degrees)
	}
	near(t, "shift factor", with.Outcome.Shift, 5, 0.05)
	skin := with.Profiles[0].Free[2]
	if skin.Name != "skin" || !math.IsInf(skin.Sigma, 1) {
		t.Errorf("%+v, want the skin unseen", skin)
	}
	if notes := strings.Join(with.Profiles[0].Notes, "\n"); !strings.Contains(notes, "do not see skin") {
		t.Errorf("notes %q do not say so", notes)
	}
}
