package diffusion

import (
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// What a problem is made of, for the tests of orders and those against the
// reference. Any value of one goes with any of another.
var (
	pairShapes = []string{"slab", "cylinder", "ball"} // by Shape
	pairRims   = []string{"sealed", "held", "both held", "prescribed", "following", "transfer", "transfer following"}
	pairLaws   = []string{"plain", "sum", "switched", "spread", "zones", "smooth host", "host of zones", "own", "own in zones", "front"}
	pairStarts = []string{"smooth", "jump", "edge", "linear"}
	pairLegs   = []string{"hold", "ramp", "relax", "table", "reheats", "sheet"}
)

// pairCase is one choice of each.
type pairCase struct {
	shape                 Shape
	rim, law, start, legs string
}

func (c pairCase) String() string {
	return strings.Join([]string{c.shape.String(), c.rim, c.law, c.start, c.legs}, "/")
}

// pairCases holds every pair of values of two different axes at least once.
func pairCases() []pairCase {
	var cases []pairCase
	for _, row := range coverPairs([]int{len(pairShapes), len(pairRims), len(pairLaws), len(pairStarts), len(pairLegs)}) {
		cases = append(cases, pairCase{Shape(row[0]), pairRims[row[1]], pairLaws[row[2]], pairStarts[row[3]], pairLegs[row[4]]})
	}
	return cases
}

// pair is a value of one axis and a value of a later one.
type pair struct{ axis, value, other, otherValue int }

// pairsOf returns the pairs in a row of one value an axis; -1 is none yet.
func pairsOf(row []int) []pair {
	var pairs []pair
	for a, v := range row {
		for b := a + 1; b < len(row); b++ {
			if v >= 0 && row[b] >= 0 {
				pairs = append(pairs, pair{a, v, b, row[b]})
			}
		}
	}
	return pairs
}

// coverPairs returns rows of one value an axis, each less than the axis's size, so
// that every pair of values of two axes is in one of them: each row begins with a pair
// that none has yet and then takes, axis by axis, the value that adds most.
func coverPairs(sizes []int) [][]int {
	var rows [][]int
	have := map[pair]bool{}
	complete := func(p pair) {
		row := slices.Repeat([]int{-1}, len(sizes))
		row[p.axis], row[p.other] = p.value, p.otherValue
		adds := func(axis, value int) (n int) {
			row[axis] = value
			for _, q := range pairsOf(row) {
				if !have[q] {
					n++
				}
			}
			return n
		}
		for axis, size := range sizes {
			if row[axis] >= 0 {
				continue
			}
			best := len(rows) % size // among equals each in its turn
			for value, most := 0, adds(axis, best); value < size; value++ {
				if n := adds(axis, value); n > most {
					best, most = value, n
				}
			}
			row[axis] = best
		}
		for _, q := range pairsOf(row) {
			have[q] = true
		}
		rows = append(rows, row)
	}
	for a := range sizes {
		for b := a + 1; b < len(sizes); b++ {
			for i := range sizes[a] * sizes[b] {
				if p := (pair{a, i / sizes[b], b, i % sizes[b]}); !have[p] {
					complete(p)
				}
			}
		}
	}
	return rows
}

// TestPairCases: no pair is missing, and few cases are more than must be.
func TestPairCases(t *testing.T) {
	cases := pairCases()
	all := [][]string{pairShapes, pairRims, pairLaws, pairStarts, pairLegs}
	for a := range all {
		for b := a + 1; b < len(all); b++ {
			for _, x := range all[a] {
				for _, y := range all[b] {
					if !slices.ContainsFunc(cases, func(c pairCase) bool {
						values := []string{c.shape.String(), c.rim, c.law, c.start, c.legs}
						return values[a] == x && values[b] == y
					}) {
						t.Errorf("%s and %s never meet", x, y)
					}
				}
			}
		}
	}
	if least := len(pairRims) * len(pairLaws); len(cases) > least*3/2 {
		t.Errorf("%d cases, where at least %d are needed", len(cases), least)
	}
	t.Logf("%d cases", len(cases))
}

// pairProblem is a case made ready: beyond is what the outer rim leads to, as a
// function of time and temperature.
type pairProblem struct {
	*Problem
	h      *thermal.History
	beyond func(t, temp float64) float64
	damped bool // something jumps
}

const (
	pairG      = 0.03 // diffusion integral, in squares of the thickness
	pairHollow = 0.3  // inner radius of a crystal with a rim there, as a part of the outer
	pairInner  = 0.8  // plateaux, and the values of a smooth start at its ends
	pairOuter  = 0.2
	pairRim    = 0.5  // of a rim that does not hold what the start has there
	pairSlope  = 8000 // K: how a rim follows temperature, exp(-pairSlope/T)
	pairSwitch = 1040 // K: where two terms of a law are of one size, and one takes over from the other
)

// problem makes the case ready.
func (c pairCase) problem(tb testing.TB) pairProblem {
	tb.Helper()
	p := &Problem{Shape: c.shape, Zones: []Zone{{}, {Outer: testSize}}}
	if c.rim == "both held" && c.shape != Slab {
		p.R0 = pairHollow * testSize
	}
	p.Zones[0].Outer = pairFaces(p, 2)[1]
	q := pairProblem{Problem: p, h: c.history(tb), damped: true}
	c.layStart(p)
	c.layLaw(&q)
	c.layRims(&q)
	return q
}

// pairFaces returns the faces of n cells, an even number, of widths that change
// evenly by some two to one; those of 2n are these and one more in each.
func pairFaces(p *Problem, n int) []float64 {
	faces := uniform(0, 1, n)
	for i, s := range faces {
		faces[i] = p.R0 + (p.size()-p.R0)*(s+0.3*math.Sin(2*math.Pi*s)/(2*math.Pi))
	}
	faces[n] = p.size()
	if len(p.Zones) == 2 && p.Zones[0].Outer > 0 {
		faces[n/2] = p.Zones[0].Outer
	}
	return faces
}

// history returns a path along which D changes up to some hundredfold, so that a
// hundred steps see how it goes.
func (c pairCase) history(tb testing.TB) *thermal.History {
	tb.Helper()
	const year = thermal.Year
	switch c.legs {
	case "hold":
		return newHistory(tb, thermal.Leg{Kind: thermal.Hold, For: 100 * year, T0: 1040})
	case "ramp":
		return newHistory(tb, thermal.Leg{Kind: thermal.Ramp, For: 100 * year, T0: 1000, T1: 1080})
	case "relax":
		return newHistory(tb, thermal.Leg{Kind: thermal.Relax, For: 100 * year, T0: 1080, T1: 1000, Tau: 30 * year})
	case "table":
		return newHistory(tb, thermal.Leg{Kind: thermal.Table, Rows: &thermal.Rows{
			Time: []float64{0, 30 * year, 50 * year, 50 * year, 100 * year}, Temp: []float64{1020, 1060, 1030, 1050, 1010}}})
	case "reheats":
		h := new(thermal.History)
		wake := thermal.Spec{Kind: thermal.SpecReheat, Temp: 1060, Rise: 5 * year, Dwell: 5 * year, Efold: 8 * year, For: 30 * year}
		if err := thermal.Build(h, []thermal.Spec{{Kind: thermal.SpecHold, Temp: 1020, For: 10 * year},
			{Kind: thermal.SpecRepeat, Times: 3, Legs: []thermal.Spec{wake}}}); err != nil {
			tb.Fatal(err)
		}
		return h
	default:
		return newHistory(tb, thermal.Leg{Kind: thermal.SheetCooling, For: 3 * year,
			Sheet: &thermal.Sheet{Magma: 1200, Host: 1000, Thickness: 20, Position: 7, Kappa: 1e-6}})
	}
}

// layStart gives the problem its start: smooth is level, and its slope too, at both
// ends.
func (c pairCase) layStart(p *Problem) {
	inner, outer := pairInner, pairOuter
	if c.law == "front" {
		outer = 0
	}
	along := func(shape func(s float64) float64) {
		p.Profile = func(r float64) float64 {
			return inner + (outer-inner)*shape(math.Min((r-p.R0)/(testSize-p.R0), 1))
		}
	}
	switch c.start {
	case "smooth":
		along(func(s float64) float64 { return s * s * s * (10 - 15*s + 6*s*s) })
	case "linear":
		along(func(s float64) float64 { return s })
	case "edge":
		p.Zones[0].Edge = 0.4 * (testSize - p.R0)
		fallthrough
	default:
		p.Zones[0].Start, p.Zones[1].Start = inner, outer
	}
}

// layLaw gives the problem its law and its host.
func (c pairCase) layLaw(q *pairProblem) {
	p := q.Problem
	p.Law = Law{Terms: []Arrhenius{{E: 30000}}}
	if c.law == "sum" || c.law == "switched" {
		p.Law.Terms = []Arrhenius{{E: 22000}, {LnA: 16000.0 / pairSwitch, E: 38000}}
	}
	if c.law == "switched" {
		p.Law.Where = []thermal.Window{{Below: pairSwitch}, {Above: pairSwitch}}
	}
	scale := math.Log(pairG*(testSize-p.R0)*(testSize-p.R0)) - p.Law.LnIntegral(q.h, 0, q.h.Life())
	for i := range p.Law.Terms {
		p.Law.Terms[i].LnA += scale
	}
	lnK := func(x, temp float64) float64 { return 1500*x/temp + 0.3*x*x }
	switch c.law {
	case "spread":
		p.Spread = func(r float64) float64 { return math.Exp(0.8 * math.Pow(r/testSize, 2)) }
	case "zones":
		p.Zones[1].Times = 0.4
	case "smooth host":
		p.LnK = lnK
		p.Host = func(r float64) float64 { return math.Pow(r/testSize, 2) }
	case "host of zones":
		p.LnK = lnK
		p.Zones[1].Host, p.Zones[1].Times = 1, 0.6
	case "own":
		p.Own = growing(1.5)
	case "own in zones":
		p.LnK, p.Own = lnK, growing(-0.7) // if D grows instead, two errors nearly cancel in these cells
		p.Zones[1].Host = 1
	case "front":
		p.Own = power(1)
	}
}

// layRims gives the problem its rims.
func (c pairCase) layRims(q *pairProblem) {
	p, h := q.Problem, q.h
	_, begin := h.At(0)
	value, inner := pairRim, pairRim-0.1
	if c.start == "smooth" && c.law != "front" {
		value, inner = pairOuter, pairInner
		// a rim of zones' K is at odds with what is beside them
		q.damped = c.law == "zones" || c.law == "host of zones" || c.law == "own in zones" || c.rim == "prescribed" || c.rim == "transfer"
	}
	if c.rim == "transfer" {
		value = pairRim
	}
	q.beyond = func(t, temp float64) float64 { return value }
	follows := Arrhenius{LnA: math.Log(value) + pairSlope/begin, E: pairSlope}
	follow := func(t, temp float64) float64 { return math.Exp(follows.LnA - follows.E/temp) }
	rate := rateOf(p, h, 2, 15000)
	switch c.rim {
	case "held":
		p.Outer = heldAt(value)
	case "both held":
		p.Inner, p.Outer = heldAt(inner), heldAt(value)
	case "prescribed":
		jump := 0.4 * h.Life()
		q.beyond = func(t, temp float64) float64 {
			v := value + 0.3*math.Sin(math.Pi*t/h.Life())
			if t >= jump {
				v += 0.2
			}
			return v
		}
		given := &Given{At: func(t float64) float64 { return q.beyond(t, 0) }, Jumps: []float64{jump}}
		p.Outer = []Rim{{Kind: Prescribed, Given: given}}
	case "following":
		q.beyond = follow
		p.Outer = []Rim{{Kind: Following, Equilibrium: &follows}}
	case "transfer":
		p.Outer = []Rim{{Kind: Transfer, Value: value, Rate: rate}}
	case "transfer following":
		q.beyond = follow
		p.Outer = []Rim{{Kind: Transfer, Equilibrium: &follows, Rate: rate}}
	}
}

// pairSteps returns the steps of n, each half of one of n/2: small at both ends,
// where a start jumps and what holds at a rim may change fast.
func pairSteps(n int) []float64 {
	fractions := equalSteps(n)
	for i, f := range fractions {
		fractions[i] = f * f * (3 - 2*f)
	}
	return fractions
}

// solve solves the problem in so many cells and n steps.
func (q pairProblem) solve(tb testing.TB, cells, n int) solution {
	tb.Helper()
	return q.inSteps(tb, cells, pairSteps(n))
}

// evenly does so in n even steps.
func (q pairProblem) evenly(tb testing.TB, cells, n int) solution {
	tb.Helper()
	return q.inSteps(tb, cells, equalSteps(n))
}

func (q pairProblem) inSteps(tb testing.TB, cells int, fractions []float64) solution {
	tb.Helper()
	const afterJump = 4
	o := Options{Faces: pairFaces(q.Problem, cells), Fractions: fractions, Damp: -1}
	if q.damped {
		o.Damp = afterJump
	}
	return solve(tb, q.Problem, o, q.h)
}
