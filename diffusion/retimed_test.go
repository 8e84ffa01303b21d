package diffusion

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"bankfire/thermal"
)

// retime returns the problem with every time moved, those of both ends alike, and with
// functions of time that are others.
func retime(p *Problem, h *thermal.History, power float64) *Problem {
	later := func(t float64) float64 {
		if t <= 0 {
			return t
		}
		return h.Life() * math.Pow(t/h.Life(), power)
	}
	q := *p
	q.Zones = slices.Clone(p.Zones)
	for i := range q.Zones {
		q.Zones[i].Added = later(q.Zones[i].Added)
	}
	rims := func(list []Rim) []Rim {
		out := slices.Clone(list)
		for i := range out {
			out[i].From = later(out[i].From)
			if g := out[i].Given; g != nil {
				out[i].Given = &Given{At: func(t float64) float64 { return 0.5 * g.At(t/2) }, Jumps: []float64{later(h.Life() / 3)}}
			}
		}
		return out
	}
	q.Inner, q.Outer = rims(p.Inner), rims(p.Outer)
	return &q
}

// TestRetimed: what runs and audits by a plan made for other times give is what they give
// by one compiled for these, to the bit.
func TestRetimed(t *testing.T) {
	r := rand.New(rand.NewPCG(31, 1))
	staging := 0
	for k := range 60 {
		first, second := randomHistory(t, r), randomHistory(t, r)
		var p *Problem
		switch k % 3 {
		case 0:
			p = randomProblem(r, first, 0.01)
		case 1:
			p = staged(r, randomProblem(r, first, 0.01), first)
		default:
			p = staged(r, randomCoupled(r, first, 0.01, 1), first)
		}
		q := retime(p, second, 0.5+2*r.Float64())
		plan := newPlan(t, p, Options{Cells: 60, Growth: 0.3})
		want := newPlan(t, q, Options{Growth: 0.3, Faces: plan.Faces()})
		got, ok := plan.Retimed(q)
		if !ok {
			t.Fatalf("problem %d does not keep its plan", k)
		}
		if len(got.stages) > 1 {
			staging++
		}
		a, b := new(Field), new(Field)
		for _, lnM := range []float64{0, 2} {
			if err := got.Audit(a, Job{newCourse(t, got, second), lnM}); err != nil {
				t.Fatal(err)
			}
			if err := want.Audit(b, Job{newCourse(t, want, second), lnM}); err != nil {
				t.Fatal(err)
			}
			for j := range a.Cols {
				if !slices.Equal(a.Cols[j], b.Cols[j]) || !slices.Equal(a.StepErr[j], b.StepErr[j]) || !slices.Equal(a.CellErr[j], b.CellErr[j]) {
					t.Fatalf("problem %d: column %d differs from that of its own plan", k, j)
				}
			}
		}
		if a := run(t, plan, first); !slices.Equal(a.Cols[0], run(t, newPlan(t, p, Options{Cells: 60, Growth: 0.3}), first).Cols[0]) {
			t.Fatalf("problem %d: the plan itself has changed", k)
		}
	}
	if staging < 20 {
		t.Errorf("zones were added in %d problems only", staging)
	}
}

// TestNotRetimed: problems that need a plan of their own.
func TestNotRetimed(t *testing.T) {
	base := func() *Problem {
		return &Problem{
			Zones: []Zone{{Outer: 1e-5, Start: 1}, {Outer: 2e-5, Start: 2, Added: 10}, {Outer: 3e-5, Start: 3, Added: 20}},
			Law:   testLaw, Outer: []Rim{{Kind: Held, Value: 3}, {Kind: Sealed, From: 30}},
		}
	}
	plan := newPlan(t, base(), Options{})
	if _, ok := plan.Retimed(base()); !ok {
		t.Error("not even the problem itself keeps the plan")
	}
	for name, change := range map[string]func(p *Problem){
		"zones together":   func(p *Problem) { p.Zones[2].Added = 10 },
		"there before":     func(p *Problem) { p.Zones[1].Added = 0 },
		"another value":    func(p *Problem) { p.Outer[0].Value = 4 },
		"another kind":     func(p *Problem) { p.Outer[1].Kind = Held },
		"fewer rims":       func(p *Problem) { p.Outer = p.Outer[:1] },
		"another plateau":  func(p *Problem) { p.Zones[0].Start = 4 },
		"another width":    func(p *Problem) { p.Zones[0].Outer *= 1.1 },
		"another law":      func(p *Problem) { p.Law = NewLaw(1, 1e5) },
		"a face that goes": func(p *Problem) { p.Moves = []Move{{From: 40, Until: 50, Rate: -1e-9}} },
		"a free value":     func(p *Problem) { p.Free = []Basis{{Start: []float64{1, 0, 0}}} },
		"no problem":       func(p *Problem) { p.Zones[2].Added = 5 },
		"another shape":    func(p *Problem) { p.Shape = Ball },
	} {
		q := base()
		change(q)
		if _, ok := plan.Retimed(q); ok {
			t.Errorf("%s: the plan is kept", name)
		}
	}
}
