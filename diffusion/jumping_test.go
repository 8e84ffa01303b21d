package diffusion

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"bankfire/thermal"
)

// jumpingHistory returns two to six holds, tables and sheets of hours to centuries,
// between which and in which temperature jumps.
func jumpingHistory(tb testing.TB, r *rand.Rand) *thermal.History {
	tb.Helper()
	warmth := func() float64 { return 950 + 250*r.Float64() }
	var legs []thermal.Leg
	for range 2 + r.IntN(5) {
		leg := thermal.Leg{Kind: thermal.Hold, For: logUniform(r, 1e-3, 200) * thermal.Year, T0: warmth()}
		switch r.IntN(4) {
		case 0:
			leg.Kind, leg.Rows = thermal.Table, &thermal.Rows{
				Time: []float64{0, leg.For / 3, leg.For / 3, leg.For}, Temp: []float64{warmth(), warmth(), warmth(), warmth()}}
		case 1:
			leg.Kind, leg.Sheet = thermal.SheetCooling, &thermal.Sheet{
				Magma: warmth() + 200, Host: warmth() - 100, Thickness: logUniform(r, 1, 30), Position: 20 * r.Float64(), Kappa: 1e-6}
		}
		legs = append(legs, leg)
	}
	return newHistory(tb, legs...)
}

// followingRims makes the outer rim follow temperature, half of the time after one
// that is held, or lets it exchange with what does.
func followingRims(r *rand.Rand, p *Problem, h *thermal.History) []Rim {
	value := rimValue(r)
	follows := Rim{Kind: Following, Equilibrium: &value}
	switch r.IntN(3) {
	case 0:
		return []Rim{follows}
	case 1:
		follows.From = h.Life() * r.Float64()
		return []Rim{{Kind: Held, Value: r.Float64()}, follows}
	default:
		exchanges := transferRim(r, p, h)
		exchanges.Equilibrium = &value
		return []Rim{exchanges}
	}
}

// TestJumpsKeepMass: along paths on which temperature jumps, with rims that follow it
// or exchange, in zoned hosts and where D follows the element, all that is missing or
// new came through the rims, nothing falls below zero by more than the stated error,
// and a sealed crystal keeps what it has.
func TestJumpsKeepMass(t *testing.T) {
	const allowed = 1e-12 // of all that was there or came
	for i := range 90 {
		t.Run(fmt.Sprintf("problem=%d", i), func(t *testing.T) {
			r := source(81, i)
			h := jumpingHistory(t, r)
			p := randomProblem(r, h, logUniform(r, 1e-8, 1e3))
			switch i % 3 {
			case 1:
				p = randomCoupled(r, h, logUniform(r, 1e-8, 1e3), 12*r.Float64())
			case 2:
				p.Own = ownOf(r)
			}
			p.Inner, p.Outer = nil, followingRims(r, p, h)
			f := audit(t, newPlan(t, p, Options{Cells: 60}), h)
			if !(f.Stats.MassDrift <= allowed) {
				t.Errorf("drift %.2g, allowed %g", f.Stats.MassDrift, allowed)
			}
			for c, v := range f.Cols[0] {
				if stated := math.Abs(f.StepErr[0][c]) + math.Abs(f.CellErr[0][c]); !(v >= -stated-rounding) {
					t.Fatalf("cell %d is %.3g with a stated error of %.3g", c, v, stated)
				}
			}
			p.Outer = nil
			plan := newPlan(t, p, Options{Cells: 60})
			c := run(t, plan, h).Cols[0]
			if drift := math.Abs(content(plan, c)/content(plan, plan.Start(0)) - 1); !(drift <= allowed) {
				t.Errorf("sealed: drift %.2g, allowed %g", drift, allowed)
			}
			if lowest := slices.Min(c); !(lowest >= -rounding) {
				t.Errorf("sealed: lowest value %.3g", lowest)
			}
		})
	}
}

// TestStatedErrorAlongJumps: rims held or following a temperature that jumps.
func TestStatedErrorAlongJumps(t *testing.T) {
	honestAlong(t, jumpingHistory, 100, 82, func(r *rand.Rand, h *thermal.History, g float64) *Problem {
		p := randomProblem(r, h, g)
		value := rimValue(r)
		follows := Rim{Kind: Following, Equilibrium: &value}
		p.Inner, p.Outer = nil, []Rim{follows}
		if r.IntN(2) == 0 {
			follows.From = h.Life() * r.Float64()
			p.Outer = []Rim{{Kind: Held, Value: r.Float64()}, follows}
		}
		return p
	})
}

// TestStatedErrorOfTransferAlongJumps: rims that exchange with what is constant or
// follows a temperature that jumps.
func TestStatedErrorOfTransferAlongJumps(t *testing.T) {
	honestAlong(t, jumpingHistory, 200, 83, func(r *rand.Rand, h *thermal.History, g float64) *Problem {
		p := randomProblem(r, h, g)
		p.Inner, p.Outer = nil, []Rim{transferRim(r, p, h)}
		if r.IntN(2) == 0 {
			value := rimValue(r)
			p.Outer[0].Equilibrium = &value
		}
		return p
	})
}

// TestStatedErrorInHostsAlongJumps: zoned hosts, sealed, held or following a
// temperature that jumps.
func TestStatedErrorInHostsAlongJumps(t *testing.T) {
	honestAlong(t, jumpingHistory, 200, 85, func(r *rand.Rand, h *thermal.History, g float64) *Problem {
		p := randomCoupled(r, h, g, logUniform(r, 0.1, 12))
		value := rimValue(r)
		p.Inner, p.Outer = nil, [][]Rim{nil, {{Kind: Held, Value: r.Float64()}}, following(value)}[r.IntN(3)]
		return p
	})
}

// TestLagOfExchange compares what the cell at a rim that exchanges is said to lag with a
// run on an even grid against one in much finer cells, in steps so small that
// time has no error.
func TestLagOfExchange(t *testing.T) {
	const cells, steps, finer = 40, 2000, 32
	const tol = 0.01 // of the lag, what the finer cells themselves leave
	h := testSize / cells
	for _, b := range []float64{0.1, 1, 10} {
		for _, gamma := range []float64{0.1, 1, 5} {
			cell := func(n int) float64 {
				p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: testLaw}
				path := holdOf(t, gamma*h*h)
				p.Outer = []Rim{{Kind: Transfer, Value: 1, Rate: rateOf(p, path, b*cells, 0)}}
				plan := newPlan(t, p, Options{Faces: uniform(0, testSize, n*cells), Fractions: equalSteps(steps)})
				sum := 0.0
				for _, c := range run(t, plan, path).Cols[0][n*(cells-1):] {
					sum += c / float64(n)
				}
				return sum
			}
			lags := cell(finer) - cell(1)
			wantNear(t, fmt.Sprintf("lag of b=%g, gamma=%g", b, gamma), exchangeLag(b, gamma), lags, tol*math.Abs(lags))
		}
	}
}
