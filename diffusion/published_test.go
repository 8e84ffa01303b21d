package diffusion

import (
	"fmt"
	"math"
	"regexp"
	"slices"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/mat"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
	"bankfire/thermal/published"
)

// TestPublished compares the solver with published values. Unless a check says
// otherwise it runs on the default plan, told that sqrt(2 G) is the smallest
// length that matters: 200 graded cells and 226 solves, or 314 under a moving
// rim and where D follows the element. The tolerances are meant for 200 even cells or more and 400 steps or more.
func TestPublished(t *testing.T) {
	checks := []struct {
		id    string
		check func(t *testing.T, c *published.Check)
	}{
		{"B01", halfSpace}, {"B02", couple}, {"B03", limitedSource}, {"B04", closedSlab},
		{"B05", uptake(Slab)}, {"B06", uptake(Cylinder)}, {"B07", uptake(Ball)},
		{"B08", core(Ball)}, {"B09", core(Cylinder)}, {"B10", twoRims}, {"B11", hollow},
		{"B12", exchangingHalfSpace}, {"B13", exchangingSurface}, {"B14", composite},
		{"B15", twoLayers}, {"B16", risingHalfSpace}, {"B17", risingRim}, {"B18", relaxingRim},
		{"B19", gaussian}, {"B20", rampThenHold},
		{"E01", closureFunction}, {"E02", closureConstants}, {"E03", closureTemperatures}, {"E04", closureProfile},
		{"F01", restingRim}, {"F02", restingSealed}, {"F03", restingStep}, {"F04", sealedDrift},
		{"F05", driftingHalfSpace}, {"F06", driftingGaussian}, {"F07", ornsteinUhlenbeck}, {"F08", exponentialMode},
		{"G01", quadraticSpread}, {"G02", exponentialSpread}, {"G03", steadySpread},
		{"G04", separable}, {"G05", finiteFront}, {"G06", manufactured(Slab)}, {"G07", manufactured(Ball)},
		{"H01", fujita}, {"H02", ownUptake}, {"H03", emptyHalfSpace}, {"H04", travellingWave}, {"H05", weightedMean},
		{"I01", amplification}, {"I02", eulerAmplification}, {"I03", stepByHand}, {"I04", spike},
		{"I05", observedOrder}, {"I06", richardson}, {"I07", balance},
		{"L01", caseDepth}, {"L02", carburising}, {"L04", homogenisation}, {"N01", movingFace}, {"N02", zonesAtRest}, {"N03", olderBoundaries},
	}
	for _, check := range checks {
		published.Run(t, check.id, check.check)
	}
}

// solution is what a run left in the cells of a plan.
type solution struct {
	plan *Plan
	c    []float64
}

// solve runs a problem along a history.
func solve(tb testing.TB, p *Problem, o Options, h *thermal.History) solution {
	tb.Helper()
	plan := newPlan(tb, p, o)
	return solution{plan, run(tb, plan, h).Cols[0]}
}

// both runs a problem twice to a diffusion integral of g, m2: along a hold and
// along a ramp. The problem may depend on the history, if a rim does.
func both(tb testing.TB, g float64, o Options, problem func(h *thermal.History) *Problem) [2]solution {
	tb.Helper()
	o.Finest = math.Sqrt(2 * g)
	hold, ramp := holdOf(tb, g), rampOf(tb, g)
	return [2]solution{solve(tb, problem(hold), o, hold), solve(tb, problem(ramp), o, ramp)}
}

// worst returns what f reads off that one of two solutions that is farther from
// what a row expects. NaN is farthest.
func worst(c *published.Check, row string, s [2]solution, f func(s solution) float64) float64 {
	a, b := f(s[0]), f(s[1])
	if want := c.Row(row).Expected; math.IsNaN(a) || math.Abs(a-want) > math.Abs(b-want) {
		return a
	}
	return b
}

// judge judges a row by what f reads off both solutions, at the row's tolerance
// for solvers.
func judge(t *testing.T, c *published.Check, row string, s [2]solution, f func(s solution) float64) {
	t.Helper()
	c.Program(t, row, worst(c, row, s, f), c.Solver(row))
}

// grown returns the diffusion integral of testLaw along h up to a time.
func grown(h *thermal.History) func(at float64) float64 {
	return func(at float64) float64 { return math.Exp(testLaw.LnIntegral(h, 0, at)) }
}

// rowID returns the id of the n-th row of a check, from 1.
func rowID(c *published.Check, n int) string { return fmt.Sprintf("%s.%02d", c.ID, n) }

