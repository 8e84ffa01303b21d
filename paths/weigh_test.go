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
	line := &traverse.Traverse{Name: "invented.csv", Unit: "ppm"}
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
		t.Errorf("as it was: %s, D factor from %g to %g, want an upper limit above 1 alone", o.Verdict, o.Shift95[0], o.Shift95[1])
	}
	if o := &r.Paths[1].Outcome; o.Verdict != TooSmooth || o.Shift95[0] != 0 || !(o.Shift95[1] < 1) {
		t.Errorf("too long: %s, D factor from %g to %g, want an upper limit below 1 alone", o.Verdict, o.Shift95[0], o.Shift95[1])
	}
	near(t, "both limits are one of G", r.Paths[1].Outcome.Shift95[1]/r.Paths[0].Outcome.Shift95[1], 1e-3, 1e-5)
	// a traverse that sees one plateau only
	p = couple{core: 40, mantle: 40, reach: 1 * um, spot: 1 * um, sigma: 1, points: 41, window: 6 * um}
	r = weighed(t, p.study(nil, p.path(t, "any", 1)))
	if o := &r.Paths[0].Outcome; o.Verdict != Reproduces || o.Shift95 != [2]float64{0, math.Inf(1)} {
		t.Errorf("no contrast: %s, D factor from %g to %g, want no information", o.Verdict, o.Shift95[0], o.Shift95[1])
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
	s := several(t, 9)
	want, err := Weigh(context.Background(), s, 1)
	if err != nil {
		t.Fatal(err)
	}
	for _, jobs := range []int{0, 2, 4, 8, 50} {
		got, err := Weigh(context.Background(), s, jobs)
		if err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(want, got, sameBits); diff != "" {
			t.Errorf("%d jobs: %s", jobs, diff)
		}
	}
	// nor do the paths beside it change a path
	alone := *s
	alone.Paths = s.Paths[4:5]
	got, err := Weigh(context.Background(), &alone, 1)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(want.Paths[4], got.Paths[0], sameBits); diff != "" {
		t.Errorf("alone: %s", diff)
	}
}

// sameBits compares numbers by their bits and what is only pointed to by where it is.
var sameBits = cmp.Options{
	cmp.Comparer(func(a, b float64) bool { return math.Float64bits(a) == math.Float64bits(b) }),
	cmp.Comparer(func(a, b *study.Study) bool { return true }),
	cmp.Comparer(func(a, b *study.Path) bool { return a == b }),
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
