package paths

import (
	"context"
	"fmt"
	"slices"

	"bankfire/paths/study"
)

// run judges members of which at least one element must be run, at most stepChunk.
func (e *engine) run(ctx context.Context, d *desk, members []member) error {
	for i := range members {
		if err := ctx.Err(); err != nil {
			return err
		}
		c, m := &d.candidates[i], &members[i]
		if !e.draw(c, m) {
			continue
		}
		path := c.Path()
		lnG := e.integrals(d, c)
		cs, err := e.curves(ctx, &path, lnG)
		if err != nil {
			return err
		}
		f := jointly(cs, alone(cs, e.study.Confidence), e.study.Confidence)
		e.found(m, &f, c, lnG)
	}
	return nil
}

// curves are those of a member's profiles, from the tables or by running it.
func (e *engine) curves(ctx context.Context, path *study.Path, lnG []float64) ([]Curve, error) {
	var p weighedPath
	if !slices.ContainsFunc(e.tables, func(t *gTable) bool { return t != nil }) {
		if err := e.solve(ctx, &p, path); err != nil {
			return nil, fmt.Errorf("%q%w", path.Name, err)
		}
		cs, _ := e.judged(&p)
		return cs, nil
	}
	var cs []Curve
	var each []sampler
	for n, of := range e.elements {
		if t := e.tables[n]; t != nil {
			cs, each = append(cs, t.on(lnG[n])), append(each, t.sampler(lnG[n]))
			continue
		}
		if err := p.add(ctx, of.on(path), path, e.laws); err != nil {
			return nil, fmt.Errorf("%q, %s in %s: %w", path.Name, of.element.Name, of.crystal.Name, err)
		}
		last := len(p.profiles) - 1
		cs, each = append(cs, p.curves[last]), append(each, p.profiles[last].sampler(ctx))
	}
	if err := sharpen(cs, each); err != nil {
		return nil, fmt.Errorf("%q: %w", path.Name, err)
	}
	return cs, nil
}
