package paths

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"math"
	"slices"
	"sync"

	"bankfire/diffusion"
	"bankfire/paths/least"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
	"bankfire/thermal/numeric"
	"gonum.org/v1/gonum/mat"
)

// Result is a study weighed: what became of every path, in the study's order.
// Its Study has, after the paths that are written out, the member of each family
// that agrees best.
type Result struct {
	Study    *study.Study
	Laws     []LawPrior       // in the order of first use
	Own      []OwnBest        // one a measured element
	Crystals []*study.Crystal // those with a measured element, in the order of an Outcome's
	Paths    []PathResult     // those that are written out, then one member of each family
	Families []FamilyResult
	Edges    []EdgeOrigin // of crystals of which elements share an open width of their edges
	Groups   []Group      // of paths that end alike, where the crystals share their history from a moment on
}

// PathResult is one path with its verdict as the path of all crystals, whatever
// they share. A path that is barred has no outcome but its verdict, its numbers
// being NaN, and no profiles; where only some crystals bar it, since they need not
// share it, that goes for them and the joint verdict, and the others have theirs.
type PathResult struct {
	Path     *study.Path
	Outcome  Outcome
	Barred   []study.Bar // why it is ruled out
	Life     float64     // start to eruption, s
	Above    []float64   // time above each of the study's thresholds before eruption, s
	Profiles []ProfileResult
	Starts   [][]Tried // one list a crystal, in the order of Result.Crystals; empty where there is no choice or the crystal bars the path
	Notes    []string
}

// ProfileResult is one element on one path as it is, fitted to its traverse, or
// only the names of the two if its crystal bars the path.
type ProfileResult struct {
	Crystal *study.Crystal
	Element *study.Element
	Free    []FreeFit
	LnG     float64   // ln of the diffusion integral, m2
	StandIn float64   // the constant temperature that gives the same G over the whole path, its legs' conditions kept, K; 0 where nothing diffuses
	NumErr  float64   // largest numerical error at the data points, in sigma, of the path as it is and at its shift factor
	Origin  float64   // by which the file's zero is off in the fit, m; see traverse.Traverse.Place
	Tilt    float64   // of the line in the fit, rad
	At      []float64 // where the points are in the fit, m from the crystal's centre
	Seen    []float64 // what the instrument would have shown at the points, in the traverse's unit
	Sigma   []float64 // the points' standard deviations, extra scatter included
	// Residuals are (measured - modelled)/sigma; of a value below detection minus
	// the root of -2 ln of its likelihood.
	Residuals []float64
	Centres   []float64 // of the cells, m from the crystal's centre
	Start     []float64 // what the instrument would have shown there before diffusion
	Final     []float64 // and at the end of the path
	Settled   bool      // false if the fit of edge, tilt and origin gave up while it could still improve
	BelowZero float64   // by how much, in the element's unit, a concentration is below zero beyond its numerical error; 0 but for faults of the plan
	Notes     []string
}

// Ran reports whether the path was run for the element.
func (r *ProfileResult) Ran() bool { return r.Centres != nil }

// FreeFit is a value that the traverse decided, alone or with a prior.
type FreeFit struct {
	Name         string
	Value, Sigma float64 // Sigma is +Inf where the data do not see it, 0 where it is not known
	Unit         string
	HasPrior     bool
	AtEnd        bool // it is at the end of the range in which it may lie
}

// weighing is a study in the course of being weighed.
type weighing struct {
	study    *study.Study
	elements []element
	crystals []*study.Crystal // with a measured element
	laws     []LawPrior
	paths    []weighedPath
	written  []study.Path // those of the study itself
	solved   int          // how many of those need not be solved again
	families []FamilyResult
}

// element is one that was measured.
type element struct {
	crystal *study.Crystal
	element *study.Element
	place   int // of the crystal among those with a measured element
	index   int // of the element in the crystal
	law     int
	white   *mat.TriDense    // makes the errors of overlapping spots independent; nil if they are
	scatter float64          // extra scatter of its traverse, in its unit
	hosts   []*study.Crystal // the crystal with its host redrawn; nil where that is exact or does not matter
}

// on is the element as the path has it: as that of its crystals if it is a member of a
// family with values in them.
func (e element) on(path *study.Path) element {
	c := path.Crystal(e.crystal)
	if c == e.crystal {
		return e
	}
	e.crystal, e.element = c, &c.Elements[e.index]
	if e.hosts != nil {
		e.hosts = c.Redrawn()
	}
	return e
}

