package paths

import (
	"context"
	"fmt"
	"math"
	"slices"

	"bankfire/diffusion"
	"bankfire/paths/least"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
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
	history *thermal.History // what the crystal sees of the path
	free    []study.FreeValue
	runs    []variant // those between which the lens interpolates the widths of edges
	redrawn []variant // one a redrawn host; none where the host is exact
	lens    *lens     // nil without a traverse
	seen    *view     // what columns look like that are fitted again and again; nil is looked at anew
	fit     least.Problem
	grey    bool    // a scale and an offset are two more linear values
	refined int     // how often the plan is finer than the usual one
	size    float64 // of the largest datum, error and all
	points  int     // data that have a say, at the path as it is
	counted int     // values that the points alone decide, at the path as it is
}

// variant is the problem with the start's edges of known widths.
type variant struct {
	plan   *diffusion.Plan
	course diffusion.Course
	fields []diffusion.Field
}

// newProfile compiles the element for the path with a plan that is refined so
// many times: each time twice the cells and half the steps' growth.
func newProfile(m *element, path *study.Path, refined int) (*profile, error) {
	c, e := m.crystal, m.element
	problem, free, err := c.Problem(e, path.History)
	if err != nil {
		return nil, err
	}
	seen, err := c.Sees(path.History)
	if err != nil {
		return nil, err
	}
	p := &profile{crystal: c, element: e, path: path, history: seen, free: free, refined: refined}
	options := diffusion.Options{Finest: math.Ldexp(finest(e.Traverse), max(0, -refined)), Refined: refined}
	if e.Traverse == nil {
		return p, p.addRun(problem, middleWidths(&e.Start), &options)
	}
	if err := p.layEdges(problem, &options); err != nil {
		return nil, err
	}
	if err := p.layRedrawn(m.hosts, &options); err != nil {
		return nil, err
	}
	return p, p.setFit(m)
}

// middleWidths are the widths of the edges to begin with: one for all, or one a
// boundary.
func middleWidths(s *study.Start) []float64 {
	var out []float64
	for _, n := range s.Widths() {
		out = append(out, n.Middle())
	}
	return out
}

// layEdges adds a run for each set of edge widths between which the lens
// interpolates: the one that is known, or as many as it takes to foretell, between
// them, what a start that has not diffused looks like.
func (p *profile) layEdges(problem *diffusion.Problem, options *diffusion.Options) error {
	known := p.element.Start.Widths()
	counts := slices.Repeat([]int{edgeNodes}, len(known))
	for {
		p.runs = p.runs[:0]
		edges := newEdges(known, counts)
		for _, widths := range edges.runs() {
			if err := p.addRun(problem, widths, options); err != nil {
				return err
			}
		}
		var err error
		if p.lens, err = newLens(p.crystal, p.element, p.plan().Faces(), edges); err != nil || len(p.runs) == 1 {
			return err
		}
		more := false
		for _, k := range edges.open() {
			missed, err := p.missedStarts(problem, options, edges.halfways(k))
			if err != nil {
				return err
			}
			if missed > errorAim && counts[k] < mostEdgeNodes {
				counts[k], more = 2*counts[k], true
			}
		}
		if !more {
			return nil
		}
	}
}

// missedStarts returns by how much, in sigma of the data, the start with edges of
// the given widths is missed by interpolation at most, where free values are as
// large as the range of the data.
func (p *profile) missedStarts(problem *diffusion.Problem, options *diffusion.Options, at [][]float64) (float64, error) {
	t := p.element.Traverse
	size := (slices.Max(t.Value) - slices.Min(t.Value)) / slices.Min(t.Sigma)
	worst := 0.0
	for _, widths := range at {
		plan, err := diffusion.Compile(withEdges(problem, widths), *options)
		if err != nil {
			return 0, err
		}
		for j, mixed := range p.mix(p.starts(), widths) {
			amount := size
			if j == 0 {
				amount = 1 / slices.Min(t.Sigma)
			}
			seen, exact := p.lens.through(mixed, 0, 0), p.lens.through(plan.Start(j), 0, 0)
			for i := range seen {
				worst = math.Max(worst, amount*math.Abs(seen[i]-exact[i]))
			}
		}
	}
	return worst, nil
}

