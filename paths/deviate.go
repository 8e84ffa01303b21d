package paths

import (
	"context"
	"fmt"
	"math"
	"slices"

	"bankfire/diffusion"
	"bankfire/paths/least"
	"bankfire/paths/study"
)

// A slope of ln D against the composition, and A and B of a partition relation, do more
// to a profile than a factor on D does. The element is run again with each of them off
// by devStep standard deviations h either way, and two by two both up. With y the
// profile in the cells, at z it is taken to be
//
//	y(z) = y(0) + sum of z_k (y_k+ - y_k-)/(2 h) + z_k^2 (y_k+ + y_k- - 2 y(0))/(2 h^2)
//	     + sum over pairs of z_k z_l (y_kl - y_k+ - y_l+ + y(0))/h^2,
//
// exactly so where it was run. The fit to that, free values and all, says what
// chi-square is at some z, and By is the polynomial through these: of fourth degree in
// each z, and of second in each of two.

// devStep is by how many standard deviations constants are off in the runs, devFit at
// which they are fitted as well: within and at the ends of what is looked at.
const (
	devStep = 2.0
	devFit  = mostDeviation / 2
)

// deviating is the runs of a profile with constants off.
type deviating struct {
	*profile
	of    []study.Deviation // that do more than a factor on D
	runs  []variant         // one for each of z
	z     [][]float64
	lnD   []float64   // of the factor on D that By counts as a shift
	lnM   []float64   // knots, ascending
	terms [][]float64 // of By at each knot
}

// deviating prepares the runs of a profile with deviations, and returns By without its knots.
func (p *profile) deviating(all []study.Deviation) (*deviating, *By, error) {
	by := &By{Of: all}
	b := &deviating{profile: p}
	for _, d := range all {
		_, lnD := p.crystal.Deviated(p.element, []study.Deviation{d}, []float64{1})
		by.Shift = append(by.Shift, lnD)
		if !p.crystal.OnlyMultiplies(d) {
			b.of = append(b.of, d)
		}
	}
	return b, by, b.lay()
}

// lay compiles the runs, with the cells and the edges of the middle one of the profile's.
func (b *deviating) lay() error {
	n := len(b.of)
	off := func(list ...float64) []float64 {
		z := make([]float64, n)
		for i := 0; i < len(list); i += 2 {
			z[int(list[i])] = list[i+1]
		}
		return z
	}
	for k := range n {
		b.z = append(b.z, off(float64(k), devStep), off(float64(k), -devStep))
	}
	for l := range n {
		for k := range l {
			b.z = append(b.z, off(float64(k), devStep, float64(l), devStep))
		}
	}
	for _, z := range b.z {
		r, lnD, err := b.run(z)
		if err != nil {
			return err
		}
		b.runs, b.lnD = append(b.runs, r), append(b.lnD, lnD)
	}
	return nil
}

// run compiles the element with constants off, and returns ln of the factor on D that By
// counts as a shift.
func (b *deviating) run(z []float64) (r variant, lnD float64, err error) {
	e, lnD := b.crystal.Deviated(b.element, b.of, z)
	problem, _, err := b.crystal.Problem(e, b.path.History)
	if err != nil {
		return r, 0, fmt.Errorf("with constants of %s off: %w", b.element.Name, err)
	}
	own := *b.profile
	own.runs = nil
	options := diffusion.Options{Finest: finest(b.element.Traverse), Refined: b.refined, Faces: b.plan().Faces()}
	if err := own.addRun(problem, b.lens.edges.middles(), &options); err != nil {
		return r, 0, err
	}
	return own.runs[0], lnD, nil
}

// weights are those of the runs in y(z), beside that of y(0).
func (b *deviating) weights(z []float64) []float64 {
	const h = devStep
	n := len(b.of)
	w := make([]float64, len(b.z))
	for k, x := range z {
		w[2*k], w[2*k+1] = x*(x+h)/(2*h*h), x*(x-h)/(2*h*h)
	}
	pair := 2 * n
	for l := range n {
		for k := range l {
			both := z[k] * z[l] / (h * h)
			w[pair] = both
			w[2*k] -= both
			w[2*l] -= both
			pair++
		}
	}
	return w
}