// weighedPath is what the solver said of one path: one entry an element, empty if
// its crystal bars the path, or none at all if nothing was run.
type weighedPath struct {
	barred   []study.Bar
	profiles []*profile
	results  []ProfileResult
	curves   []Curve
	tried    [][]attempt // of each element, one a start
	starts   [][]Tried
	told     map[*profile]map[float64]float64 // chi-square by ln of the multiplier, where sharing was sampled
	shared   []Curve                          // of each crystal, what sharing the width of edges costs
	edges    [][]EdgeOrigin                   // of each crystal, one a width that its elements share
}

func newWeighing(s *study.Study) (*weighing, error) {
	own := *s
	w := &weighing{study: &own, written: s.Paths}
	for i := range s.Crystals {
		c := &s.Crystals[i]
		hosts := c.Redrawn()
		for j := range c.Elements {
			if e := &c.Elements[j]; e.Traverse != nil {
				white, err := overlapWhite(e)
				if err != nil {
					return nil, err
				}
				if !slices.Contains(w.crystals, c) {
					w.crystals = append(w.crystals, c)
				}
				m := element{crystal: c, element: e, place: len(w.crystals) - 1, index: j, law: w.law(&e.Law), white: white}
				if e.OnHost() {
					m.hosts = hosts
				}
				w.elements = append(w.elements, m)
			}
		}
	}
	return w, nil
}

// law returns the number of a law's prior, counted from 1; 0 where it has none.
// Laws without a key stand with one element each and share nothing, alike as
// their errors may be.
func (w *weighing) law(l *study.Law) int {
	prior := lawPrior(l)
	if prior.LnD == 0 && prior.E == 0 {
		return 0
	}
	for k := range w.laws {
		if w.laws[k] == prior && prior.Key != "" {
			return k + 1
		}
	}
	w.laws = append(w.laws, prior)
	return len(w.laws)
}

// lawPrior says how well a law is known; one by direction no better than the
// worst of its parts. The user's factor on D has an error of its own.
func lawPrior(l *study.Law) LawPrior {
	p := LawPrior{Key: l.Key, LnD: l.Sigma * math.Ln10}
	if l.Row != nil {
		p.LnD, p.E = l.Row.SigmaMid.Value*math.Ln10, l.Row.SigmaE.Value
	}
	for i := range l.Parts {
		part := lawPrior(&l.Parts[i].Law)
		p.LnD, p.E = max(p.LnD, part.LnD), max(p.E, part.E)
	}
	if l.Times.Value != 0 {
		p.LnD = math.Hypot(p.LnD, l.Times.Sigma/l.Times.Value)
	}
	return p
}

// findScatter finds the extra scatter that traverses leave open, along the written
// paths and the first of the members of each family, nil where there is none.
func (w *weighing) findScatter(ctx context.Context, firsts []*study.Path, jobs int) error {
	if !slices.ContainsFunc(w.elements, func(e element) bool { return e.element.Scatter }) {
		return nil
	}
	w.study.Paths = slices.Clone(w.written)
	for _, first := range firsts {
		if first != nil {
			w.study.Paths = append(w.study.Paths, *first)
		}
	}
	if err := w.all(ctx, jobs); err != nil {
		return err
	}
	if !w.addScatter() {
		w.solved = len(w.written)
	}
	return nil
}

// all solves every path of the study.
func (w *weighing) all(ctx context.Context, jobs int) error {
	w.paths = slices.Grow(w.paths[:w.solved], len(w.study.Paths))[:len(w.study.Paths)]
	errs := make([]error, len(w.paths))
	next := make(chan int)
	var team sync.WaitGroup
	for range max(1, min(jobs, len(w.paths)-w.solved)) {
		team.Go(func() {
			for i := range next {
				errs[i] = w.path(ctx, i)
			}
		})
	}
	for i := w.solved; i < len(w.paths); i++ {
		select {
		case next <- i:
		case <-ctx.Done():
			errs[i] = ctx.Err()
		}
	}
	close(next)
	team.Wait()
	if done := ctx.Err(); done != nil && slices.ContainsFunc(errs, func(err error) bool { return errors.Is(err, done) }) {
		return done
	}
	return firstErrors(errs)
}

// mostErrors is how many errors are reported at once.
const mostErrors = 20

