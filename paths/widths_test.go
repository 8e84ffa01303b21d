package paths

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
)

// layered is a slab of three zones whose boundaries, at 40 and 80 um, grew with widths
// of their own. Two elements, of which the second has a D 100 times less, are error
// functions at each whose squares of standard deviations are (width/4)^2 + 2 G (Crank
// 1975, The Mathematics of Diffusion, eq. 2.14), and that of the spot.
type layered struct {
	widths [2]float64 // m
	reach  float64    // sqrt(2 G) of the first element, m
	sameD  bool
}

var (
	layeredValues = []float64{40, 90, 60} // ppm
	layeredBounds = []float64{40 * um, 80 * um}
)

const (
	layeredSpot  = 0.34 * um
	layeredSigma = 0.5 // ppm
	secondD      = 100
)

// deviation is that of boundary b in the first or second element as the spot sees it.
func (l *layered) deviation(b, element int) float64 {
	square2g := square(l.reach)
	if element > 0 && !l.sameD {
		square2g /= secondD
	}
	return math.Sqrt(square(l.widths[b]/4) + square2g + square(layeredSpot))
}

// part is that of zone i at r where the boundaries have the standard deviations.
func part(i int, r float64, deviations [2]float64) float64 {
	outside := func(b int) float64 {
		switch {
		case b < 0:
			return 1
		case b == len(layeredBounds):
			return 0
		}
		return math.Erfc((layeredBounds[b]-r)/math.Sqrt2/deviations[b]) / 2
	}
	return outside(i-1) - outside(i)
}

// study is the crystal measured, without noise if rng is nil, its edges as known.
func (l *layered) study(rng *rand.Rand, known ...study.Nuisance) *study.Study {
	c := study.Crystal{Name: "Q1", Mineral: "quartz", Shape: diffusion.Slab}
	for _, name := range []string{"core", "mantle", "skin"} {
		c.Zones = append(c.Zones, study.Zone{Name: name, Width: 40 * um, Times: 1})
	}
	for k, name := range []string{"Ti", "Al"} {
		line := &traverse.Traverse{Name: "invented.csv", Unit: "ppm", Independent: true, Size: c.Size(), Spot: gaussian(layeredSpot)}
		for i := range 141 {
			r := (25 + 0.5*float64(i)) * um
			value := 0.0
			for z, v := range layeredValues {
				value += v * part(z, r, [2]float64{l.deviation(0, k), l.deviation(1, k)})
			}
			if rng != nil {
				value += layeredSigma * rng.NormFloat64()
			}
			line.Position, line.Value = append(line.Position, r), append(line.Value, value)
			line.Sigma, line.Line = append(line.Sigma, layeredSigma), append(line.Line, i+2)
		}
		of := study.Law{Law: law()}
		if k > 0 && !l.sameD {
			of.Law = diffusion.NewLaw(7e-8/secondD, 273e3)
		}
		c.Elements = append(c.Elements, study.Element{
			Name: name, Unit: "ppm", Law: of, Start: study.Start{Zones: []study.Plateau{unknown, unknown, unknown}, Edges: known},
			Rims: []study.Rim{{Kind: diffusion.Held, Zone: 2}}, Traverse: line,
		})
	}
	return &study.Study{Title: "invented", File: "study.toml", Confidence: 0.95, Paths: []study.Path{hold(max(l.reach, 0.001*um))}, Crystals: []study.Crystal{c}}
}

func upTo(hi float64) study.Nuisance { return study.Nuisance{Lo: 0, Hi: hi} }

// Boundaries of 6 and 2 um, known or found, after diffusion: each is the error function
// of its own width, and its plateaux and width come out of data without noise.
func TestEachBoundaryHasItsWidth(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	const (
		numerical = 0.05 // chi-square of 141 points: errors within a tenth of sigma, most of them far less
		found     = 0.05 // um
	)
	l := &layered{widths: [2]float64{6 * um, 2 * um}, reach: 1 * um}
	for name, known := range map[string][]study.Nuisance{
		"known":    {{Value: 6 * um}, {Value: 2 * um}},
		"one open": {{Value: 6 * um}, upTo(4 * um)},
		"all open": {upTo(12 * um), upTo(8 * um)},
	} {
		t.Run(name, func(t *testing.T) {
			s := l.study(nil, known...)
			c := &s.Crystals[0]
			c.Elements = c.Elements[:1]
			r := weighed(t, s)
			q := &r.Paths[0].Profiles[0]
			if misfit := r.Paths[0].Outcome.Misfit; !(misfit <= numerical) {
				t.Errorf("chi-square %g of data without noise", misfit)
			}
			for i, want := range layeredValues {
				near(t, q.Free[i].Name, q.Free[i].Value, want, 0.2*q.Free[i].Sigma)
			}
			names := map[string]float64{"edge width core/mantle": 6, "edge width mantle/skin": 2}
			open := 0
			for _, f := range q.Free[3:] {
				near(t, f.Name, f.Value, names[f.Name], found)
				open++
			}
			if free := slices.DeleteFunc(slices.Clone(known), study.Nuisance.Fixed); open != len(free) {
				t.Errorf("%d widths of %+v", open, q.Free)
			}
		})
	}
}

