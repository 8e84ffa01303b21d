package paths

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"bankfire/paths/study"
)

// stepping is how members of a family are judged of whom an element, or several, must
// be run in steps. It is found before the screening, on a few members that are the same
// however the screening is divided, so that no row depends on that:
//
//   - each of them is weighed like a path that is written out, its numerical errors
//     audited and its plan refined above errorAim. The finest of these plans is the
//     exact one of the family;
//   - each is run with coarser plans too. The coarsest whose audited error is below
//     errorAim and whose chi-square is close to the exact is that of the family.
//
// All members get a glance, see there, with the family's plan, and the interval of their
// shift factor if their row is kept. Where that leaves the verdict in doubt they get
// another with the exact plan, and if that does too they are scanned in full. The errors
// of every auditEvery-th member are audited while it is screened, and change nothing any
// more.
type stepping struct {
	*weighing
	tables  []*gTable // one an element; nil if it is run
	first   *study.Path
	refined []int             // of each element, how often the exact plan is refined
	coarse  int               // how often that of the family is, if not finer than that
	glances bool              // false: all get the exact plan
	slack   slack             // of a glance
	audited map[int64]float64 // the members that were audited, and their largest error, in sigma
}

const (
	coarsest   = -3   // how often a plan is refined at the least
	closeBy    = 0.05 // slack up to which a plan will do for a family
	fewMembers = 64   // up to which all get the exact plan
	candidates = 64   // members from which those that are audited first are taken
	audits     = 8    // how many these are
	auditEvery = 256
)

// trial is a member on which plans are tried.
type trial struct {
	index int64
	exact []Curve // by the exact plan or a table
}

// newStepping prepares for the members of a family; first is one that is not barred.
func (w *weighing) newStepping(ctx context.Context, f *study.Family, tables []*gTable, first *study.Path) (*stepping, error) {
	s := &stepping{weighing: w, tables: tables, first: first, refined: make([]int, len(w.elements)),
		glances: f.Count() > fewMembers, audited: map[int64]float64{}}
	var trials []trial
	for _, i := range w.auditedFirst(f) {
		t, err := s.try(ctx, f, i)
		if err != nil {
			return nil, err
		}
		trials = append(trials, t)
	}
	if !s.glances {
		return s, nil
	}
	finest := slices.Max(s.refined)
	for s.coarse = coarsest; ; s.coarse++ {
		worst, err := s.compare(ctx, f, trials)
		if err != nil || s.coarse >= finest || s.slack <= closeBy && worst <= errorAim {
			return s, err
		}
	}
}

// auditedFirst are the members that are audited before the screening, by their index: of
// some spread over the family that are not barred the first, those with the smallest and
// the largest diffusion integral of the first element, and a few between.
func (w *weighing) auditedFirst(f *study.Family) []int64 {
	type drawn struct {
		index int64
		lnG   float64
	}
	var c study.Candidate
	var all []drawn
	n := min(f.Count(), candidates)
	for k := range n {
		i := k * f.Count() / n
		f.At(&c, i)
		if w.study.Bar(&c); c.Barred == "" {
			all = append(all, drawn{i, w.lnG(0, &study.Path{History: &c.History, Crystals: c.Crystals})})
		}
	}
	if len(all) == 0 {
		return nil
	}
	byG := func(a, b drawn) int { return cmp.Compare(a.lnG, b.lnG) }
	chosen := []int64{slices.MinFunc(all, byG).index, slices.MaxFunc(all, byG).index}
	few := min(len(all), audits-2)
	for k := range few {
		chosen = append(chosen, all[k*len(all)/few].index)
	}
	slices.Sort(chosen)
	return slices.Compact(chosen)
}

// try weighs a member like a path, for the plan that it wants.
func (s *stepping) try(ctx context.Context, f *study.Family, i int64) (trial, error) {
	var c study.Candidate
	f.At(&c, i)
	path := c.Path()
	t := trial{index: i}
	lnG := s.integrals(nil, &c)
	for n := range s.elements {
		if of := s.tables[n]; of != nil {
			t.exact = append(t.exact, of.on(lnG[n]))
			continue
		}
		e := s.elements[n].on(&path)
		a, err := attempted(ctx, &e, &path, s.laws)
		if err != nil {
			return t, fmt.Errorf("%q, %s in %s: %w", path.Name, e.element.Name, e.crystal.Name, err)
		}
		s.refined[n] = max(s.refined[n], a.profile.refined)
		s.audited[i] = math.Max(s.audited[i], a.result.NumErr)
		t.exact = append(t.exact, a.curve)
	}
	return t, nil
}

