package diffusion

import (
	"fmt"
	"math"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
	"bankfire/thermal/published"
)

// L01: Harris 1943. The depth is 31.6 sqrt(t/h) 10^(-6700/T) inches, T in degrees
// Rankine, with 460 for 459.67. The formula alone gives one depth; the others are
// that one, times what the solver makes of the ratio.
func caseDepth(t *testing.T, c *published.Check) {
	const (
		rankine, anchor = 1.8, "L01.03"
		inches          = 25.4 // mm
		// "ratio of depths for 4x time = 2.00 +- 0.005"
		modelTol = 0.005 / 2
	)
	energy := 2 * 6700 * math.Ln10 * thermal.GasConstant / rankine
	depth := func(fahrenheit, hours float64) float64 {
		return 31.6 * math.Sqrt(hours) * math.Pow(10, -6700/(fahrenheit+460))
	}
	var largest float64
	runs := make([]*thermal.History, 9)
	law := NewLaw(1, energy)
	for i, r := range c.Rows[:9] {
		var fahrenheit, hours float64
		if _, err := fmt.Sscanf(r.Quantity, "case depth %g F, %g h", &fahrenheit, &hours); err != nil {
			t.Fatalf("row %s: %v", r.Row, err)
		}
		runs[i] = newHistory(t, thermal.Leg{Kind: thermal.Hold, For: hours * 3600, T0: (fahrenheit + 460) / rankine})
		largest = math.Max(largest, law.LnIntegral(runs[i], 0, runs[i].Life()))
	}
	// one crystal, 8 sqrt(G) wide for the longest of them
	size := 8 * math.Exp(largest/2)
	p := slabOf(size, nothing, 1, 0)
	p.Law = law
	plan := newPlan(t, p, Options{})
	reached := make([]float64, len(runs))
	for i, h := range runs {
		reached[i] = size - solution{plan, run(t, plan, h).Cols[0]}.where(0.1, 0, size)
	}
	for i, r := range c.Rows[:9] {
		if r.Row == anchor {
			c.Formula(t, anchor, depth(1700, 1), c.Exact(anchor))
			continue
		}
		c.Program(t, r.Row, depth(1700, 1)*reached[i]/reached[2], published.Tol{Rel: modelTol})
	}
	c.Formula(t, "L01.10", depth(1700, 1), c.Exact("L01.10"))
	c.Formula(t, "L01.11", depth(1700, 1)*inches, c.Exact("L01.11"))
	c.Formula(t, "L01.12", energy/1e3, c.Exact("L01.12"))
}

// L02: Callister, example problem 5.2. The time is found by multipliers on D
// along one course of one hour.
func carburising(t *testing.T, c *published.Check) {
	const d, start, rim, want, depth, hour, size = 1.6e-11, 0.25, 1.20, 0.80, 0.5e-3, 3600, 6e-3
	c.Formula(t, "L02.01", 1-(want-start)/(rim-start), c.Exact("L02.01"))
	c.Formula(t, "L02.02", math.Erfinv(1-(want-start)/(rim-start)), c.Exact("L02.02"))
	p := slabOf(size, nothing, rim, start)
	p.Law = NewLaw(d, 0)
	plan := newPlan(t, p, Options{})
	course := newCourse(t, plan, newHistory(t, thermal.Leg{Kind: thermal.Hold, For: hour, T0: 1000}))
	lnM, err := numeric.Root(func(lnM float64) float64 {
		return solution{plan, runJob(t, plan, Job{Course: course, LnM: lnM}).Cols[0]}.at(size-depth) - want
	}, 0, 3, 1e-9)
	if err != nil {
		t.Error(err)
	}
	const ofTime = 2e-3 // "rel 2e-3 on t"
	c.Program(t, "L02.03", hour*math.Exp(lnM), published.Tol{Rel: ofTime})
	c.Program(t, "L02.04", math.Exp(lnM), published.Tol{Rel: ofTime})
}

// L04: Shewmon 1989; Porter and Easterling 1992. Half a wavelength between crests.
func homogenisation(t *testing.T, c *published.Check) {
	const wave = 2 * testSize
	p := slabOf(testSize, nothing, nothing, 0)
	p.Profile = func(r float64) float64 { return math.Cos(math.Pi * r / testSize) }
	s := both(t, wave*wave/40, Options{}, fixed(p))
	judge(t, c, "L04.01", s, func(s solution) float64 { return -1.0 / 40 / math.Log(s.at(0)) })
	judge(t, c, "L04.02", s, func(s solution) float64 { return s.at(0) })
}

// N02: zones at rest keep their means.
func zonesAtRest(t *testing.T, c *published.Check) {
	for i, shape := range []Shape{Slab, Cylinder, Ball} {
		p := &Problem{Shape: shape, Zones: []Zone{{Outer: 10e-6, Start: 1}, {Outer: 25e-6, Start: 3}, {Outer: 40e-6, Start: 2}}, Law: NewLaw(0, 1)}
		s := solve(t, p, Options{}, holdOf(t, 1e-10))
		row := rowID(c, i+1)
		c.Program(t, row, s.mean(), c.Solver(row))
	}
}
