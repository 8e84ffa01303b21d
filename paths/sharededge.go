package paths

import (
	"context"
	"fmt"
	"math"
	"slices"
)

// Elements of one crystal that leave the width of their edges open have it in common:
// its zones grew as they grew, whatever is measured in them. The joint chi-square is
//
//	J(m) = least over w of the sum of chi-square(m, w) + the prior of w, once,
//
// w being the width, or one a boundary. The curve of what sharing costs, J less the sum
// of the profiles' own curves, goes with these as one more curve without points, so that
// sums of curves are joint ones. Along different multipliers, as deviations of laws make
// them, it is taken at that of the first of the profiles.

// How finely common widths are looked for: a few places over the range of each, then
// about the best of them down to a small part of the range. Several are looked for in
// turns, each time over half as much, until a turn gains less than widthGain of
// chi-square: boundaries that do not meet know little of each other.
const (
	widthPlaces = 9
	widthSteps  = 14
	widthTurns  = 12
	widthGain   = 1e-3
)

// sharedWidth is a width of edges that elements of a crystal have in common.
type sharedWidth struct {
	number int   // among those of the edges
	of     []int // the elements that leave it open
	lo, hi float64
}

// sharing are the widths that elements of a crystal have in common on a path.
type sharing struct {
	widths []sharedWidth
	of     []int // the elements that have any of them
}

// sharing returns the widths that elements of a crystal have in common on the path;
// nil if no two leave one open, or nowhere together.
func (w *weighedPath) sharing(of *weighing, place int) *sharing {
	var s sharing
	members := of.members(place)
	for k := range len(of.crystals[place].Zones) {
		one := sharedWidth{number: k, lo: math.Inf(-1), hi: math.Inf(1)}
		for _, n := range members {
			if !w.ran(n) {
				continue
			}
			if known := w.profiles[n].lens.edges.known; k < len(known) && !known[k].Fixed() {
				from, to := span(known[k], 0, math.Inf(1))
				one.of, one.lo, one.hi = append(one.of, n), math.Max(one.lo, from), math.Min(one.hi, to)
			}
		}
		if len(one.of) < 2 || !(one.lo < one.hi) {
			continue
		}
		s.widths = append(s.widths, one)
		for _, n := range one.of {
			if !slices.Contains(s.of, n) {
				s.of = append(s.of, n)
			}
		}
	}
	if s.widths == nil {
		return nil
	}
	slices.Sort(s.of)
	return &s
}

// known returns the profile of element n with the widths that it shares known; it
// shares all that was solved, and what its columns look like if that is known.
func (w *weighedPath) known(s *sharing, n int, widths []float64, seen *view) *profile {
	q, l := *w.profiles[n], *w.profiles[n].lens
	for i, one := range s.widths {
		if slices.Contains(one.of, n) {
			l.edges = l.edges.with(one.number, widths[i])
		}
	}
	q.lens = &l
	q.fit.Bent = l.bent()
	if seen != nil {
		v := *seen
		v.l, q.seen = &l, &v
	}
	return &q
}

// prior is what a common width adds to chi-square.
func (w *weighedPath) prior(one *sharedWidth, width float64) float64 {
	if n := w.profiles[one.of[0]].lens.edges.known[one.number]; !n.Ranged() {
		z := (width - n.Value) / n.Sigma
		return z * z
	}
	return 0
}

// columnsFor returns the columns of a profile, and of its redrawn hosts, that are to be
// fitted.
type columnsFor func(p *profile) (cols, drawn [][][]float64)

// beforeDiffusion are those of the start.
func beforeDiffusion(p *profile) (cols, drawn [][][]float64) {
	return p.starts(), p.startsOf(p.redrawn)
}

// ofRun are those that the runs left in their fields number k.
func ofRun(k int) columnsFor {
	return func(p *profile) (cols, drawn [][][]float64) { return p.columns(k), columnsOf(p.redrawn, k) }
}

// common finds the common widths at which the sum of the elements' chi-squares is
// least.
func (w *weighedPath) common(s *sharing, columns columnsFor) (widths []float64, chiSq float64) {
	fits := w.fits(s, columns)
	sum := func(widths []float64) float64 {
		var values []float64
		for i := range s.widths {
			values = append(values, w.prior(&s.widths[i], widths[i]))
		}
		for _, fit := range fits {
			values = append(values, fit(widths))
		}
		return sumOf(values)
	}
	for _, one := range s.widths {
		widths = append(widths, one.lo+(one.hi-one.lo)/2)
	}
	chiSq = math.Inf(1)
	for turn := range widthTurns {
		before := chiSq
		for i, one := range s.widths {
			value := func(x float64) float64 {
				tried := slices.Clone(widths)
				tried[i] = x
				return sum(tried)
			}
			step := (one.hi - one.lo) / (widthPlaces - 1)
			for k := range widthPlaces {
				if turn > 0 {
					break
				}
				x := one.lo + float64(k)*step
				if y := value(x); y < chiSq {
					widths[i], chiSq = x, y
				}
			}
			step = math.Ldexp(step, -turn)
			x, y := golden(value, math.Max(one.lo, widths[i]-step), math.Min(one.hi, widths[i]+step))
			if y < chiSq {
				widths[i], chiSq = x, y
			}
		}
		if len(s.widths) == 1 || before-chiSq < widthGain {
			break
		}
	}
	return widths, chiSq
}