// fit fits the values that are open to the data at deviations z, for what was left in
// field number field.
func (b *deviating) fit(field int, z []float64) least.Solution {
	return b.fitMoved(field, b.runs, b.weights(z))
}

// fitMoved is fit for the profile with so much of what each of the runs differs by.
func (b *deviating) fitMoved(field int, runs []variant, weights []float64) least.Solution {
	cols := b.columns(field)
	from := cols[b.middle()]
	moved := make([][][]float64, len(cols))
	for i := range cols {
		for _, col := range cols[i] {
			moved[i] = append(moved[i], slices.Clone(col))
		}
	}
	for r, w := range weights {
		for j, col := range runs[r].fields[field].Cols {
			for c, v := range col {
				by := w * (v - from[j][c])
				for i := range moved {
					moved[i][j][c] += by
				}
			}
		}
	}
	return b.fitHosts(moved, cols, columnsOf(b.redrawn, field), nil)
}

// solve runs the element for up to a batch of multipliers, and returns chi-square.
func (b *deviating) solve(ctx context.Context, lnM []float64) ([]float64, error) {
	chiSq, err := b.sampler(ctx)(lnM)
	if err != nil {
		return nil, err
	}
	jobs, moved := make([]diffusion.Job, batch), make([]float64, len(lnM))
	for r := range b.runs {
		for k, x := range lnM {
			moved[k] = x - b.lnD[r]
		}
		if err := b.runs[r].at(moved, jobs); err != nil {
			return nil, err
		}
	}
	return chiSq, nil
}

// add puts knots where they are not yet, and returns chi-square there without
// deviations.
func (b *deviating) add(ctx context.Context, lnM []float64) ([]float64, error) {
	var all []float64
	for part := range slices.Chunk(lnM, batch) {
		chiSq, err := b.solve(ctx, part)
		if err != nil {
			return nil, err
		}
		for k, x := range part {
			if i, found := slices.BinarySearch(b.lnM, x); !found {
				b.lnM = slices.Insert(b.lnM, i, x)
				b.terms = slices.Insert(b.terms, i, b.termsAt(k, chiSq[k]))
			}
		}
		all = append(all, chiSq...)
	}
	return all, nil
}

// termsAt are the terms of By for what was left in field number field, where
// chi-square without deviations is as given.
func (b *deviating) termsAt(field int, still float64) []float64 {
	n := len(b.of)
	z := make([]float64, n)
	at := func(k int, x float64, l int, y float64) float64 {
		clear(z)
		z[l] = y
		z[k] = x
		return b.fit(field, z).ChiSq - still
	}
	alone := make([][4]float64, n)
	var terms []float64
	for k := range n {
		const a, c = devFit, mostDeviation
		nearUp, nearDown, farUp, farDown := at(k, a, k, a), at(k, -a, k, -a), at(k, c, k, c), at(k, -c, k, -c)
		t1, t3 := lineThrough(a*a, (nearUp-nearDown)/(2*a), c*c, (farUp-farDown)/(2*c))
		t2, t4 := lineThrough(a*a, (nearUp+nearDown)/(2*a*a), c*c, (farUp+farDown)/(2*c*c))
		alone[k] = [4]float64{t1, t2, t3, t4}
		terms = append(terms, t1, t2, t3, t4)
	}
	for l := range n {
		for k := range l {
			var of [4]float64 // z_k z_l, z_k^2 z_l, z_k z_l^2, z_k^2 z_l^2
			for _, s := range [][2]float64{{1, 1}, {1, -1}, {-1, 1}, {-1, -1}} {
				const h = devStep
				rest := at(k, s[0]*h, l, s[1]*h) - quartic(alone[k], s[0]*h) - quartic(alone[l], s[1]*h)
				of[0] += rest * s[0] * s[1] / (4 * h * h)
				of[1] += rest * s[1] / (4 * h * h * h)
				of[2] += rest * s[0] / (4 * h * h * h)
				of[3] += rest / (4 * h * h * h * h)
			}
			terms = append(terms, of[:]...)
		}
	}
	return terms
}