func firstErrors(errs []error) error {
	errs = slices.DeleteFunc(errs, func(err error) bool { return err == nil })
	return errors.Join(errs[:min(len(errs), mostErrors)]...)
}

// ran reports whether the path was run for element n.
func (w *weighedPath) ran(n int) bool { return n < len(w.profiles) && w.profiles[n] != nil }

// bars reports whether the path is ruled out for the crystal.
func (w *weighedPath) bars(c *study.Crystal) bool {
	return slices.ContainsFunc(w.barred, func(b study.Bar) bool { return b.Crystal == "" || b.Crystal == c.Name })
}

// path solves path i for every element for which it is not ruled out.
func (w *weighing) path(ctx context.Context, i int) error {
	path := &w.study.Paths[i]
	reasons, err := w.study.Barred(path)
	if err != nil {
		return fmt.Errorf("path %q: %w", path.Name, err)
	}
	p := weighedPath{barred: reasons}
	w.paths[i] = p
	if !slices.ContainsFunc(w.elements, func(e element) bool { return !p.bars(e.crystal) }) {
		return nil
	}
	if err := w.solve(ctx, &p, path); err != nil {
		return fmt.Errorf("path %q%w", path.Name, err)
	}
	if err := p.showShared(w); err != nil {
		return fmt.Errorf("path %q: %w", path.Name, err)
	}
	if err := p.deviate(ctx, w); err != nil {
		return fmt.Errorf("path %q: %w", path.Name, err)
	}
	if err := p.edgeOrigins(ctx, w, path); err != nil {
		return fmt.Errorf("path %q: %w", path.Name, err)
	}
	w.paths[i] = p
	return nil
}

// solve runs every element that is not barred along the path.
func (w *weighing) solve(ctx context.Context, p *weighedPath, path *study.Path) error {
	for _, e := range w.elements {
		e = e.on(path)
		if p.bars(e.crystal) {
			p.skip(e)
			continue
		}
		if err := p.add(ctx, e, path, w.laws); err != nil {
			return fmt.Errorf(", %s in %s: %w", e.element.Name, e.crystal.Name, err)
		}
	}
	if err := p.choose(ctx, w); err != nil {
		return fmt.Errorf(": %w", err)
	}
	if err := p.sharpen(ctx, w); err != nil {
		return fmt.Errorf(": %w", err)
	}
	return nil
}

// skip leaves out an element whose crystal bars the path.
func (w *weighedPath) skip(e element) {
	w.profiles = append(w.profiles, nil)
	w.results = append(w.results, ProfileResult{Crystal: e.crystal, Element: e.element})
	w.curves = append(w.curves, Curve{Crystal: e.place})
	w.tried = append(w.tried, nil)
}

// add runs one element with each start that it may have had.
func (w *weighedPath) add(ctx context.Context, e element, path *study.Path, laws []LawPrior) error {
	of := e.element
	var tried []attempt
	for k := range of.Starts() {
		e.element = of.Starting(k)
		a, err := attempted(ctx, &e, path, laws)
		if err != nil {
			return err
		}
		tried = append(tried, a)
	}
	w.tried = append(w.tried, tried)
	w.profiles = append(w.profiles, tried[0].profile)
	w.results = append(w.results, tried[0].result)
	w.curves = append(w.curves, tried[0].curve)
	return nil
}

// attempted scans the multipliers on D for one element, with a plan that is fine
// enough both for the path as it is and at the best of them: a path that hardly
// diffuses says nothing of the error there.
func attempted(ctx context.Context, e *element, path *study.Path, laws []LawPrior) (attempt, error) {
	for refined := 0; ; {
		p, result, err := audited(e, path, refined)
		if err != nil {
			return attempt{}, err
		}
		curve, err := p.curve(ctx)
		if err != nil {
			return attempt{}, err
		}
		best, err := p.errorAtBest(&curve)
		if err != nil {
			return attempt{}, err
		}
		if refined = p.finer(best); refined > p.refined {
			continue
		}
		result.NumErr = math.Max(result.NumErr, best)
		result.Notes = result.notes(path)
		curve.Crystal = e.place
		if curve.Law = e.law; e.law > 0 {
			curve.ByE = p.byE(laws[e.law-1].E)
		}
		return attempt{p, *result, curve}, nil
	}
}

