package diffusion

import (
	"math"
	"strings"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
	"bankfire/thermal/published"
)

// nothing marks a sealed end for slabOf.
var nothing = math.NaN()

// finely is how many cells the rows on positions need: where a profile is flat, a
// position is known up to eight times less well than the concentrations for
// which the tolerances are meant.
const finely = 1000

// even makes 200 even cells, for profiles that spread over all of a crystal.
func even(size float64) Options { return Options{Faces: uniform(0, size, 200)} }

// B01: Crank 1975, equations 3.13 and 3.15. The rim is the outer one of a crystal
// 8 sqrt(G) wide.
func halfSpace(t *testing.T, c *published.Check) {
	const size, root = testSize, testSize / 8
	p := slabOf(size, nothing, 1, 0)
	s, fine := both(t, root*root, Options{}, fixed(p)), both(t, root*root, Options{Cells: finely}, fixed(p))
	for i, x := range []float64{0.5, 1, 2, 4} {
		judge(t, c, rowID(c, i+1), s, func(s solution) float64 { return s.at(size - x*root) })
	}
	for i, v := range []float64{0.5, 0.1} {
		judge(t, c, rowID(c, i+5), fine, func(s solution) float64 { return (size - s.where(v, 0, size)) / root })
	}
	judge(t, c, "B01.07", s, func(s solution) float64 { return content(s.plan, s.c) / root })
}

// B02: Crank 1975, equation 2.14. The jump is in the middle of 16 sqrt(G).
func couple(t *testing.T, c *published.Check) {
	const size, root, middle = testSize, testSize / 16, testSize / 2
	p := slabOf(size, nothing, nothing, 1, 0)
	s, fine := both(t, root*root, Options{}, fixed(p)), both(t, root*root, Options{Cells: finely}, fixed(p))
	for i, x := range []float64{0, 1, -1} {
		judge(t, c, rowID(c, i+1), s, func(s solution) float64 { return s.at(middle + x*root) })
	}
	width := func(s solution, hi, lo float64) float64 { return (s.where(lo, 0, size) - s.where(hi, 0, size)) / root }
	judge(t, c, "B02.04", s, func(s solution) float64 { return s.slope(middle) * root })
	judge(t, c, "B02.05", fine, func(s solution) float64 { return width(s, 0.9, 0.1) })
	part := math.Erf(1 / math.Sqrt2)
	judge(t, c, "B02.06", fine, func(s solution) float64 { return width(s, (1+part)/2, (1-part)/2) / 2 / math.Sqrt2 })
}

// B03: Crank 1975, equation 2.15. Half of the zone, and 8 sqrt(G) beside it.
func limitedSource(t *testing.T, c *published.Check) {
	const half = 1e-5
	for _, r := range c.Rows {
		in := numbers(t, r)
		g := in[1] * half * half
		p := slabOf(half, nothing, nothing, 1)
		p.Zones = append(p.Zones, Zone{Outer: half + 8*math.Sqrt(g)})
		judge(t, c, r.Row, both(t, g, Options{}, fixed(p)), func(s solution) float64 { return s.at(in[0] * half) })
	}
}

// B04: Crank 1975, equations 2.17 and 2.18.
func closedSlab(t *testing.T, c *published.Check) {
	p := slabOf(testSize, nothing, nothing, 1, 0, 0, 0)
	for _, r := range c.Rows[:12] {
		in := numbers(t, r)
		s := both(t, in[1]*testSize*testSize, even(testSize), fixed(p))
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
	}
	s := both(t, testSize*testSize, even(testSize), fixed(p))
	judge(t, c, "B04.13", s, solution.mean)
}

// B05, B06, B07: Crank 1975, equations 4.17 to 4.20, 5.22 to 5.25 and 6.18 to
// 6.22. The half-times are found by multipliers on D along one course.
func uptake(shape Shape) func(t *testing.T, c *published.Check) {
	return func(t *testing.T, c *published.Check) {
		p := slabOf(testSize, nothing, 0, 1)
		p.Shape = shape
		for _, r := range c.Rows {
			in := numbers(t, r)
			switch {
			case strings.HasPrefix(r.Quantity, "(C-C1)"):
				s := both(t, in[1]*testSize*testSize, Options{}, fixed(p))
				judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
			case strings.HasPrefix(r.Quantity, "Mt/Minf"):
				s := both(t, in[0]*testSize*testSize, Options{}, fixed(p))
				judge(t, c, r.Row, s, func(s solution) float64 { return 1 - s.mean() })
			case strings.HasPrefix(r.Quantity, "half-time Dt/a^2"):
				c.Program(t, r.Row, halfTime(t, p), c.Solver(r.Row))
			case strings.HasPrefix(r.Quantity, "half-time Dt/(2a)^2"):
				c.Program(t, r.Row, halfTime(t, p)/4, c.Solver(r.Row))
			case strings.HasPrefix(r.Quantity, "Crank two-term"):
				sixteenth := math.Pi * math.Pi / 16
				c.Formula(t, r.Row, -math.Log(sixteenth-math.Pow(sixteenth, 9)/9)/(math.Pi*math.Pi), c.Exact(r.Row))
			case strings.HasPrefix(r.Quantity, "short-time"):
				z := math.Sqrt(in[0])
				c.Formula(t, r.Row, 4/math.SqrtPi*z-z*z-z*z*z/3/math.SqrtPi, c.Exact(r.Row))
			}
		}
	}
}

