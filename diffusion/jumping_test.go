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