// withEdges returns the problem with its edges of the given widths, one for all or one
// a boundary.
func withEdges(problem *diffusion.Problem, widths []float64) *diffusion.Problem {
	this := *problem
	this.Zones = slices.Clone(problem.Zones)
	for i := range len(this.Zones) - 1 {
		this.Zones[i].Edge = widths[min(i, len(widths)-1)]
	}
	return &this
}

// addRun adds the problem with its edges of the given widths. All runs share
// the faces of the first, which are left in the options.
func (p *profile) addRun(problem *diffusion.Problem, widths []float64, options *diffusion.Options) error {
	plan, err := diffusion.Compile(withEdges(problem, widths), *options)
	if err != nil {
		return err
	}
	options.Faces = plan.Faces()
	p.runs = append(p.runs, variant{plan: plan, fields: make([]diffusion.Field, batch)})
	r := &p.runs[len(p.runs)-1]
	return plan.Course(&r.course, p.history, p.history.Life())
}

func (p *profile) plan() *diffusion.Plan { return p.runs[0].plan }

// A value without a prior is given one that is too wide to matter where the
// data see the value: about the mean of the data, wide times their largest.
// Without it a plateau that has all but diffused away would be fitted at 1e10
// times anything measured, and the round-off of the solver be taken for its
// profile. A value whose error comes out above unseen times the largest is one
// that the data do not see.
const (
	wide   = 100
	unseen = 10
)

// setFit says what is to be fitted to what.
func (p *profile) setFit(m *element) error {
	t := p.element.Traverse
	p.fit = least.Problem{Obs: t.Value, Sigma: widened(t, m.scatter), Limit: t.Limit, White: m.white, Bent: p.lens.bent()}
	p.grey = t.Grey
	var mean float64
	mean, p.size = meanAndSize(t)
	for _, v := range p.free {
		prior := least.Prior{Mean: mean, Sigma: wide * p.size}
		if v.HasPrior { // counted from its base, the middle of its prior
			if t.Grey {
				return p.element.Place.Error("", "relative values have no unit, so a plateau known with an error cannot be tied to them",
					`make the plateau "free", or give it without an error`)
			}
			prior = least.Prior{Sigma: v.Prior.Sigma}
		}
		p.fit.Linear = append(p.fit.Linear, prior)
	}
	if p.grey {
		p.fit.Linear = append(p.fit.Linear, least.None, least.None)
	}
	if n := p.open(); len(t.Value) <= n {
		return tooFewPoints(p.element, len(t.Value), n)
	}
	return nil
}

// meanAndSize returns the mean of the data and the largest of them, errors and
// all.
func meanAndSize(t *traverse.Traverse) (mean, size float64) {
	for i, v := range t.Value {
		mean += v / float64(len(t.Value))
		size = math.Max(size, math.Abs(v)+t.Sigma[i])
	}
	return mean, size
}

// open counts the linear values without a prior of the study's.
func (p *profile) open() int {
	n := len(p.fit.Linear) - len(p.free)
	for _, v := range p.free {
		if !v.HasPrior {
			n++
		}
	}
	return n
}

// spent returns how many degrees of freedom the linear values without a prior
// of the study's take: each the part of the variance of its wide prior that the
// data have taken away, rounded in all. One that is held at zero takes none.
func (p *profile) spent(at least.Solution) int {
	sum := 0.0
	for j, prior := range p.fit.Linear {
		switch {
		case j < len(p.free) && (p.free[j].HasPrior || p.isPinned(at, j)):
		case math.IsInf(prior.Sigma, 1):
			sum++
		default:
			part := at.Sigma[j] / prior.Sigma
			sum += 1 - part*part
		}
	}
	return int(math.Round(sum))
}