// halfTime returns the integral, in squares of the size, at which half of the
// content is gone.
func halfTime(t *testing.T, p *Problem) float64 {
	t.Helper()
	plan := newPlan(t, p, Options{})
	course := newCourse(t, plan, rampOf(t, testSize*testSize))
	left := func(lnM float64) float64 {
		return solution{plan, runJob(t, plan, Job{Course: course, LnM: lnM}).Cols[0]}.mean() - 0.5
	}
	lnM, err := numeric.Root(left, math.Log(1e-3), 0, 1e-9)
	if err != nil {
		t.Error(err)
	}
	return math.Exp(lnM)
}

// B08, B09: Carslaw and Jaeger 1959, sections 9.3 and 7.6.
func core(shape Shape) func(t *testing.T, c *published.Check) {
	return func(t *testing.T, c *published.Check) {
		p := slabOf(testSize, nothing, 0, 1, 0)
		p.Shape = shape
		for _, r := range c.Rows {
			in := numbers(t, r)
			s := both(t, in[1]*testSize*testSize, Options{}, fixed(p))
			judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
		}
	}
}

// B10: Crank 1975, equations 4.22 to 4.26. With Q the amount that has left at
// x = l, the integral of x C dx is C1 D t - l Q: so in the end it is the lag, as
// Q is C1 D (t - lag)/l.
func twoRims(t *testing.T, c *published.Check) {
	for _, r := range c.Rows[:15] {
		in := numbers(t, r)
		s := both(t, in[1]*testSize*testSize, Options{}, fixed(slabOf(testSize, 1, 0.25, 0)))
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
	}
	const long = 10 * testSize * testSize
	s := both(t, long, Options{}, fixed(slabOf(testSize, 1, 0.25, 0)))
	judge(t, c, "B10.16", s, func(s solution) float64 { return s.at(testSize / 2) })
	s = both(t, long, Options{}, fixed(slabOf(testSize, 1, 0, 0)))
	judge(t, c, "B10.17", s, func(s solution) float64 {
		sum := 0.0
		for i, v := range s.plan.Volumes() {
			sum += v * s.c[i] * s.plan.Centres()[i]
		}
		return sum / testSize / testSize
	})
}

// B11: Crank 1975, equations 5.4 and 6.4.
func hollow(t *testing.T, c *published.Check) {
	for i, shape := range []Shape{Cylinder, Ball} {
		p := &Problem{
			Shape: shape, R0: testSize, Zones: []Zone{{Outer: 4 * testSize}}, Law: testLaw,
			Inner: heldAt(1), Outer: heldAt(0),
		}
		s := both(t, 100*testSize*testSize, Options{}, fixed(p))
		judge(t, c, rowID(c, i+1), s, func(s solution) float64 { return s.at(2 * testSize) })
	}
}

// B15: Carslaw and Jaeger 1959, section 12.8; Crank 1975, section 4.6. The value
// at the interface is read from the inner layer.
func twoLayers(t *testing.T, c *published.Check) {
	for _, r := range c.Rows {
		in := numbers(t, r)
		x := nothing // the retained fraction
		if strings.HasPrefix(r.Quantity, "C at") {
			x, in = in[0]*testSize, in[1:]
		}
		d1, d2, l1, time := in[0], in[1], in[2]*testSize, in[3]
		p := slabOf(testSize, nothing, 0, 1)
		p.Zones = []Zone{{Outer: l1, Start: 1}, {Outer: testSize, Start: 1, Times: d2 / d1}}
		judge(t, c, r.Row, both(t, d1*time*testSize*testSize, Options{}, fixed(p)), func(s solution) float64 {
			if math.IsNaN(x) {
				return s.mean()
			}
			lo, hi := 0.0, l1
			if x > l1 {
				lo, hi = l1, testSize
			}
			value, _ := s.read(x, lo, hi)
			return value
		})
	}
}

