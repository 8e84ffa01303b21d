package diffusion

import (
	"math"
	"math/rand/v2"
	"testing"
)

// cubics returns a natural cubic spline through values at even knots from 0 on, its
// second derivatives by relaxation: a host as it is smoothed, whose third derivative
// jumps at every knot, wherever the cells are.
func cubics(spacing float64, value []float64) func(r float64) float64 {
	const sweeps = 60 // each leaves a quarter of what is wrong
	bend := make([]float64, len(value))
	for range sweeps {
		for i := 1; i < len(value)-1; i++ {
			bend[i] = (6*(value[i-1]-2*value[i]+value[i+1])/(spacing*spacing) - bend[i-1] - bend[i+1]) / 4
		}
	}
	return func(r float64) float64 {
		i := min(max(int(r/spacing), 0), len(value)-2)
		b := min(max(r/spacing-float64(i), 0), 1)
		a := 1 - b
		return a*value[i] + b*value[i+1] - spacing*spacing/6*a*b*((1+a)*bend[i]+(1+b)*bend[i+1])
	}
}

// splined is a crystal of two zones whose host is a spline through 20 to 80 values, more
// or less rough, with a start of 500 in both.
func splined(r *rand.Rand) *Problem {
	p := &Problem{Shape: Shape(r.IntN(3)), Zones: []Zone{{Outer: testSize * (0.2 + 0.6*r.Float64()), Start: 500}, {Outer: testSize, Start: 500}}}
	value := make([]float64, 20+r.IntN(60))
	waves, phase, rough := 3*r.Float64(), 2*math.Pi*r.Float64(), logUniform(r, 1e-6, 3e-4)
	if p.Shape != Slab {
		phase = 0 // level at the centre
	}
	for k := range value {
		value[k] = 0.45 + 0.15*math.Cos(phase+2*math.Pi*waves*float64(k)/float64(len(value)-1)) + rough*r.NormFloat64()
	}
	p.Host, p.LnK = cubics(testSize/float64(len(value)-1), value), drift(-26700)
	return p
}

// TestRestInSmoothHost: a start proportional to K all through a smooth host stays at
// rest at its temperature, to round-off, under each kind of rim that is at rest too.
func TestRestInSmoothHost(t *testing.T) {
	const allowed = 1e-13 // of each value: some hundred roundings of 1e-16, most of which cancel
	worst := 0.0
	for i := range 100 {
		r := source(51, i)
		p := splined(r)
		k := func(at float64) float64 {
			return math.Exp(p.LnK(p.Host(at), coupledHold) - p.LnK(0.45, coupledHold))
		}
		p.Zones[0].Form, p.Zones[1].Form = k, k
		h := atHold(t, p, logUniform(r, 1e-8, 1e2))
		switch r.IntN(3) {
		case 1:
			p.Outer = []Rim{{Kind: Held, Value: 500 * k(testSize)}}
		case 2:
			p.Outer = following(Arrhenius{LnA: math.Log(500*k(testSize)) + 5e3/coupledHold, E: 5e3})
		}
		plan := newPlan(t, p, Options{})
		for c, v := range run(t, plan, h).Cols[0] {
			off := math.Abs(v/plan.Start(0)[c] - 1)
			if !(off <= allowed) {
				t.Fatalf("problem %d, %v: cell %d drifts by %.2g of itself, allowed %g", i, p.Shape, c, off, allowed)
			}
			worst = math.Max(worst, off)
		}
	}
	t.Logf("at most %.2g off", worst)
}
