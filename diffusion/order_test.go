package diffusion

import (
	"math"
	"testing"
)

// cosineG is the integral, in squares of the half thickness, of the checks on
// orders: those of published check I05.
const cosineG = 0.1

// cosine returns a half sheet from its middle to a rim held at 0, of even cells
// and undamped even steps, that starts as height cos(pi x/2a), and the exact means at
// the end (Crank 1975, section 2.3: one term of the series).
func cosine(tb testing.TB, cells, steps int, height float64) (plan *Plan, want []float64) {
	tb.Helper()
	const k = math.Pi / 2 / testSize
	p := &Problem{
		Zones: []Zone{{Outer: testSize}}, Law: testLaw, Outer: []Rim{{Kind: Held}},
		Profile: func(r float64) float64 { return height * math.Cos(k*r) },
	}
	plan = newPlan(tb, p, Options{Faces: uniform(0, testSize, cells), Fractions: equalSteps(steps), Damp: -1})
	want = make([]float64, cells)
	left := height * math.Exp(-math.Pi*math.Pi/4*cosineG)
	for i := range want {
		a, b := plan.Faces()[i], plan.Faces()[i+1]
		want[i] = left * (math.Sin(k*b) - math.Sin(k*a)) / (k * (b - a))
	}
	return plan, want
}