// sharpen makes the joint curves, of each crystal and of all, right around their
// own lowest points.
func (w *weighedPath) sharpen(ctx context.Context, of *weighing) error {
	var all []curve
	for place := range of.crystals {
		list := w.gather(ctx, of, place)
		if len(list) == 0 {
			continue
		}
		if err := sharpenAll(list); err != nil {
			return err
		}
		all = append(all, list...)
	}
	err := sharpenAll(all)
	for n := range w.curves {
		w.keep(n)
	}
	return err
}

// audited compiles the element for the path, with a plan at least so often
// refined and fine enough for the path as it is, and runs that: a concentration
// below zero asks for the finest.
func audited(e *element, path *study.Path, refined int) (*profile, *ProfileResult, error) {
	for {
		p, err := newProfile(e, path, refined)
		if err != nil {
			return nil, nil, err
		}
		result, err := p.asItIs()
		if err != nil {
			return nil, nil, err
		}
		refined = p.finer(result.NumErr)
		if result.BelowZero > 0 {
			refined = mostRefined
		}
		if refined == p.refined {
			return p, result, nil
		}
	}
}

// finer returns how often the plan should be refined, each time to a quarter of
// its error numErr, to reach errorAim.
func (p *profile) finer(numErr float64) int {
	if !(numErr > errorAim) {
		return p.refined
	}
	more := math.Ceil(math.Log(numErr/errorAim) / math.Log(4))
	return int(math.Min(float64(p.refined)+more, mostRefined))
}

// errorAtBest returns the numerical error at the multiplier that agrees best.
func (p *profile) errorAtBest(c *Curve) (float64, error) {
	lnM, _ := c.Lowest()
	if err := p.audit(lnM); err != nil {
		return 0, err
	}
	return p.numErr(p.fitRun(0, nil)), nil
}

// byE returns the first and second derivative of ln G by the activation energy,
// in mol/J, D in the middle of the law's calibrated range held, or that of each of
// its regimes:
//
//	ln G(E + d) = ln of the integral of D exp(-(d/R) (1/T - 1/Tmid)) dt,
//
// from central differences a standard deviation sigma wide.
func (p *profile) byE(sigma float64) [2]float64 {
	if sigma == 0 {
		return [2]float64{}
	}
	law, h := &p.element.Law, p.history
	regimes := law.Regimes()
	middles := make([]float64, len(regimes))
	for i, of := range regimes {
		if middles[i] = inverseMiddle(of); middles[i] == 0 { // a law of unknown range: what it is known for is taken to be what it is used for
			middles[i] = 1 / standIn(law.Law, h, p.runs[0].course.LnG())
		}
	}
	lnG := func(d float64) float64 {
		sum := math.Inf(-1)
		for i, of := range regimes {
			moved := diffusion.Law{Where: of.Law.Where}
			for _, a := range of.Law.Terms {
				a.E += d / thermal.GasConstant
				a.LnA += d / thermal.GasConstant * middles[i]
				moved.Terms = append(moved.Terms, a)
			}
			sum = numeric.LnAdd(sum, moved.LnIntegral(h, 0, h.Life()))
		}
		return sum
	}
	up, mid, down := lnG(sigma), lnG(0), lnG(-sigma)
	if math.IsInf(mid, -1) {
		return [2]float64{}
	}
	return [2]float64{(up - down) / (2 * sigma), (up - 2*mid + down) / (sigma * sigma)}
}

// inverseMiddle returns 1/T in the middle of the law's calibrated range of 1/T,
// 1/K; 0 where the range is not known.
func inverseMiddle(law *study.Law) float64 {
	if law.TMin == 0 || law.TMax == 0 {
		return 0
	}
	return (1/law.TMin + 1/law.TMax) / 2
}

// asItIs runs the path with D unchanged, measures the numerical error and
// keeps what is to be shown.
func (p *profile) asItIs() (*ProfileResult, error) {
	if err := p.audit(0); err != nil {
		return nil, err
	}
	at := p.fitRun(0, nil)
	p.points, p.counted = telling(&p.fit, at), p.spent(at)
	widths, tilt, origin := p.lens.values(at.Bent)
	a := p.amounts(at)
	r := &ProfileResult{
		Crystal: p.crystal, Element: p.element,
		Free:   p.freeFits(at),
		LnG:    p.runs[0].course.LnG(),
		NumErr: p.numErr(at),
		Origin: origin, Tilt: tilt,
		At:   make([]float64, len(p.fit.Obs)),
		Seen: at.Model, Sigma: p.fit.Sigma, Residuals: at.Residuals,
		Centres: p.plan().Centres(),
		Settled: at.Settled, BelowZero: p.belowZero(widths, a),
	}
	p.element.Traverse.Place(r.At, origin, tilt)
	spot := p.element.Traverse.Spot
	spot.Width *= math.Cos(tilt)
	everywhere, err := traverse.NewWeights(p.plan().Faces(), p.lens.mirrored, p.lens.curve, spot, r.Centres)
	if err != nil {
		return nil, err
	}
	r.Start, r.Final = make([]float64, len(r.Centres)), make([]float64, len(r.Centres))
	everywhere.Apply(r.Start, a.of(p.mix(p.starts(), widths)))
	final := a.of(p.mix(p.columns(0), widths))
	p.addHost(final, 0, at)
	everywhere.Apply(r.Final, final)
	r.StandIn = standIn(p.element.Law.Law, p.history, r.LnG)
	return r, nil
}