// What several widths do together is the sum of what each does alone, to what
// interpolation leaves: judged against profiles solved for the widths themselves, after
// so much diffusion that the boundaries meet.
func TestWidthsAddUp(t *testing.T) {
	const allowed = 0.15 // sigma
	l := &layered{widths: [2]float64{6 * um, 2 * um}, reach: 15 * um}
	s := l.study(nil, upTo(12*um), upTo(6*um))
	c := &s.Crystals[0]
	e := &c.Elements[0]
	p, err := newProfile(&element{crystal: c, element: e}, &s.Paths[0], 0)
	if err != nil {
		t.Fatal(err)
	}
	if n, m := len(p.lens.edges.nodes[0]), len(p.lens.edges.nodes[1]); len(p.runs) != n+m-1 {
		t.Errorf("%d runs for %d and %d widths", len(p.runs), n, m)
	}
	if err := p.audit(0); err != nil {
		t.Fatal(err)
	}
	problem, _, err := c.Problem(e, s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	for _, widths := range [][]float64{{0.3 * um, 5 * um}, {7 * um, 0.2 * um}, {11 * um, 4 * um}, {2 * um, 2 * um}} {
		plan, err := diffusion.Compile(withEdges(problem, widths), diffusion.Options{Faces: p.plan().Faces()})
		if err != nil {
			t.Fatal(err)
		}
		var course diffusion.Course
		if err := plan.Course(&course, p.history, p.history.Life()); err != nil {
			t.Fatal(err)
		}
		fields := make([]diffusion.Field, 1)
		if err := plan.Run(fields, []diffusion.Job{{Course: &course}}); err != nil {
			t.Fatal(err)
		}
		for name, cols := range map[string][2][][]float64{
			"start": {p.mix(p.starts(), widths), {plan.Start(0), plan.Start(1), plan.Start(2), plan.Start(3)}},
			"end":   {p.mix(p.columns(0), widths), fields[0].Cols},
		} {
			for j := 1; j <= 3; j++ {
				seen, exact := p.lens.through(cols[0][j], 0, 0), p.lens.through(cols[1][j], 0, 0)
				for i := range seen {
					if miss := layeredValues[1] / layeredSigma * math.Abs(seen[i]-exact[i]); !(miss <= allowed) {
						t.Fatalf("%s, edges of %g and %g um: point %d of column %d is missed by %.2g sigma", name, widths[0]/um, widths[1]/um, i, j, miss)
					}
				}
			}
		}
	}
}

// zonesFitted is the least chi-square of an element's data over its three plateaux, for
// boundaries of the standard deviations: linear least squares by the normal equations,
// solved by Cramer's rule.
func zonesFitted(e *study.Element, deviations [2]float64) float64 {
	var a [3][3]float64
	var b [3]float64
	yy := 0.0
	for i, r := range e.Traverse.Position {
		var x [3]float64
		for z := range x {
			x[z] = part(z, r, deviations) / layeredSigma
		}
		y := e.Traverse.Value[i] / layeredSigma
		yy += y * y
		for j := range x {
			b[j] += y * x[j]
			for k := range x {
				a[j][k] += x[j] * x[k]
			}
		}
	}
	det := func(m [3][3]float64) float64 {
		return m[0][0]*(m[1][1]*m[2][2]-m[1][2]*m[2][1]) - m[0][1]*(m[1][0]*m[2][2]-m[1][2]*m[2][0]) + m[0][2]*(m[1][0]*m[2][1]-m[1][1]*m[2][0])
	}
	sum := yy
	for j := range b {
		m := a
		for k := range b {
			m[k][j] = b[k]
		}
		sum -= b[j] * det(m) / det(a)
	}
	return sum
}

// One width a boundary for both elements: the joint chi-square along a path that hardly
// diffuses is the least over all pairs of widths of the closed form's.
func TestOneWidthABoundaryForTheElements(t *testing.T) {
	if underRace {
		t.Skip("many solves")
	}
	const (
		tolerance = 0.05 // chi-square: of interpolation between widths, and of widths looked for in steps
		step      = 0.02 // um, of the search here, which leaves less than 0.02 of chi-square
		found     = 0.1  // um
	)
	l := &layered{widths: [2]float64{6 * um, 2 * um}}
	s := l.study(rand.New(rand.NewPCG(9, 21)), upTo(8*um), upTo(4*um))
	for k := range s.Crystals[0].Elements[1].Traverse.Value { // the elements do not quite agree
		at := s.Crystals[0].Elements[1].Traverse.Position[k]
		s.Crystals[0].Elements[1].Traverse.Value[k] += 10 * (part(1, at, [2]float64{2 * um, 1 * um}) - part(1, at, [2]float64{1 * um, 0.5 * um}))
	}
	r := weighed(t, s)
	least, best := math.Inf(1), [2]float64{}
	for w := 5.5; w <= 7.5; w += step {
		for v := 1.5; v <= 3.5; v += step {
			deviations := [2]float64{math.Hypot(w*um/4, layeredSpot), math.Hypot(v*um/4, layeredSpot)}
			sum := 0.0
			for i := range s.Crystals[0].Elements {
				sum += zonesFitted(&s.Crystals[0].Elements[i], deviations)
			}
			if sum < least {
				least, best = sum, [2]float64{w, v}
			}
		}
	}
	o := &r.Paths[0].Outcome
	near(t, "joint chi-square", o.Misfit, least, tolerance)
	if alone := o.Profiles[0].Misfit + o.Profiles[1].Misfit; !(alone < o.Misfit-1) {
		t.Errorf("each with its own widths %g, with common ones %g: want less", alone, o.Misfit)
	}
	for _, q := range r.Paths[0].Profiles {
		for k, name := range []string{"edge width core/mantle", "edge width mantle/skin"} {
			f := q.Free[len(q.Free)-2+k]
			if f.Name != name {
				t.Fatalf("%q among the last of %v", f.Name, q.Free)
			}
			near(t, name, f.Value, best[k], found)
		}
	}
	t.Logf("chi-square %g, widths %v um", o.Misfit, best)
}

// A planted growth edge of 12 um at one boundary and a jump that diffused at the other
// are told apart, whichever is which, each in at least nine of ten simulations; where D is the
// same in both elements, nothing is said of either.
func TestOriginsOfBoundariesAreToldApart(t *testing.T) {
	if underRace {
		t.Skip("many simulations")
	}
	const draws = 20
	for _, test := range []struct {
		name string
		of   layered
		want [2]Origin
	}{
		{"grown inside", layered{widths: [2]float64{12 * um, 0}, reach: 0.7 * um}, [2]Origin{ByGrowth, ByDiffusion}},
		{"grown outside", layered{widths: [2]float64{0, 12 * um}, reach: 0.7 * um}, [2]Origin{ByDiffusion, ByGrowth}},
		{"one D", layered{widths: [2]float64{12 * um, 0}, reach: 0.7 * um, sameD: true}, [2]Origin{UnknownOrigin, UnknownOrigin}},
	} {
		t.Run(test.name, func(t *testing.T) {
			var told [2]int
			for k := range draws {
				list := boundariesOf(t, test.of.study(rand.New(rand.NewPCG(9, 100+uint64(k))), upTo(20*um), upTo(20*um)))
				if len(list) != 2 || list[0].BoundaryText() != "core and mantle" || list[1].BoundaryText() != "mantle and skin" {
					t.Fatalf("boundaries %+v", list)
				}
				for b := range told {
					if list[b].Prefers == test.want[b] {
						told[b]++
					}
				}
			}
			if slices.Min(told[:]) < draws*9/10 {
				t.Errorf("told %v of %d", told, draws)
			}
			t.Logf("%v", told)
		})
	}
}

// boundariesOf compares growth and diffusion at each boundary without weighing the path.
func boundariesOf(t *testing.T, s *study.Study) []EdgeOrigin {
	t.Helper()
	w, err := newWeighing(s)
	if err != nil {
		t.Fatal(err)
	}
	w.paths = make([]weighedPath, 1)
	p := &w.paths[0]
	for i := range w.elements {
		q, err := newProfile(&w.elements[i], &s.Paths[0], 0)
		if err != nil {
			t.Fatal(err)
		}
		q.points, q.counted = len(q.fit.Obs), len(q.free)
		p.profiles = append(p.profiles, q)
	}
	if err := p.edgeOrigins(t.Context(), w, &s.Paths[0]); err != nil {
		t.Fatal(err)
	}
	return w.judgeEdges()
}
