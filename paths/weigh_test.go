package paths

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
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

var _ = errors.Is
var _ = strings.Contains