// freeFits names the fitted values.
func (p *profile) freeFits(at least.Solution) []FreeFit {
	var fits []FreeFit
	if p.grey {
		fits = p.greyFits(at)
	} else {
		fits = p.plainFits(at)
	}
	widths, tilt, origin := p.lens.values(at.Bent)
	for _, k := range p.lens.edges.free() {
		fits = append(fits, p.edgeFit(k, widths[k]))
	}
	if n := p.lens.tilt; !n.Fixed() {
		fits = append(fits, bentFit(n, "tilt", tilt, 180/math.Pi, "deg"))
	}
	if n := p.lens.origin; !n.Fixed() {
		fits = append(fits, bentFit(n, "origin", origin, 1e6, "um"))
	}
	return fits
}

// edgeFit names fitted width k of the edges, m.
func (p *profile) edgeFit(k int, width float64) FreeFit {
	name := "edge width"
	if len(p.element.Start.Edges) > 0 {
		name += " " + p.crystal.Zones[k].Name + "/" + p.crystal.Zones[k+1].Name
	}
	return bentFit(p.element.Start.Widths()[k], name, width, 1e6, "um")
}

// bentFit names the fitted value of a nuisance, told in a unit of so many in one of SI.
func bentFit(n study.Nuisance, name string, value, scale float64, unit string) FreeFit {
	margin := endMargin * (n.Hi - n.Lo)
	return FreeFit{Name: name, Value: value * scale, Unit: unit, HasPrior: !n.Ranged(),
		AtEnd: n.Ranged() && (value <= n.Lo+margin || value >= n.Hi-margin)}
}

// plainFits names the fitted plateaux and rim values.
func (p *profile) plainFits(at least.Solution) []FreeFit {
	var fits []FreeFit
	for j, v := range p.free {
		f := FreeFit{Name: v.Name, Value: at.Linear[j], Sigma: at.Sigma[j], Unit: p.element.Unit, HasPrior: v.HasPrior}
		switch {
		case v.HasPrior:
			f.Value += v.Prior.Value
		case p.isPinned(at, j):
			f.Value, f.Sigma, f.AtEnd = 0, 0, true
		case f.Sigma > unseen*p.size:
			f.Sigma = math.Inf(1)
		}
		fits = append(fits, f)
	}
	return fits
}

// greyFits names the values fitted to relative data, in the element's unit, with
// the scale and offset between. Of a value v the fit knows x = scale v; its
// error comes from a fit about v, in which x and with it what the error of the
// scale would add is 0.
func (p *profile) greyFits(at least.Solution) []FreeFit {
	var fits []FreeFit
	k := len(p.free)
	scale := at.Linear[k]
	values := p.amounts(at).stated().values
	about := p.fitRun(0, values)
	for j, v := range p.free {
		f := FreeFit{Name: v.Name, Value: values[j], Sigma: about.Sigma[j] / math.Abs(scale), Unit: p.element.Unit}
		if !(about.Sigma[j] <= unseen*p.size) || scale == 0 {
			f.Sigma = math.Inf(1)
		}
		fits = append(fits, f)
	}
	return append(fits, FreeFit{Name: "scale", Value: scale, Sigma: at.Sigma[k]},
		FreeFit{Name: "offset", Value: at.Linear[k+1], Sigma: at.Sigma[k+1], Unit: p.element.Traverse.Unit})
}

// endMargin is the part of a range within which a value is at its end.
const endMargin = 1e-3