// compare finds the slack of glances with the plan in hand, for each profile of the
// trials and for all jointly, and the largest of its errors, in sigma.
func (s *stepping) compare(ctx context.Context, f *study.Family, trials []trial) (worst float64, err error) {
	r, err := s.newRunner()
	if err != nil {
		return 0, err
	}
	var c study.Candidate
	s.slack = 2 * exactSlack
	for _, t := range trials {
		f.At(&c, t.index)
		path := c.Path()
		cs, _, err := r.lay(ctx, r.quick, &path, s.integrals(nil, &c))
		if err != nil {
			return 0, err
		}
		if s.audited[t.index], err = r.audit(cs); err != nil {
			return 0, err
		}
		worst = math.Max(worst, s.audited[t.index])
		for k := range cs {
			s.slack = max(s.slack, s.apart(&cs[k], &t.exact[k]))
		}
		a, b := Sum(cs), Sum(t.exact)
		s.slack = max(s.slack, s.apart(&a, &b))
	}
	return worst, nil
}

// apart is the slack with which one curve stands for the other at the multipliers of a
// glance.
func (s *stepping) apart(quick, exact *Curve) slack {
	worst := 0.0
	level := math.Sqrt(Critical(s.study.Confidence, max(exact.Points-exact.Free, 1)))
	for _, x := range glanceKnots() {
		a, b := math.Sqrt(math.Max(quick.At(x), 0)), math.Sqrt(math.Max(exact.At(x), 0))
		worst = math.Max(worst, math.Abs(a-b)/(1+math.Abs(b-level)))
	}
	return slack(worst)
}

// runner runs members, one after the other, in memory of its own.
type runner struct {
	*stepping
	exact, quick []*profile // one an element, by the exact plan and by that of the family; nil where there is a table
}

func (s *stepping) newRunner() (*runner, error) {
	r := &runner{stepping: s, exact: make([]*profile, len(s.elements)), quick: make([]*profile, len(s.elements))}
	for n := range s.elements {
		if s.tables[n] != nil {
			continue
		}
		var err error
		e := s.elements[n].on(s.first)
		if r.exact[n], err = newProfile(&e, s.first, s.refined[n]); err != nil {
			return nil, err
		}
		if r.quick[n], err = newProfile(&e, s.first, min(s.coarse, s.refined[n])); err != nil {
			return nil, err
		}
	}
	return r, nil
}

// judge judges a member, with all that there is to know of it if keeps says that its
// row is kept. numErr is the largest audited error, in sigma, NaN if there is none.
func (r *runner) judge(ctx context.Context, path *study.Path, i int64, lnG []float64, keeps func(Verdict) bool) (f Finding, numErr float64, err error) {
	numErr, known := r.audited[i]
	if !known {
		numErr = math.NaN()
	}
	if !r.glances {
		f, err = r.exactly(ctx, path, lnG)
		return f, numErr, err
	}
	cs, each, err := r.lay(ctx, r.quick, path, lnG)
	if err != nil {
		return f, numErr, err
	}
	f, sure, err := r.look(cs, each, r.slack, keeps)
	if err == nil && !known && i%auditEvery == 0 {
		numErr, err = r.audit(cs)
	}
	if err != nil || sure {
		return f, numErr, named(path, err)
	}
	if cs, each, err = r.lay(ctx, r.exact, path, lnG); err != nil {
		return f, numErr, err
	}
	if f, sure, err = r.look(cs, each, exactSlack, keeps); err != nil || sure {
		return f, numErr, named(path, err)
	}
	f, err = r.exactly(ctx, path, lnG)
	return f, numErr, err
}

// look judges the curves of a member that were laid, and bounds the shift factor if its
// row is kept.
func (r *runner) look(cs []Curve, each []sampler, s slack, keeps func(Verdict) bool) (f Finding, sure bool, err error) {
	f, sum, sure, err := r.glance(cs, each, s)
	if err == nil && sure && keeps(f.Verdict) {
		f.Shift, f.Shift95, err = bounds(cs, each, sum)
	}
	return f, sure, err
}

