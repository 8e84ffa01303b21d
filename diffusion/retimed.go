package diffusion

import (
	"slices"
	"sync"
)

// Retimed returns the plan for a problem that differs from its own in times alone: when
// zones were added, from when rims are in force, and what rims do that are given as
// functions of time. All else the two plans share, cells, start and steps, so that a
// plan need be compiled only once for paths with moments of their own; the outcome is
// that of a plan compiled for q on the same faces, to the bit. That Profile, Spread, LnK,
// Host, Own and Form are the same functions is the caller's word. It is not ok where q
// needs a plan of its own: its outer face moves, so that the layers in which it does
// depend on when; or not the same zones come together; or a rim is of another kind or
// value; or q is no problem at all, as Compile would say.
func (p *Plan) Retimed(q *Problem) (plan *Plan, ok bool) {
	own := p.problem
	if len(own.Moves) > 0 || len(q.Moves) > 0 || !own.sameButTimes(q) || q.check() != nil {
		return nil, false
	}
	out := *p
	out.problem = q
	if len(p.stages) > 1 {
		out.stages = slices.Clone(p.stages)
		for s := 1; s < len(out.stages); s++ {
			out.stages[s].from = q.Zones[out.stages[s].zones[0]].Added
		}
	}
	out.events = q.events()
	if p.halved != nil {
		out.halved = sync.OnceValues(func() (*Plan, error) {
			half, err := p.halved()
			if err != nil {
				return nil, err
			}
			halved := *half
			halved.problem, halved.stages, halved.events = q, slices.Clone(half.stages), out.events
			for s := range halved.stages {
				halved.stages[s].from = out.stages[s].from
			}
			return &halved, nil
		})
	}
	return &out, true
}

// sameButTimes reports whether the two differ in times alone, as far as can be seen, and
// the same zones come together.
func (p *Problem) sameButTimes(q *Problem) bool {
	if p.Shape != q.Shape || p.R0 != q.R0 || len(p.Zones) != len(q.Zones) || len(p.Free) != len(q.Free) {
		return false
	}
	for i := range p.Zones {
		a, b := &p.Zones[i], &q.Zones[i]
		if a.Outer != b.Outer || a.Start != b.Start || a.Edge != b.Edge || a.Times != b.Times || a.Host != b.Host || p.comesLater(i) != q.comesLater(i) {
			return false
		}
	}
	for i := range p.Free {
		a, b := &p.Free[i], &q.Free[i]
		if !slices.Equal(a.Start, b.Start) || !slices.Equal(a.Inner, b.Inner) || !slices.Equal(a.Outer, b.Outer) {
			return false
		}
	}
	return slices.Equal(p.Law.Terms, q.Law.Terms) && slices.Equal(p.Law.Where, q.Law.Where) &&
		sameRims(p.Inner, q.Inner) && sameRims(p.Outer, q.Outer)
}

// comesLater reports whether zone i comes after the one inside.
func (p *Problem) comesLater(i int) bool {
	return i > 0 && p.Zones[i].Added > max(p.Zones[i-1].Added, 0)
}

func sameRims(as, bs []Rim) bool {
	return slices.EqualFunc(as, bs, func(a, b Rim) bool {
		same := a.Kind == b.Kind && a.Value == b.Value && a.Rate == b.Rate
		same = same && (a.Given == nil) == (b.Given == nil) && (a.Equilibrium == nil) == (b.Equilibrium == nil)
		return same && (a.Equilibrium == nil || *a.Equilibrium == *b.Equilibrium)
	})
}