// addScatter finds, for each traverse whose extra scatter is to be fitted, the
// scatter with which its own best fit has a chi-square equal to its degrees of
// freedom. It reports whether any was needed.
func (w *weighing) addScatter() bool {
	found := false
	for n := range w.elements {
		e := &w.elements[n]
		if !e.element.Scatter {
			continue
		}
		best, lnM := w.ownBest(n)
		if best == nil {
			continue
		}
		e.scatter = best.profile.scatter(lnM)
		found = found || e.scatter > 0
	}
	return found
}

// scatter returns the extra scatter that makes chi-square at the multiplier
// equal to the degrees of freedom; 0 if it is no larger without.
func (p *profile) scatter(lnM float64) float64 {
	if _, err := p.solveFor(context.Background(), []float64{lnM}); err != nil {
		return 0
	}
	degrees := float64(p.points - p.counted - 1)
	excess := func(s float64) float64 {
		p.fit.Sigma = widened(p.element.Traverse, s)
		return p.fitRun(0, nil).ChiSq - degrees
	}
	defer func() { p.fit.Sigma = p.element.Traverse.Sigma }()
	if degrees < 1 || !(excess(0) > 0) {
		return 0
	}
	most := 0.0
	for _, v := range p.fit.Obs {
		most = math.Max(most, math.Abs(v))
	}
	s, err := numeric.Root(excess, 0, most, scatterResolution*most)
	if err != nil {
		return 0
	}
	return s
}

// scatterResolution is how finely extra scatter is found, as a part of the
// largest value.
const scatterResolution = 1e-6

// ownBest returns the run of element n, along any path and with any of its starts,
// that fits best, and the multiplier there; nil if every path is barred.
func (w *weighing) ownBest(n int) (of *attempt, lnM float64) {
	best := math.Inf(1)
	for i := range w.paths {
		if !w.paths[i].ran(n) {
			continue
		}
		for k := range w.paths[i].tried[n] {
			a := &w.paths[i].tried[n][k]
			if x, chi := a.curve.Lowest(); chi < best {
				of, lnM, best = a, x, chi
			}
		}
	}
	return of, lnM
}

// judge turns curves into verdicts.
func (w *weighing) judge(ctx context.Context) (*Result, error) {
	r := &Result{Study: w.study, Laws: w.laws, Crystals: w.crystals, Paths: make([]PathResult, len(w.paths)), Families: w.families}
	for n := range w.elements {
		own, err := w.examine(ctx, n)
		if err != nil {
			return nil, err
		}
		r.Own = append(r.Own, own)
		for i := range w.paths {
			if curves := w.paths[i].curves; len(curves) > 0 {
				curves[n].Best = own.ChiSq
			}
		}
	}
	for i := range w.paths {
		r.Paths[i] = w.verdict(i, r.Own)
	}
	r.Edges = w.judgeEdges()
	if err := w.groups(ctx, r); err != nil {
		return nil, err
	}
	return r, nil
}

// examine looks at the own best fit of element n.
func (w *weighing) examine(ctx context.Context, n int) (OwnBest, error) {
	e := w.elements[n]
	own := OwnBest{Crystal: e.crystal, Element: e.element, Scatter: e.scatter, Outlier: -1}
	best, lnM := w.ownBest(n)
	if best == nil {
		return own, nil
	}
	p := best.profile
	solutions, err := p.solveFor(ctx, []float64{lnM})
	if err != nil {
		return own, err
	}
	own.Path, own.Shift = p.path, math.Exp(lnM)
	own.Degrees = p.points - p.counted - 1
	own.examine(&p.fit, solutions[0], w.study.Confidence)
	own.knowing(&best.curve, w.study.Confidence)
	return own, own.host(ctx, p, &best.curve, w.study.Confidence)
}

// verdict judges path i. A path is not blamed for a profile that its own best
// fit does not pass either.
func (w *weighing) verdict(i int, own []OwnBest) PathResult {
	path, p := &w.study.Paths[i], &w.paths[i]
	r := PathResult{Path: path, Barred: p.barred, Life: path.History.Eruption(), Profiles: p.results, Starts: p.starts}
	for _, t := range w.study.Thresholds {
		r.Above = append(r.Above, path.History.TimeAbove(t.Temp))
	}
	if len(p.profiles) == 0 {
		r.Outcome.Finding, r.Notes = notRun(Barred), study.Whys(p.barred)
		return r
	}
	w.judgePath(&r.Outcome, p)
	if len(p.barred) > 0 {
		r.Outcome.Finding, r.Notes = notRun(Barred), study.Whys(p.barred)
		return r
	}
	r.Notes = r.Outcome.Notes()
	for k, q := range p.profiles {
		if k == 0 || q.crystal != p.profiles[k-1].crystal {
			r.Notes = append(r.Notes, hostMoved(q.crystal, q.history)...)
		}
	}
	for n := range own {
		if o := &own[n]; r.Outcome.Verdict == WrongShape && !o.passes(w.study.Confidence) {
			r.Notes = append(r.Notes, fmt.Sprintf("errors too small or model wrong for %s in %s: not even its own best fit passes, so no path is to blame", o.Element.Name, o.Crystal.Name))
		}
	}
	return r
}