// telling counts the data that have a say. Of a limit with z = (limit - model)/sigma
// it counts
//
//	-2 ln Phi(z) + z phi(z)/Phi(z),
//
// Phi the normal distribution and phi its density, which goes from 0 where the
// model keeps clear of the limit to 1.4 where it meets it. With that,
// chi-square less the count is, on average over what a true model leaves above
// and below its limit, the 0 that it is for other data: of a value below the
// limit the mean of its square is 1 - z phi/Phi. A limit that the model exceeds
// by more than a true one does counts as at farOver.
func telling(p *least.Problem, at least.Solution) int {
	sum := 0.0
	for i, y := range at.Model {
		if p.Limit == nil || !p.Limit[i] {
			sum++
			continue
		}
		z := math.Max((p.Obs[i]-y)/p.Sigma[i], farOver)
		lnPhi, hazard := least.Normal(z)
		sum += -2*lnPhi + z*hazard
	}
	return int(math.Round(sum))
}

const farOver = -3

// widened returns the data's standard deviations with scatter added.
func widened(t *traverse.Traverse, scatter float64) []float64 {
	sigma := slices.Clone(t.Sigma)
	for i, s := range sigma {
		sigma[i] = math.Hypot(s, scatter)
	}
	return sigma
}

func tooFewPoints(e *study.Element, points, free int) error {
	return e.Place.Error(fmt.Sprint(points), fmt.Sprintf("points for %d free values leave nothing to judge by", free),
		"measure more points, or state plateaux that other analyses know")
}

// finest returns the smallest length that the traverse can see, m; 0 where
// nothing was measured.
func finest(t *traverse.Traverse) float64 {
	switch {
	case t == nil || len(t.Position) < 2 && t.Spot.Kind == traverse.Point:
		return 0
	case t.Spot.Kind != traverse.Point:
		return t.Spot.Sigma()
	}
	return leastSpacingOf(t.Position) * pointFinest
}

// solveFor runs the path for each of the multipliers and fits the data, until
// ctx is done.
func (p *profile) solveFor(ctx context.Context, lnM []float64) ([]least.Solution, error) {
	out := make([]least.Solution, 0, len(lnM))
	jobs := make([]diffusion.Job, batch)
	for from := 0; from < len(lnM); from += batch {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		part := lnM[from:min(from+batch, len(lnM))]
		for _, runs := range [][]variant{p.runs, p.redrawn} {
			for i := range runs {
				if err := runs[i].at(part, jobs); err != nil {
					return nil, err
				}
			}
		}
		for k := range part {
			out = append(out, p.fitRun(k, nil))
		}
	}
	return out, nil
}

// at runs the variant for up to a batch of multipliers; jobs is scratch.
func (r *variant) at(lnM []float64, jobs []diffusion.Job) error {
	for k, x := range lnM {
		jobs[k] = diffusion.Job{Course: &r.course, LnM: x}
	}
	return r.plan.Run(r.fields[:len(lnM)], jobs[:len(lnM)])
}

// sampler returns chi-square at multipliers on D until ctx is done.
func (p *profile) sampler(ctx context.Context) sampler {
	return func(lnM []float64) ([]float64, error) {
		solutions, err := p.solveFor(ctx, lnM)
		values := make([]float64, len(solutions))
		for i, s := range solutions {
			values[i] = s.ChiSq
		}
		return values, err
	}
}

// columns returns the columns of the runs' fields k.
func (p *profile) columns(k int) [][][]float64 { return columnsOf(p.runs, k) }

func columnsOf(runs []variant, k int) [][][]float64 {
	cols := make([][][]float64, len(runs))
	for i := range runs {
		cols[i] = runs[i].fields[k].Cols
	}
	return cols
}

// starts returns the columns before diffusion.
func (p *profile) starts() [][][]float64 { return p.startsOf(p.runs) }

