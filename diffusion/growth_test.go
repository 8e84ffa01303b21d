package diffusion

import (
	"fmt"
	"math"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/published"
)

// facing is a half space whose face moves at a rate v of so many D per unit of length
// along a hold with an integral of a quarter of that squared, kept at 1 outside and at
// 0 before: a slab of ten units in the end.
func facing(tb testing.TB, v float64) (p *Problem, h *thermal.History, unit float64) {
	unit = testSize / 10
	h = holdOf(tb, unit*unit/4)
	rate := v / unit * math.Exp(testLaw.LnD(testTemp))
	return &Problem{
		Law: testLaw, Zones: []Zone{{Outer: testSize}}, Outer: heldAt(1), Moves: []Move{{From: 0, Until: h.Life(), Rate: rate}},
	}, h, unit
}

// N01: Ogata and Banks 1961, in the frame of the face.
func movingFace(t *testing.T, c *published.Check) {
	worst := 0.0
	for _, r := range c.Rows {
		in := numbers(t, r)
		p, h, unit := facing(t, in[2])
		s := solve(t, p, Options{}, h)
		got := s.at(s.plan.Faces()[len(s.c)] - in[0]*unit)
		c.Program(t, r.Row, got, c.Solver(r.Row))
		worst = math.Max(worst, math.Abs(got-r.Expected))
	}
	t.Logf("at most %.2g off", worst)
}

// TestLayersConverge: with a layer put down when the face begins it growth is right to
// first order in the thickness of layers, as zones that are added in stages are; in the
// middle of that to order 3/2, since what is laid down beside a held rim is level.
func TestLayersConverge(t *testing.T) {
	const within = 0.15
	for _, test := range []struct {
		name  string
		solve func(tb testing.TB, v float64, n int) solution
		order float64
	}{
		{"when it begins", inStages, 1},
		{"in the middle", inLayers, 1.5},
	} {
		t.Run(test.name, func(t *testing.T) {
			const v, xi = 2.0, 0.5
			var errs []float64
			for n := 10; n <= 40; n *= 2 {
				got := test.solve(t, v, n)
				errs = append(errs, math.Abs(got.at(testSize-xi*testSize/10)-facedAt(xi, v)))
			}
			text, last, _ := ordersOf(errs)
			if t.Log(text); !(math.Abs(last-test.order) <= within) {
				t.Errorf("order %.2f, want %g within %g", last, test.order, within)
			}
		})
	}
}

// facedAt is the solution of check N01 at D t = 0.25 (Ogata and Banks 1961).
func facedAt(xi, v float64) float64 {
	const dt = 0.25
	root := 2 * math.Sqrt(dt)
	return (math.Erfc((xi-v*dt)/root) + math.Exp(v*xi)*math.Erfc((xi+v*dt)/root)) / 2
}

// inLayers grows in n layers.
func inLayers(tb testing.TB, v float64, n int) solution {
	p, h, _ := facing(tb, v)
	p.layered = n
	return solve(tb, p, evenLayers(p), h)
}

// inStages grows in n zones, each added when the face begins it.
func inStages(tb testing.TB, v float64, n int) solution {
	p, h, unit := facing(tb, v)
	p.layered = n
	o := evenLayers(p)
	p.Moves, p.layered = nil, 0
	before := testSize - v*unit/4
	p.Zones[0].Outer = before
	for i := range n {
		// the same numbers as those of layers
		p.Zones = append(p.Zones, Zone{Start: 1, Outer: before + (testSize-before)*float64(i+1)/float64(n), Added: h.Life() * float64(i) / float64(n)})
	}
	p.Zones[n].Outer = testSize
	return solve(tb, p, o, h)
}

// evenLayers is a plan of six cells a layer and as wide ones elsewhere.
func evenLayers(p *Problem) Options {
	const cells = 6
	bounds := p.layers()
	width := (bounds[1] - bounds[0]) / cells
	before := bounds[0]
	faces := uniform(0, before, int(math.Round(before/width)))
	for i := 1; i < len(bounds); i++ {
		faces = append(faces, uniform(bounds[i-1], bounds[i], cells)[1:]...)
	}
	return Options{Faces: faces}
}

// TestStatedErrorOfMoves: the stated error covers the true one of check N01.
func TestStatedErrorOfMoves(t *testing.T) {
	const tooLarge = 20
	for _, v := range []float64{2, 10, -1} {
		p, h, unit := facing(t, v)
		p.layered = 40
		plan := newPlan(t, p, Options{})
		f := audit(t, plan, h)
		want := make([]float64, len(plan.Centres()))
		addProfile(want, Slab, &grid{faces: plan.Faces()}, func(r float64) float64 { return facedAt((testSize-r)/unit, v) })
		stated := 0.0
		for i := range want {
			stated = math.Max(stated, math.Abs(f.StepErr[0][i])+math.Abs(f.CellErr[0][i]))
		}
		_, miss := farthest(f.Cols[0], want)
		t.Logf("V/D = %g: stated %.2g, true %.2g", v, stated, miss)
		if !(stated >= miss && stated < tooLarge*miss) {
			t.Errorf("V/D = %g: stated %.2g, true %.2g", v, stated, miss)
		}
	}
}

// TestMovesBalance: the mass of crystals that grow, shrink, exchange and have zones
// added.
func TestMovesBalance(t *testing.T) {
	for i := range 60 {
		r := source(301, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-6, 1e2))
		switch i % 3 {
		case 1:
			p.Own = ownOf(r)
		case 2:
			p = randomCoupled(r, h, logUniform(r, 1e-6, 1e2), 2)
			p.Free = nil
		}
		if i%4 == 0 {
			p.Outer = []Rim{{Kind: Transfer, Value: r.Float64(), Rate: rateOf(p, h, logUniform(r, 0.1, 10), 2e4)}}
		}
		n := len(p.Zones)
		width := p.size() - p.R0
		if n > 1 {
			width = p.size() - p.Zones[n-2].Outer
			p.Zones[n-1].Added = 0.1 * h.Life()
		}
		p.layered = 20
		p.Moves = []Move{
			{From: 0.2 * h.Life(), Until: 0.5 * h.Life(), Rate: width / h.Life() * (2*r.Float64() - 0.5)},
			{From: 0.5 * h.Life(), Until: 0.9 * h.Life(), Rate: -width / h.Life() * r.Float64()},
		}
		plan := newPlan(t, p, Options{Cells: 60})
		course := newCourse(t, plan, h)
		dst := make([]Field, 3)
		jobs := []Job{{Course: course}, {Course: course, LnM: 1}, {Course: course, LnM: -2}}
		if err := plan.Run(dst, jobs); err != nil {
			t.Fatal(err)
		}
		for k := range dst {
			if f := &dst[k]; !(f.Stats.MassDrift <= 1e-12) {
				t.Errorf("problem %d: drift %.2g of all that was there or came", i, f.Stats.MassDrift)
			}
			wantSame(t, fmt.Sprintf("problem %d, job %d", i, k), &dst[k], runJob(t, plan, jobs[k]))
		}
		if got := len(dst[0].Cols[0]); got != len(plan.Centres()) {
			t.Errorf("%d cells, want %d", got, len(plan.Centres()))
		}
	}
}