// named says of which path an error tells.
func named(path *study.Path, err error) error {
	if err != nil {
		return fmt.Errorf("%q: %w", path.Name, err)
	}
	return nil
}

// glance judges the curves of a member that were laid by a plan with the slack. It also
// returns their sum.
func (r *runner) glance(cs []Curve, each []sampler, s slack) (f Finding, sum Curve, sure bool, err error) {
	degrees := 0
	for k := range cs {
		degrees += cs[k].Points - cs[k].Free
	}
	if sum, err = settle(cs, each, Critical(r.study.Confidence, max(degrees, 1))); err != nil {
		return f, sum, false, err
	}
	f, sure, err = s.glanced(cs, each, &sum, r.study.Confidence)
	return f, sum, sure, err
}

// exactly judges a member like a path that is written out.
func (r *runner) exactly(ctx context.Context, path *study.Path, lnG []float64) (Finding, error) {
	cs, each, err := r.lay(ctx, r.exact, path, lnG)
	if err != nil {
		return Finding{}, err
	}
	for n := range cs {
		if r.tables[n] == nil {
			if cs[n], err = scan(cs[n].Points, cs[n].Free, each[n]); err != nil {
				return Finding{}, named(path, err)
			}
			cs[n].Crystal = r.elements[n].place
		}
	}
	for _, own := range byCrystal(cs) { // a crystal's elements come one after the other
		from, to := own[0], own[0]+len(own)
		if err := sharpen(cs[from:to], each[from:to]); err != nil {
			return Finding{}, named(path, err)
		}
	}
	err = sharpen(cs, each)
	return jointly(cs, alone(cs, r.study.Confidence), r.study.Confidence), named(path, err)
}

// audit returns the largest error, in sigma, of the profiles of the family's plan, which
// are on a member whose curves are given: along it and at its best multiplier.
func (r *runner) audit(cs []Curve) (float64, error) {
	worst := 0.0
	for n, p := range r.quick {
		if p == nil {
			continue
		}
		if err := p.audit(0); err != nil {
			return 0, err
		}
		here := p.numErr(p.fitRun(0, nil))
		best, err := p.errorAtBest(&cs[n])
		if err != nil {
			return 0, err
		}
		worst = math.Max(worst, math.Max(here, best))
	}
	return worst, nil
}

// lay returns the curves of a member with the multipliers of a glance, run by the
// profiles or read from tables, and what samples them.
func (r *runner) lay(ctx context.Context, profiles []*profile, path *study.Path, lnG []float64) (cs []Curve, each []sampler, err error) {
	for n := range r.elements {
		if t := r.tables[n]; t != nil {
			cs, each = append(cs, t.on(lnG[n])), append(each, t.sampler(lnG[n]))
			continue
		}
		e := &r.elements[n]
		c, err := r.layOne(ctx, profiles, n, path)
		if err != nil {
			return nil, nil, fmt.Errorf("%q, %s in %s: %w", path.Name, e.element.Name, e.crystal.Name, err)
		}
		cs, each = append(cs, c), append(each, profiles[n].sampler(ctx))
	}
	return cs, each, nil
}

// layOne is lay for element n, which is run.
func (r *runner) layOne(ctx context.Context, profiles []*profile, n int, path *study.Path) (Curve, error) {
	p, err := profiles[n].onto(&r.elements[n], path)
	if err != nil {
		return Curve{}, err
	}
	profiles[n] = p
	knots := glanceKnots()
	solutions, err := p.solveFor(ctx, knots)
	if err != nil {
		return Curve{}, err
	}
	c := Curve{LnM: knots, Crystal: r.elements[n].place}
	for k, s := range solutions {
		if math.IsNaN(s.ChiSq) || math.IsInf(s.ChiSq, 0) {
			return c, fmt.Errorf("paths: chi-square at a multiplier of %g is %g", math.Exp(knots[k]), s.ChiSq)
		}
		c.ChiSq = append(c.ChiSq, s.ChiSq)
		if knots[k] == 0 {
			p.points, p.counted = telling(&p.fit, s), p.spent(s)
		}
	}
	c.Points, c.Free = p.points, p.counted
	c.settleSlopes()
	return c, nil
}