func (p *profile) startsOf(runs []variant) [][][]float64 {
	cols := make([][][]float64, len(runs))
	for i := range runs {
		for j := range 1 + len(p.free) {
			cols[i] = append(cols[i], runs[i].plan.Start(j))
		}
	}
	return cols
}

// fitAbout fits the values that are open to the data, for columns of cell means. A
// concentration that would come out negative is held at zero, the most negative
// one first. To relative data the fit is
//
//	value = offset + scale base + sum of x column,
//
// each x being scale times the concentration that it stands for, or what that is
// above the free value of about, in the element's unit. The spreads are profiles of
// cell means that are added with factors of standard deviation 1, the last of the
// linear values.
func (p *profile) fitAbout(cols [][][]float64, spreads [][]float64, about []float64) least.Solution {
	problem := p.fit
	if len(spreads) > 0 {
		cols = slices.Clone(cols)
		for i := range cols {
			cols[i] = slices.Concat(cols[i], spreads)
		}
		problem.Linear = slices.Concat(problem.Linear, slices.Repeat([]least.Prior{{Sigma: 1}}, len(spreads)))
	}
	v := p.seen
	if v == nil || len(spreads) > 0 {
		v = p.lens.look(cols)
	}
	n := 1 + len(p.free)
	model := func(dst [][]float64, bent []float64) {
		v.columns(append(dst[:n:n], dst[len(dst)-len(spreads):]...), bent)
		if p.grey {
			p.relative(dst, about)
		}
	}
	at := problem.Solve(model)
	for range p.free {
		j := p.mostNegative(at)
		if j < 0 {
			break
		}
		problem.Linear = slices.Clone(problem.Linear)
		problem.Linear[j] = least.Prior{Sigma: pinned * p.size}
		at = problem.Solve(model)
	}
	return at
}

// relative turns the columns of an element into those of relative data: of the
// scale, the base with the given amounts of the free columns, and of the offset.
func (p *profile) relative(dst [][]float64, about []float64) {
	n := 1 + len(p.free)
	copy(dst[n], dst[0])
	clear(dst[0])
	for i := range dst[n+1] {
		dst[n+1][i] = 1
	}
	for j, x := range about {
		for i, c := range dst[1+j] {
			dst[n][i] += x * c
		}
	}
}

// pinned is the standard deviation, as a part of the largest datum, with which
// a concentration is held at zero.
const pinned = 1e-9

// mostNegative returns the free concentration that is furthest below zero; -1
// if none is. Relative values may be negative.
func (p *profile) mostNegative(at least.Solution) int {
	worst, value := -1, 0.0
	for j, v := range p.free {
		if !v.HasPrior && !p.element.Traverse.Grey && at.Linear[j] < value && !p.isPinned(at, j) {
			worst, value = j, at.Linear[j]
		}
	}
	return worst
}

// isPinned reports whether free value j was held at zero.
func (p *profile) isPinned(at least.Solution, j int) bool { return at.Sigma[j] <= 2*pinned*p.size }

// curve scans the profile's chi-square over the multipliers.
func (p *profile) curve(ctx context.Context) (Curve, error) {
	chiSq := p.sampler(ctx)
	c, err := scan(p.points, p.counted, chiSq)
	if err != nil {
		return c, err
	}
	c.Still = p.fitStart().ChiSq
	c.Full, err = p.full(chiSq)
	return c, err
}

// equilibrated is the diffusion integral, in squares of the crystal's size, by
// which nothing of the start's shape is left.
const equilibrated = 1e3

// full returns chi-square after diffusion without end.
func (p *profile) full(chiSq sampler) (float64, error) {
	lnG := p.runs[0].course.LnGLast()
	if math.IsInf(lnG, -1) {
		return p.fitStart().ChiSq, nil
	}
	size := p.crystal.Size() - p.crystal.R0
	slowest, _ := p.crystal.Factors(p.element)
	values, err := chiSq([]float64{math.Log(equilibrated*size*size/slowest) - lnG})
	if err != nil {
		return 0, err
	}
	return values[0], nil
}