// fits return chi-square of each element for widths that are known.
func (w *weighedPath) fits(s *sharing, columns columnsFor) []func(widths []float64) float64 {
	var out []func([]float64) float64
	for _, n := range s.of {
		p := w.profiles[n]
		cols, drawn := columns(p)
		seen := p.lens.look(cols)
		out = append(out, func(widths []float64) float64 {
			return w.known(s, n, widths, seen).fitHosts(cols, cols, drawn, nil).ChiSq
		})
	}
	return out
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

// cost samples what sharing their widths costs the elements.
func (w *weighedPath) cost(ctx context.Context, s *sharing) sampler {
	return func(lnM []float64) ([]float64, error) {
		var out []float64
		for part := range slices.Chunk(lnM, batch) {
			own := make([][]float64, len(part))
			for _, n := range s.of {
				solutions, err := w.profiles[n].solveFor(ctx, part)
				if err != nil {
					return nil, err
				}
				for k, at := range solutions {
					own[k] = append(own[k], at.ChiSq)
					w.tell(w.profiles[n], part[k], at.ChiSq)
				}
			}
			for k := range part {
				_, joint := w.common(s, ofRun(k))
				out = append(out, joint-sumOf(own[k]))
			}
		}
		return out, nil
	}
}

// share adds the curve of what sharing costs the elements of a crystal.
func (w *weighedPath) share(ctx context.Context, of *weighing, place int) error {
	w.shared[place] = Curve{}
	s := w.sharing(of, place)
	if s == nil {
		return nil
	}
	first := &w.curves[s.of[0]]
	c := Curve{Shared: true, Crystal: place, Law: first.Law, ByE: first.ByE}
	for k := range scanKnots {
		c.LnM = append(c.LnM, (2*float64(k)/(scanKnots-1)-1)*scanDecades*math.Ln10)
	}
	var err error
	if c.ChiSq, err = w.cost(ctx, s)(c.LnM); err != nil {
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

// tell keeps chi-square of a profile at a multiplier, which the sums that follow ask for
// again.
func (w *weighedPath) tell(p *profile, lnM, chiSq float64) {
	if w.told == nil {
		w.told = map[*profile]map[float64]float64{}
	}
	if w.told[p] == nil {
		w.told[p] = map[float64]float64{}
	}
	w.told[p][lnM] = chiSq
}

// sampler is that of an element's profile, which is not solved again where it was told.
func (w *weighedPath) sampler(ctx context.Context, p *profile) sampler {
	return func(lnM []float64) ([]float64, error) {
		values := make([]float64, len(lnM))
		for i, x := range lnM {
			chiSq, told := w.told[p][x]
			if !told {
				return p.sampler(ctx)(lnM)
			}
			values[i] = chiSq
		}
		return values, nil
	}
}

// curve is one that goes into sums, with how it is sampled and where it is kept.
type curve struct {
	of     *Curve
	sample sampler
}

// gather returns the curve of what sharing the width of their edges costs, and those of
// a crystal's elements, which it tells of.
func (w *weighedPath) gather(ctx context.Context, of *weighing, place int) []curve {
	var list []curve
	if c := &w.shared[place]; c.Shared {
		list = append(list, curve{c, w.cost(ctx, w.sharing(of, place))})
	}
	for _, n := range of.members(place) {
		if w.ran(n) {
			list = append(list, curve{&w.curves[n], w.sampler(ctx, w.profiles[n])})
		}
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

// showShared fits the profiles of the path as it is again with the widths that their
// crystal has in common, of which the results then tell.
func (w *weighedPath) showShared(of *weighing) error {
	for place := range of.crystals {
		if !w.shared[place].Shared {
			continue
		}
		s := w.sharing(of, place)
		for _, n := range s.of {
			if err := w.profiles[n].audit(0); err != nil {
				return err
			}
		}
		widths, _ := w.common(s, ofRun(0))
		for _, n := range s.of {
			p := w.profiles[n]
			r, err := w.known(s, n, widths, nil).asItIs()
			if err != nil {
				return err
			}
			r.NumErr = math.Max(r.NumErr, w.results[n].NumErr)
			for i, one := range s.widths {
				if slices.Contains(one.of, n) {
					r.Free = append(r.Free, p.edgeFit(one.number, widths[i]))
				}
			}
			r.Notes = r.notes(p.path)
			w.results[n] = *r
		}
	}
	return nil
}
