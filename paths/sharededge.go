package paths

import (
	"context"
	"fmt"
	"math"
	"slices"

	"bankfire/paths/study"
)

// Elements of one crystal that leave the width of their edges open have it in common:
// its zones grew as they grew, whatever is measured in them. The joint chi-square is
//
//	J(m) = least over w of the sum of chi-square(m, w) + the prior of w, once,
//
// w the width. The curve of what sharing costs, J less the sum of the profiles' own
// curves, goes with these as one more curve without points, so that sums of curves
// are joint ones. Along different multipliers, as deviations of laws make them, it is
// taken at that of the first of the profiles.

// How finely a common width is looked for: a few places over its range, then about
// the best of them down to a small part of the range.
const (
	widthPlaces = 9
	widthSteps  = 14
)

// sharing returns the numbers of the elements of a crystal that have the width of
// their edges in common on the path; nil if fewer than two leave it open, or
// nowhere together.
func (w *weighedPath) sharing(of *weighing, place int) []int {
	var list []int
	for _, n := range of.members(place) {
		if w.ran(n) && !w.profiles[n].lens.edge.Fixed() {
			list = append(list, n)
		}
	}
	if len(list) < 2 {
		return nil
	}
	if lo, hi := w.widths(list); !(lo < hi) {
		return nil
	}
	return list
}

// widths is the range that the elements leave to their common width.
func (w *weighedPath) widths(list []int) (lo, hi float64) {
	lo, hi = math.Inf(-1), math.Inf(1)
	for _, n := range list {
		from, to := span(w.profiles[n].lens.edge, 0, math.Inf(1))
		lo, hi = math.Max(lo, from), math.Min(hi, to)
	}
	return lo, hi
}

// withEdge returns the profile with its edges of a known width; it shares all that
// was solved.
func (p *profile) withEdge(width float64) *profile {
	q, l := *p, *p.lens
	l.edge = study.Nuisance{Value: width}
	q.lens = &l
	q.fit.Bent = l.bent()
	return &q
}

// prior is what the common width adds to chi-square.
func (w *weighedPath) prior(list []int, width float64) float64 {
	if n := w.profiles[list[0]].lens.edge; !n.Ranged() {
		z := (width - n.Value) / n.Sigma
		return z * z
	}
	return 0
}

// common finds the common width at which the sum of the elements' chi-squares is
// least. fit fits an element with a width that is given.
func (w *weighedPath) common(list []int, fit func(p *profile) float64) (width, chiSq float64) {
	value := func(width float64) float64 {
		values := []float64{w.prior(list, width)}
		for _, n := range list {
			values = append(values, fit(w.profiles[n].withEdge(width)))
		}
		return sumOf(values)
	}
	lo, hi := w.widths(list)
	step := (hi - lo) / (widthPlaces - 1)
	chiSq = math.Inf(1)
	for k := range widthPlaces {
		x := lo + float64(k)*step
		if y := value(x); y < chiSq {
			width, chiSq = x, y
		}
	}
	a, b := math.Max(lo, width-step), math.Min(hi, width+step)
	x, y := golden(value, a, b)
	if y < chiSq {
		return x, y
	}
	return width, chiSq
}

// golden finds a minimum between a and b by the golden section.
func golden(f func(float64) float64, a, b float64) (x, y float64) {
	ratio := (math.Sqrt(5) - 1) / 2
	c, d := b-ratio*(b-a), a+ratio*(b-a)
	fc, fd := f(c), f(d)
	for range widthSteps {
		if fc <= fd {
			b, d, fd = d, c, fc
			c = b - ratio*(b-a)
			fc = f(c)
		} else {
			a, c, fc = c, d, fd
			d = a + ratio*(b-a)
			fd = f(d)
		}
	}
	if fc <= fd {
		return c, fc
	}
	return d, fd
}

// cost samples what sharing their width costs the elements.
func (w *weighedPath) cost(ctx context.Context, list []int) sampler {
	return func(lnM []float64) ([]float64, error) {
		var out []float64
		for part := range slices.Chunk(lnM, batch) {
			own := make([][]float64, len(part))
			for _, n := range list {
				solutions, err := w.profiles[n].solveFor(ctx, part)
				if err != nil {
					return nil, err
				}
				for k, s := range solutions {
					own[k] = append(own[k], s.ChiSq)
				}
			}
			for k := range part {
				_, joint := w.common(list, func(p *profile) float64 { return p.fitRun(k, nil).ChiSq })
				out = append(out, joint-sumOf(own[k]))
			}
		}
		return out, nil
	}
}

// share adds the curve of what sharing costs the elements of a crystal.
func (w *weighedPath) share(ctx context.Context, of *weighing, place int) error {
	w.shared[place] = Curve{}
	list := w.sharing(of, place)
	if list == nil {
		return nil
	}
	first := &w.curves[list[0]]
	c := Curve{Shared: true, Crystal: place, Law: first.Law, ByE: first.ByE}
	for k := range scanKnots {
		c.LnM = append(c.LnM, (2*float64(k)/(scanKnots-1)-1)*scanDecades*math.Ln10)
	}
	var err error
	if c.ChiSq, err = w.cost(ctx, list)(c.LnM); err != nil {
		return err
	}
	for _, x := range c.ChiSq {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return fmt.Errorf("paths: sharing the width of edges costs %g", x)
		}
	}
	c.settleSlopes()
	w.shared[place] = c
	return nil
}

// curve is one that goes into sums, with how it is sampled and where it is kept.
type curve struct {
	of     *Curve
	sample sampler
}

// gather returns the curves of a crystal's elements, and that of what sharing the
// width of their edges costs.
func (w *weighedPath) gather(ctx context.Context, of *weighing, place int) []curve {
	var list []curve
	for _, n := range of.members(place) {
		if w.ran(n) {
			list = append(list, curve{&w.curves[n], w.profiles[n].sampler(ctx)})
		}
	}
	if c := &w.shared[place]; c.Shared {
		list = append(list, curve{c, w.cost(ctx, w.sharing(of, place))})
	}
	return list
}

// sharpenAll sharpens the sum of the curves and keeps what becomes of them.
func sharpenAll(list []curve) error {
	var cs []Curve
	var each []sampler
	for _, c := range list {
		cs, each = append(cs, *c.of), append(each, c.sample)
	}
	err := sharpen(cs, each)
	for k, c := range list {
		*c.of = cs[k]
	}
	return err
}

// showShared fits the profiles of the path as it is again with the width that their
// crystal has in common, of which the results then tell.
func (w *weighedPath) showShared(of *weighing) error {
	for place := range of.crystals {
		if !w.shared[place].Shared {
			continue
		}
		list := w.sharing(of, place)
		for _, n := range list {
			if err := w.profiles[n].audit(0); err != nil {
				return err
			}
		}
		width, _ := w.common(list, func(p *profile) float64 { return p.fitRun(0, nil).ChiSq })
		for _, n := range list {
			p := w.profiles[n]
			r, err := p.withEdge(width).asItIs()
			if err != nil {
				return err
			}
			r.NumErr = math.Max(r.NumErr, w.results[n].NumErr)
			r.Free = append(r.Free, p.edgeFit(width))
			r.Notes = r.notes(p.path)
			w.results[n] = *r
		}
	}
	return nil
}