// lineThrough returns height at 0 and slope of the line through two points.
func lineThrough(x0, y0, x1, y1 float64) (height, slope float64) {
	slope = (y1 - y0) / (x1 - x0)
	return y0 - slope*x0, slope
}

// quartic is the sum of t_i z^(i+1).
func quartic(t [4]float64, z float64) float64 {
	return z * (t[0] + z*(t[1]+z*(t[2]+z*t[3])))
}

// put leaves in by what the knots say.
func (b *deviating) put(by *By) {
	by.LnM, by.Terms = slices.Clone(b.lnM), nil
	place := func(k int) int { return slices.Index(by.Of, b.of[k]) }
	for k := range b.of {
		for p := range 4 {
			by.Terms = append(by.Terms, ByTerm{K: place(k), L: place(k), P: p + 1})
		}
	}
	for l := range b.of {
		for k := range l {
			for _, p := range [][2]int{{1, 1}, {2, 1}, {1, 2}, {2, 2}} {
				by.Terms = append(by.Terms, ByTerm{K: place(k), L: place(l), P: p[0], Q: p[1]})
			}
		}
	}
	for i := range by.Terms {
		t := &by.Terms[i]
		for _, terms := range b.terms {
			t.Value = append(t.Value, terms[i])
		}
		t.Slope = make([]float64, len(t.Value))
		parabolaSlopes(t.Slope, by.LnM, t.Value)
	}
}

// thinned leaves out knots that are nearer than devSpacing to the one before.
func thinned(lnM []float64) []float64 {
	var out []float64
	for _, x := range lnM {
		if len(out) == 0 || x-out[len(out)-1] >= devSpacing {
			out = append(out, x)
		}
	}
	return out
}

// How near knots of By are at first, of lnM; how right it must be where deviations
// bring a profile, of chi-square; how often it is improved; and by how much it may be
// wrong in the end without a word, of chi-square and as a part of it.
const (
	devSpacing = 0.05
	devError   = 0.05
	devRounds  = 8
	devMissed  = 1.0
	devPart    = 0.02
)

// deviate says of the curves of a path what deviations of constants with errors make of
// them, and makes them right where those that bring the path to the data take them.
func (w *weighedPath) deviate(ctx context.Context, of *weighing) error {
	runs := make([]*deviating, len(w.curves))
	any := false
	for n := range w.curves {
		if !w.ran(n) {
			continue
		}
		p, c := w.profiles[n], &w.curves[n]
		all := p.crystal.Deviations(p.element)
		if len(all) == 0 {
			continue
		}
		b, by, err := p.deviating(all)
		if err != nil {
			return err
		}
		c.By, any = by, true
		if len(b.of) == 0 {
			continue
		}
		runs[n] = b
		if _, err := b.add(ctx, thinned(c.LnM)); err != nil {
			return err
		}
		b.put(c.By)
	}
	if !any {
		return nil
	}
	w.deviateShared(of)
	for range devRounds {
		if right, err := w.rectify(ctx, of, runs); err != nil {
			return err
		} else if right {
			break
		}
	}
	return w.noteForetold(ctx, of, runs)
}

// deviateShared gives the curves of what elements of a crystal share the shifts of the
// first of these, along whose multipliers they are.
func (w *weighedPath) deviateShared(of *weighing) {
	for place := range of.crystals {
		if !w.shared[place].Shared {
			continue
		}
		if by := w.curves[w.sharing(of, place).of[0]].By; by != nil {
			w.shared[place].By = &By{Of: by.Of, Shift: by.Shift}
		}
	}
}

// asked calls see for each profile that was run with constants off, with its law and its
// deviations where those that bring the path to the data take it: the likeliest and the
// smallest with which it passes.
func (w *weighedPath) asked(of *weighing, runs []*deviating, see func(n int, law *LawPrior, z []float64) error) error {
	cs, which := of.judged(w)
	joint := Sum(cs)
	l := newLeaning(cs, of.laws)
	_, likeliest, smallest := l.find(Critical(of.study.Confidence, max(joint.Points-joint.Free, 1)))
	for i := range cs {
		if cs[i].Shared {
			continue
		}
		n := which[0]
		which = which[1:]
		for _, z := range [][]float64{likeliest, smallest} {
			if z == nil || runs[n] == nil {
				continue
			}
			if err := see(n, l.law(&cs[i]), l.own(i, z)); err != nil {
				return err
			}
		}
	}
	return nil
}

