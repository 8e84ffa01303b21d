package paths

import (
	"context"
	"fmt"
	"math"

	"bankfire/paths/study"
)

// run judges members of which at least one element must be run, at most stepChunk.
func (e *engine) run(ctx context.Context, d *desk, members []member) error {
	r, err := d.runner(e)
	if err != nil {
		return err
	}
	for i := range members {
		if err := ctx.Err(); err != nil {
			return err
		}
		c, m := &d.candidates[i], &members[i]
		if !e.draw(c, m) {
			continue
		}
		path := c.Path()
		d.lnG = e.integrals(d.lnG[:0], c)
		var f Finding
		if r == nil {
			f, m.numErr, err = e.weighed(ctx, &path)
		} else {
			f, m.numErr, err = r.judge(ctx, &path, m.Index, d.lnG, e.keep.verdict)
		}
		if err != nil {
			return err
		}
		e.found(m, &f, c, d.lnG)
	}
	return nil
}

// runner is the desk's runner for the family; nil where its members are weighed like
// paths.
func (d *desk) runner(e *engine) (*runner, error) {
	if e.stepping == nil {
		return nil, nil
	}
	if d.runs != nil && d.runs.stepping == e.stepping {
		return d.runs, nil
	}
	var err error
	d.runs, err = e.stepping.newRunner()
	return d.runs, err
}

// weighed judges a member like a path that is written out. numErr is its largest
// numerical error, in sigma.
func (e *engine) weighed(ctx context.Context, path *study.Path) (f Finding, numErr float64, err error) {
	var p weighedPath
	if err := e.solve(ctx, &p, path); err != nil {
		return f, math.NaN(), fmt.Errorf("%q%w", path.Name, err)
	}
	for i := range p.results {
		numErr = math.Max(numErr, p.results[i].NumErr)
	}
	cs, _ := e.judged(&p)
	return jointly(cs, alone(cs, e.study.Confidence), e.study.Confidence), numErr, nil
}