// moving returns a crystal, empty at first, whose rim is a function of the
// diffusion integral up to now.
func moving(shape Shape, size float64, rim func(g float64) float64) func(h *thermal.History) *Problem {
	return func(h *thermal.History) *Problem {
		g := grown(h)
		given := &Given{At: func(at float64) float64 { return rim(g(at)) }}
		return &Problem{
			Shape: shape, Zones: []Zone{{Outer: size}}, Law: testLaw,
			Outer: []Rim{{Kind: Prescribed, Given: given}},
		}
	}
}

// B16: Crank 1975, equations 3.18 and 3.20.
func risingHalfSpace(t *testing.T, c *published.Check) {
	const size, root = testSize, testSize / 8
	s := both(t, root*root, Options{}, moving(Slab, size, func(g float64) float64 { return g / root / root }))
	for _, r := range c.Rows[:5] {
		x := numbers(t, published.Row{Quantity: r.Quantity[strings.Index(r.Quantity, ")="):]})[0]
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(size - 2*x*root) })
	}
	judge(t, c, "B16.06", s, func(s solution) float64 { return content(s.plan, s.c) / root })
}

// shapes by their names in the published checks.
var shapes = map[string]Shape{"sheet": Slab, "cylinder": Cylinder, "sphere": Ball}

// B17: Crank 1975, equations 4.31, 5.31 and 6.29.
func risingRim(t *testing.T, c *published.Check) {
	const square = testSize * testSize
	for _, r := range c.Rows {
		in := numbers(t, r)
		shape := shapes[strings.Fields(r.Quantity)[0]]
		s := both(t, in[1]*square, Options{}, moving(shape, testSize, func(g float64) float64 { return g / square }))
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
	}
}

// B18: Crank 1975, section 4.3.5.
func relaxingRim(t *testing.T, c *published.Check) {
	const square = testSize * testSize
	for _, r := range c.Rows {
		in := numbers(t, r)
		s := both(t, in[1]*square, Options{}, moving(Slab, testSize, func(g float64) float64 { return -math.Expm1(-in[2] * g / square) }))
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
	}
}

// B19: Crank 1975, equation 2.6. Half of the profile, in 200 cells that widen
// with the distance from the middle.
func gaussian(t *testing.T, c *published.Check) {
	const before, after, size = 1e-5, 2e-5, 16e-5
	p := &Problem{
		Zones: []Zone{{Outer: size}}, Law: testLaw,
		Profile: func(r float64) float64 { return math.Exp(-r * r / (2 * before * before)) },
	}
	faces := make([]float64, 201)
	for i := range faces {
		faces[i] = size * math.Sinh(3*float64(i)/200) / math.Sinh(3)
	}
	faces[200] = size
	s := both(t, (after*after-before*before)/2, Options{Faces: faces}, fixed(p))
	spread := func(s solution) float64 { // of the values at 0 and one s out
		return after / math.Sqrt(2*math.Log(s.at(0)/s.at(after)))
	}
	// the tolerance is of the concentrations; the width is as well known, relatively
	c.Program(t, "B19.01", worst(c, "B19.01", s, spread), published.Tol{Rel: c.Solver("B19.02").Abs})
	judge(t, c, "B19.02", s, func(s solution) float64 { return s.at(0) })
	judge(t, c, "B19.03", s, func(s solution) float64 { return s.at(after) })
}

// B20: Carslaw and Jaeger 1959, sections 1.14 and 2.5. The kink lies inside a
// step: steps are fractions of G, and the rim is averaged over them.
func rampThenHold(t *testing.T, c *published.Check) {
	for _, r := range c.Rows {
		in := numbers(t, r)
		size := 8 * math.Sqrt(in[1]) // lengths in units of sqrt(D t1), here 1e-5 m
		const unit = 1e-5
		problem := func(h *thermal.History) *Problem {
			p := moving(Slab, size*unit, func(g float64) float64 { return math.Min(g/unit/unit, 1) })(h)
			if in[1] > 1 {
				kink, err := numeric.Root(func(at float64) float64 { return grown(h)(at) - unit*unit }, 0, h.Life(), 0)
				if err != nil {
					t.Fatal(err)
				}
				p.Outer[0].Given.Breaks = []float64{kink}
			}
			return p
		}
		s := both(t, in[1]*unit*unit, Options{}, problem)
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at((size - in[0]) * unit) })
	}
}
