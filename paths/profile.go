package paths

import (
	"context"
	"fmt"
	"math"
	"slices"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
)

// The plan of a profile. Its error is measured for the path as it is and at its
// shift factor; above errorAim of the data's sigma the plan is refined, at most
// mostRefined times.
const (
	errorAim    = 0.1
	mostRefined = 2
	pointFinest = 0.5 // of the smallest spacing: what matters where there is no spot
	batch       = 8   // multipliers that go side by side
)

// profile is one element of one crystal on one path, ready to run.
type profile struct {
	crystal *study.Crystal
	element *study.Element
	path    *study.Path
	free    []study.FreeValue
	refined int // how often the plan is finer than the usual one
	plan    *diffusion.Plan
	course  diffusion.Course
	weights *traverse.Weights // nil without a traverse
	fit     fit
	spent   int // degrees of freedom that the free values take on the path as it is
	fields  []diffusion.Field
	seen    [][]float64 // the columns after the spot
}

// newProfile compiles the element for the path with a plan that is refined so
// many times: each time twice the cells and half the steps' growth.
func newProfile(c *study.Crystal, e *study.Element, path *study.Path, refined int) (*profile, error) {
	problem, free, err := c.Problem(e, path.History)
	if err != nil {
		return nil, err
	}
	options := diffusion.Options{Finest: finest(e.Traverse)}
	if refined > 0 {
		options.Cells, options.Growth = usualCells<<refined, usualGrowth/float64(int(1)<<refined)
	}
	plan, err := diffusion.Compile(problem, options)
	if err != nil {
		return nil, err
	}
	p := &profile{crystal: c, element: e, path: path, free: free, refined: refined, plan: plan, fields: make([]diffusion.Field, batch)}
	if err := plan.Course(&p.course, path.History, path.History.Life()); err != nil {
		return nil, err
	}
	if t := e.Traverse; t != nil {
		if p.weights, err = t.Weights(plan.Faces(), c.Mirrored(e)); err != nil {
			return nil, err
		}
		p.fit = newFit(t.Value, t.Sigma, free)
		p.seen = make([][]float64, 1+len(free))
		for j := range p.seen {
			p.seen[j] = make([]float64, len(t.Value))
		}
		if len(t.Value) <= p.fit.unconstrained() {
			return nil, tooFewPoints(e, len(t.Value), p.fit.unconstrained())
		}
	}
	return p, nil
}

// usualCells and usualGrowth are the solver's own choice, from which a refined
// plan starts.
const (
	usualCells  = 200
	usualGrowth = 0.1
)

// finest returns the smallest length that the traverse can see, m; 0 where
// nothing was measured.
func finest(t *traverse.Traverse) float64 {
	if t == nil {
		return 0
	}
	if t.Spot.Kind != traverse.Point {
		return t.Spot.Sigma()
	}
	least := math.Inf(1)
	for i := 1; i < len(t.Position); i++ {
		least = math.Min(least, math.Abs(t.Position[i]-t.Position[i-1]))
	}
	if math.IsInf(least, 1) {
		return 0
	}
	return least * pointFinest
}

// sampler returns chi-square at multipliers on D until ctx is done.
func (p *profile) sampler(ctx context.Context) sampler {
	return func(lnM []float64) ([]float64, error) {
		out := make([]float64, 0, len(lnM))
		jobs := make([]diffusion.Job, 0, batch)
		for from := 0; from < len(lnM); from += batch {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			part := lnM[from:min(from+batch, len(lnM))]
			jobs = jobs[:0]
			for _, x := range part {
				jobs = append(jobs, diffusion.Job{Course: &p.course, LnM: x})
			}
			if err := p.plan.Run(p.fields[:len(part)], jobs); err != nil {
				return nil, err
			}
			for k := range part {
				out = append(out, p.fitTo(p.fields[k].Cols).chiSq)
			}
		}
		return out, nil
	}
}

// fitTo fits the free values to the data for the given columns of cell means.
func (p *profile) fitTo(cols [][]float64) fitted {
	for j, c := range cols {
		p.weights.Apply(p.seen[j], c)
	}
	return p.fit.solve(p.seen)
}

// combined returns the answer column plus the free values times theirs.
func combined(cols [][]float64, values []float64) []float64 {
	dst := slices.Clone(cols[0])
	for j, x := range values {
		for i := range dst {
			dst[i] += x * cols[1+j][i]
		}
	}
	return dst
}

// numErr returns the largest estimated numerical error of the fitted model at
// the data points, in units of their sigma. The field must have been audited.
func (p *profile) numErr(f *diffusion.Field, values []float64) float64 {
	steps, space := make([]float64, len(p.fit.obs)), make([]float64, len(p.fit.obs))
	p.weights.Apply(steps, combined(f.StepErr, values))
	p.weights.Apply(space, combined(f.CellErr, values))
	worst := 0.0
	for i, s := range p.fit.sigma {
		worst = math.Max(worst, (math.Abs(steps[i])+math.Abs(space[i]))/s)
	}
	return worst
}

func tooFewPoints(e *study.Element, points, free int) error {
	return e.Place.Error(fmt.Sprint(points), fmt.Sprintf("points for %d free values leave nothing to judge by", free),
		"measure more points, or state plateaux that other analyses know")
}