// rectify adds knots where a path asks profiles to go. It reports whether By was right
// there.
func (w *weighedPath) rectify(ctx context.Context, of *weighing, runs []*deviating) (right bool, err error) {
	right = true
	err = w.asked(of, runs, func(n int, law *LawPrior, z []float64) error {
		told, err := runs[n].rectify(ctx, &w.curves[n], law, z)
		right = right && told
		w.keep(n)
		return err
	})
	return right, err
}

// noteForetold runs the profiles with constants off as the path asks for, and says of
// those of which By foretells something else.
func (w *weighedPath) noteForetold(ctx context.Context, of *weighing, runs []*deviating) error {
	missed := make([]float64, len(runs))
	err := w.asked(of, runs, func(n int, law *LawPrior, z []float64) error {
		value, err := runs[n].exactly(ctx, &w.curves[n], law, z)
		if miss := math.Abs(value - w.curves[n].leant(z, law)); miss > devMissed+devPart*value {
			missed[n] = math.Max(missed[n], miss)
		}
		return err
	})
	for n, miss := range missed {
		if b := runs[n]; miss > 0 {
			w.results[n].Notes = append(w.results[n].Notes, fmt.Sprintf("with constants off, chi-square of %s in %s is foretold to %.2g only", b.element.Name, b.crystal.Name, miss))
		}
	}
	return err
}

// exactly runs the profile with the deviations of the curve and returns chi-square.
func (b *deviating) exactly(ctx context.Context, c *Curve, law *LawPrior, z []float64) (float64, error) {
	x := []float64{c.shift(z, law)}
	if _, err := b.solveFor(ctx, x); err != nil {
		return 0, err
	}
	r, lnD, err := b.run(b.among(c, z))
	if err != nil {
		return 0, err
	}
	x[0] -= lnD
	if err := r.at(x, make([]diffusion.Job, 1)); err != nil {
		return 0, err
	}
	return b.fitMoved(0, []variant{r}, []float64{1}).ChiSq, nil
}

// among are those of the curve's deviations that are run.
func (b *deviating) among(c *Curve, z []float64) []float64 {
	_, all := c.split(z)
	var out []float64
	for _, d := range b.of {
		out = append(out, all[slices.Index(c.By.Of, d)])
	}
	return out
}

// rectify adds a knot where deviations take the profile of the curve, and reports
// whether that was foretold.
func (b *deviating) rectify(ctx context.Context, c *Curve, law *LawPrior, z []float64) (told bool, err error) {
	x, before := c.shift(z, law), c.leant(z, law)
	if i, _ := slices.BinarySearch(b.lnM, x); i > 0 && x-b.lnM[i-1] < leastSpacing || i < len(b.lnM) && b.lnM[i]-x < leastSpacing {
		return true, nil
	}
	chiSq, err := b.add(ctx, []float64{x})
	if err != nil {
		return false, err
	}
	if c.nearest(x) >= leastSpacing {
		c.add(x, chiSq[0])
		c.settleSlopes()
	}
	b.put(c.By)
	return math.Abs(b.fit(0, b.among(c, z)).ChiSq-before) <= devError, nil
}

// WithErrors counts the laws and other constants with errors, on which a path may lean.
func (r *Result) WithErrors() int {
	var list []study.Deviation
	for _, c := range r.Crystals {
		for i := range c.Elements {
			e := &c.Elements[i]
			if e.Traverse == nil {
				continue
			}
			for k := range e.Starts() {
				for _, d := range c.Deviations(e.Starting(k)) {
					if !slices.Contains(list, d) {
						list = append(list, d)
					}
				}
			}
		}
	}
	return len(r.Laws) + len(list)
}
