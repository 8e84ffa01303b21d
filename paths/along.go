package paths

import (
	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// onto returns the profile of an element on another path: the same, in the memory that it
// has, or where that will not do one of its own with a plan as often refined. So it is
// where something of the element is open in the family, which a plan cannot tell of a
// function.
func (p *profile) onto(m *element, path *study.Path) (*profile, error) {
	if m.element.Open == "" {
		if ok, err := p.along(m, path); ok || err != nil {
			return p, err
		}
	}
	own := m.on(path)
	return newProfile(&own, path, p.refined)
}

// along puts the profile of an element on another path, in the memory that it has. Plans
// differ only in the moments of a path, see diffusion.Plan.Retimed; where they differ in
// more it is not ok, and the path wants a profile of its own.
func (p *profile) along(m *element, path *study.Path) (ok bool, err error) {
	problem, _, err := m.crystal.Problem(m.element, path.History)
	if err != nil {
		return false, err
	}
	if p.history, err = m.crystal.Sees(path.History); err != nil {
		return false, err
	}
	p.path = path
	for i, widths := range p.lens.edges.runs() {
		if ok, err = p.runs[i].along(withEdges(problem, widths), p.history); !ok {
			return false, err
		}
	}
	for i := range p.redrawn {
		if problem, _, err = m.hosts[i].Problem(m.element, path.History); err != nil {
			return false, err
		}
		if ok, err = p.redrawn[i].along(withEdges(problem, p.lens.edges.middles()), p.history); !ok {
			return false, err
		}
	}
	return true, nil
}

// along puts the variant on another history.
func (r *variant) along(problem *diffusion.Problem, h *thermal.History) (ok bool, err error) {
	plan, ok := r.plan.Retimed(problem)
	if !ok {
		return false, nil
	}
	r.plan = plan
	return true, plan.Course(&r.course, h, h.Life())
}