// judged are the curves of a path that was run, with those of what sharing costs, and
// of which elements the others are.
func (w *weighing) judged(p *weighedPath) (cs []Curve, of []int) {
	for n, e := range w.elements {
		if p.ran(n) {
			cs, of = append(cs, p.curves[n]), append(of, n)
		}
		if last := n+1 == len(w.elements) || w.elements[n+1].place != e.place; last && p.shared[e.place].Shared {
			cs = append(cs, p.shared[e.place])
		}
	}
	return cs, of
}

// judgePath judges a path that was run, and says of the elements and crystals for
// which it was not that they bar it.
func (w *weighing) judgePath(dst *Outcome, p *weighedPath) {
	cs, of := w.judged(p)
	Judge(dst, cs, w.laws, w.study.Confidence)
	if dst.Verdict == AtOdds || slices.ContainsFunc(dst.Crystals, func(f Finding) bool { return f.Verdict == AtOdds }) {
		dst.Odds = Demands(slices.DeleteFunc(cs, func(c Curve) bool { return c.Shared }), dst.Profiles, w.study.Confidence)
		for k := range dst.Odds {
			d := &dst.Odds[k]
			d.Of, d.To = of[d.Of], of[d.To]
		}
	}
	if len(of) == len(p.curves) {
		return
	}
	profiles, crystals := dst.Profiles, dst.Crystals
	dst.Profiles, dst.Crystals = nil, nil
	for n, e := range w.elements {
		f, of := notRun(Barred), notRun(Barred)
		if p.ran(n) {
			f, profiles = profiles[0], profiles[1:]
		}
		if dst.Profiles = append(dst.Profiles, f); e.place < len(dst.Crystals) {
			continue
		}
		if p.ran(n) {
			of, crystals = crystals[0], crystals[1:]
		}
		dst.Crystals = append(dst.Crystals, of)
	}
}

// notRun is the finding on a path that was not run.
func notRun(v Verdict) Finding {
	nan := math.NaN()
	none := [2]float64{nan, nan}
	return Finding{Verdict: v, Shift: nan, Shift68: none, Shift95: none, Tail: nan, Misfit: nan, Above: nan}
}

// standIn returns the one constant temperature, in K, at which the law gives
// the diffusion integral exp(lnG) along the legs of the history, each with its
// setting; 0 if there is none between standInLow and standInHigh. It allocates only
// for a law that has windows.
func standIn(law diffusion.Law, h *thermal.History, lnG float64) float64 {
	if law.Where == nil {
		lnLife := math.Log(h.Life())
		return tempAt(lnG, func(temp float64) float64 { return law.LnD(temp) + lnLife })
	}
	lasts := map[int]float64{} // s, by setting
	for _, leg := range h.Legs() {
		lasts[leg.Setting] += leg.For
	}
	settings := slices.Sorted(maps.Keys(lasts))
	laws := make([]diffusion.Law, len(settings))
	for i, s := range settings {
		laws[i] = law.In(s)
	}
	return tempAt(lnG, func(temp float64) float64 {
		sum := math.Inf(-1)
		for i, s := range settings {
			sum = numeric.LnAdd(sum, laws[i].LnD(temp)+math.Log(lasts[s]))
		}
		return sum
	})
}

// tempAt returns the temperature, in K, at which ln G is lnG; 0 if there is none.
func tempAt(lnG float64, of func(temp float64) float64) float64 {
	t, err := numeric.Root(func(temp float64) float64 { return of(temp) - lnG }, standInLow, standInHigh, standInResolution)
	if err != nil {
		return 0
	}
	return t
}

// Where a stand-in temperature is looked for, and how finely, K.
const (
	standInLow        = 10
	standInHigh       = 1e4
	standInResolution = 1e-6
)
