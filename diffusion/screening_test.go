package diffusion

import (
	"math/rand/v2"
	"slices"
	"testing"

	"bankfire/diffusion/yardstick"
	"bankfire/thermal"
)

// screeningSteps is a plan of 26 solves for problems like zonedTrace along paths like those of randomWakes, the same for all
// of them. Its fractions were found by trial on 256 other paths: long steps, then shorter ones towards the end, since the rim
// follows the last cooling, and one damped at the start.
func screeningSteps() Options {
	return Options{Faces: uniform(0, 200e-6, benchCells), Damp: 1, Fractions: []float64{
		0.00618, 0.0505, 0.168, 0.303, 0.447, 0.534, 0.609, 0.702, 0.775, 0.83, 0.881, 0.9127, 0.9355, 0.9551, 0.9686,
		0.97854, 0.98177, 0.98824, 0.99296, 0.99625, 0.99869, 0.99945, 0.99974, 0.9999, 1,
	}}
}

// randomWakes is a path of 1000 to 3000 years in store that is reheated 3 to 12 times, evenly and each time alike, all
// values drawn evenly: store 675 to 705 C, wakes to 750 to 800 C, a ramp of 1 to 8 years, 5 to 30 years there, an e-fold time
// of 5 to 20 years.
func randomWakes(tb testing.TB, r *rand.Rand) *thermal.History {
	tb.Helper()
	const year, zero = thermal.Year, thermal.ZeroCelsius
	even := func(lo, hi float64) float64 { return lo + (hi-lo)*r.Float64() }
	n, life := 3+r.IntN(10), even(1000, 3000)*year
	each, store, peak := life/float64(n+1), even(675, 705)+zero, even(750, 800)+zero
	rise, dwell, efold := even(1, 8)*year, even(5, 30)*year, even(5, 20)*year
	legs := []thermal.Leg{{Kind: thermal.Hold, For: each, T0: store}}
	for range n {
		legs = append(legs, thermal.Leg{Kind: thermal.Ramp, For: rise, T0: store, T1: peak},
			thermal.Leg{Kind: thermal.Hold, For: dwell, T0: peak},
			thermal.Leg{Kind: thermal.Relax, For: each - rise - dwell, T0: peak, T1: store, Tau: efold})
	}
	return newHistory(tb, legs...)
}

// TestScreeningSteps: 26 solves, the same for all, have an error of at most a thousandth of the range of the start on each of
// 128 random paths, against steps of a fifth.
func TestScreeningSteps(t *testing.T) {
	const paths, most, solves = 128, 1e-3, 26
	r := source(91, 0)
	p := zonedTrace(benchWake(t))
	plan := newPlan(t, p, screeningSteps())
	fine := newPlan(t, p, Options{Faces: screeningSteps().Faces, Growth: 0.02})
	errs := make([]float64, paths)
	for i := range errs {
		h := randomWakes(t, r)
		_, diff := farthest(run(t, plan, h).Cols[0], run(t, fine, h).Cols[0])
		errs[i] = diff / rangeOf(fine.Start(0))
	}
	slices.Sort(errs)
	t.Logf("%d solves: error of the range: median %.2g, nine in ten below %.2g, worst %.2g of %d", len(plan.steps),
		errs[paths/2], errs[paths*9/10], errs[paths-1], paths)
	if !(errs[paths-1] <= most) || len(plan.steps) > solves {
		t.Errorf("%d solves have an error of up to %.2g of the range, want at most %d and %g", len(plan.steps), errs[paths-1], solves, most)
	}
}

// BenchmarkCoupledScreening is a path of that family with all it needs, its course and its run beside seven others. It also
// holds that to steps of the reference kernel.
func BenchmarkCoupledScreening(b *testing.B) {
	const abreast = 8
	r := source(91, 1)
	plan := newPlan(b, zonedTrace(benchWake(b)), screeningSteps())
	courses, dst, jobs := make([]Course, abreast), make([]Field, abreast), make([]Job, abreast)
	var histories []*thermal.History
	for k := range jobs {
		histories = append(histories, randomWakes(b, r))
		jobs[k].Course = &courses[k]
	}
	course := func() {
		for k, h := range histories {
			_ = plan.Course(&courses[k], h, h.Life())
		}
	}
	solve := func() { _ = plan.Run(dst, jobs) }
	course()
	if err := plan.Run(dst, jobs); err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		course()
		solve()
	}
	for _, part := range []struct {
		name  string
		do    func()
		limit float64
	}{{"course", course, 11}, {"run", solve, 18}, {"path", func() { course(); solve() }, 27}} {
		took := yardstick.Steps(part.do, part.limit*abreast) / abreast
		b.ReportMetric(took, "reference-steps/"+part.name)
		if !(took <= part.limit) {
			b.Errorf("the %s takes %.1f steps of the reference kernel, limit %g", part.name, took, part.limit)
		}
	}
}