var assigned = regexp.MustCompile(`=\s*([-+0-9.e]+)`)

// numbers returns what stands behind the equals signs of a row's quantity.
func numbers(t *testing.T, r published.Row) []float64 {
	t.Helper()
	var values []float64
	for _, m := range assigned.FindAllStringSubmatch(r.Quantity, -1) {
		v, err := strconv.ParseFloat(m[1], 64)
		if err != nil {
			t.Fatalf("row %s: %v", r.Row, err)
		}
		values = append(values, v)
	}
	return values
}

// stencil is how many cells a reading uses: enough that it is right to 1e-7 where
// a profile is resolved at all.
const stencil = 6

// at returns the value of the profile at r.
func (s solution) at(r float64) float64 {
	value, _ := s.read(r, math.Inf(-1), math.Inf(1))
	return value
}

// slope returns the slope of the profile at r.
func (s solution) slope(r float64) float64 {
	_, slope := s.read(r, math.Inf(-1), math.Inf(1))
	return slope
}

// read returns value and slope at r of the polynomial whose means over the cells
// nearest to r, between lo and hi, are those of the solution.
func (s solution) read(r, lo, hi float64) (value, slope float64) {
	faces := s.plan.Faces()
	first := max(0, slices.IndexFunc(faces, func(f float64) bool { return f >= lo*(1-1e-12) }))
	last := len(faces) - 1
	for faces[last] > hi*(1+1e-12) {
		last--
	}
	near, _ := slices.BinarySearch(faces, r)
	from := max(first, min(near-stencil/2, last-stencil))
	scale := faces[from+stencil] - faces[from]
	means := mat.NewDense(stencil, stencil, nil)
	for i := range stencil {
		for k := range stencil {
			column := []float64{0}
			cell := &grid{faces: faces[from+i : from+i+2]}
			addProfile(column, s.plan.problem.Shape, cell, func(x float64) float64 { return math.Pow((x-r)/scale, float64(k)) })
			means.Set(i, k, column[0])
		}
	}
	var powers mat.VecDense
	if err := powers.SolveVec(means, mat.NewVecDense(stencil, slices.Clone(s.c[from:from+stencil]))); err != nil {
		return math.NaN(), math.NaN()
	}
	return powers.AtVec(0), powers.AtVec(1) / scale
}

// where returns the position between lo and hi at which the profile has a value.
func (s solution) where(value, lo, hi float64) float64 {
	r, err := numeric.Root(func(r float64) float64 { return s.at(r) - value }, lo, hi, 1e-9*(hi-lo))
	if err != nil {
		return math.NaN()
	}
	return r
}

// mean returns the volume mean of the profile.
func (s solution) mean() float64 {
	return content(s.plan, s.c) / content(s.plan, ones(len(s.c)))
}

// slabOf returns a slab with plateaux, evenly thick, and rims held at values; NaN
// is a sealed end.
func slabOf(size, inner, outer float64, plateaux ...float64) *Problem {
	p := &Problem{Law: testLaw, Inner: heldAt(inner), Outer: heldAt(outer)}
	for i, v := range plateaux {
		p.Zones = append(p.Zones, Zone{Outer: size * float64(i+1) / float64(len(plateaux)), Start: v})
	}
	return p
}

func heldAt(value float64) []Rim {
	if math.IsNaN(value) {
		return nil
	}
	return []Rim{{Kind: Held, Value: value}}
}

// fixed makes a problem that does not depend on the history.
func fixed(p *Problem) func(*thermal.History) *Problem {
	return func(*thermal.History) *Problem { return p }
}

// TestReading reads a known profile off its cell means.
func TestReading(t *testing.T) {
	for shape := Slab; shape <= Ball; shape++ {
		f := func(r float64) float64 { return math.Cos(3*r + 1) }
		p := &Problem{Shape: shape, Zones: []Zone{{Outer: 0.4}, {Outer: 1}}, Law: testLaw, Outer: []Rim{{Kind: Held}}, Profile: f}
		plan := newPlan(t, p, Options{})
		s := solution{plan, plan.Start(0)}
		for _, r := range []float64{0, 0.001, 0.25, 0.4, 0.77, 1} {
			wantNear(t, fmt.Sprintf("%v at %g", shape, r), s.at(r), f(r), 1e-9)
			wantNear(t, fmt.Sprintf("%v slope at %g", shape, r), s.slope(r), -3*math.Sin(3*r+1), 1e-5)
		}
		wantNear(t, "where", s.where(f(0.3), 0, 0.7), 0.3, 1e-8)
	}
}