// amounts are the values that make one profile of the columns, as the traverse
// measures it,
//
//	profile = offset + scale answer + sum of value x derivative;
//
// offset 0 and scale 1 but for relative data.
type amounts struct {
	offset, scale float64
	values        []float64
}

func (p *profile) amounts(at least.Solution) amounts {
	k := len(p.free)
	if p.grey {
		return amounts{at.Linear[k+1], at.Linear[k], slices.Clone(at.Linear[:k])}
	}
	return amounts{0, 1, at.Linear[:k]}
}

// stated returns the amounts that make the profile in the element's unit, not in
// that of relative data. All free values are 0 where no scale was found.
func (a amounts) stated() amounts {
	out := amounts{scale: 1, values: make([]float64, len(a.values))}
	for j, x := range a.values {
		if a.scale != 0 {
			out.values[j] = x / a.scale
		}
	}
	return out
}

// of returns the profile that the amounts make of the columns.
func (a amounts) of(cols [][]float64) []float64 {
	dst := make([]float64, len(cols[0]))
	for i, v := range cols[0] {
		dst[i] = a.offset + a.scale*v
	}
	for j, x := range a.values {
		for i := range dst {
			dst[i] += x * cols[1+j][i]
		}
	}
	return dst
}

// mix returns the columns at some widths of the edges, from those of the runs.
func (p *profile) mix(cols [][][]float64, widths []float64) [][]float64 {
	if len(cols) == 1 {
		return cols[0]
	}
	weights := p.lens.edges.weights(widths)
	out := make([][]float64, len(cols[0]))
	for j := range out {
		out[j] = make([]float64, len(cols[0][j]))
		for a, w := range weights {
			for i, v := range cols[a][j] {
				out[j][i] += w * v
			}
		}
	}
	return out
}

// audit runs the path with a multiplier on D and measures the error of every
// column, but for those of redrawn hosts.
func (p *profile) audit(lnM float64) error {
	for i := range p.runs {
		r := &p.runs[i]
		if err := r.plan.Audit(&r.fields[0], diffusion.Job{Course: &r.course, LnM: lnM}); err != nil {
			return err
		}
	}
	jobs := make([]diffusion.Job, 1)
	for i := range p.redrawn {
		if err := p.redrawn[i].at([]float64{lnM}, jobs); err != nil {
			return err
		}
	}
	return nil
}

// errors returns the audited errors, by steps and by cells, of the profile that
// the amounts make at some widths of the edges.
func (p *profile) errors(widths []float64, a amounts) (steps, cells []float64) {
	var s, c [][][]float64
	for i := range p.runs {
		s = append(s, p.runs[i].fields[0].StepErr)
		c = append(c, p.runs[i].fields[0].CellErr)
	}
	a.offset = 0
	return a.of(p.mix(s, widths)), a.of(p.mix(c, widths))
}

// numErr returns the largest estimated numerical error of the fitted model at
// the data points, in units of their sigma. The path must have been audited.
func (p *profile) numErr(at least.Solution) float64 {
	widths, tilt, origin := p.lens.values(at.Bent)
	steps, cells := p.errors(widths, p.amounts(at))
	steps, cells = p.lens.through(steps, tilt, origin), p.lens.through(cells, tilt, origin)
	worst := 0.0
	for i, s := range p.fit.Sigma {
		worst = math.Max(worst, (math.Abs(steps[i])+math.Abs(cells[i]))/s)
	}
	return worst
}

// belowZero returns by how much the lowest concentration at the end of the
// audited path is below zero, beyond its estimated numerical error and round-off.
// Relative values may be negative.
func (p *profile) belowZero(widths []float64, a amounts) float64 {
	if p.grey {
		return 0
	}
	steps, cells := p.errors(widths, a)
	worst := 0.0
	for i, c := range a.of(p.mix(p.columns(0), widths)) {
		allowed := math.Abs(steps[i]) + math.Abs(cells[i]) + 10*pinned*p.size
		worst = math.Max(worst, -c-allowed)
	}
	return worst
}
