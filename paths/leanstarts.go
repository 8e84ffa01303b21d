package paths

import (
	"cmp"
	"math"
	"slices"
)

// Where constants are off at the start of a descent, how many of them in all
// combinations, and from how many starts with constants off it goes at each price.
const (
	startsOff    = 2.0
	mostTogether = 3
	mostDescents = 24
)

// leanStarts returns the likeliest deviations that bring a profile to each of its
// lowest points, mostDips of the lowest. Its law is nil if that has no errors.
func leanStarts(c *Curve, law *LawPrior) [][]float64 {
	along := c.along(nil, law)
	norm := dot(along, along)
	if !(norm > 0) {
		return nil
	}
	type dip struct{ x, y float64 }
	var dips []dip
	for i := range len(c.LnM) - 1 {
		x, y := c.piece(i).lowest()
		if c.dips(i, x) && (len(dips) == 0 || dips[len(dips)-1].x != x) {
			dips = append(dips, dip{x, y})
		}
	}
	slices.SortStableFunc(dips, func(a, b dip) int { return cmp.Compare(a.y, b.y) })
	var starts [][]float64
	for _, at := range dips[:min(len(dips), mostDips)] {
		z := make([]float64, len(along))
		for k, x := range along {
			z[k] = at.x * x / norm
		}
		starts = append(starts, z)
	}
	return starts
}

// startOff adds starts with constants off either way: in all combinations, or if there
// are many each by itself, and with the law of each profile off by what brings it to one
// of its lowest knots then.
func (l *leaning) startOff(g *leanGroup) {
	var places []int
	for k, v := range g.vars {
		if !l.isLaw(v) {
			places = append(places, k)
		}
	}
	for _, off := range combinations(len(places)) {
		start := make([]float64, len(g.vars))
		for k, place := range places {
			start[place] = off[k]
		}
		g.starts = append(g.starts, start)
		for k, i := range g.curves {
			if c := &l.cs[i]; c.By != nil && c.Law > 0 {
				g.starts = append(g.starts, c.startOff(start, g.places[k], l.law(c))...)
			}
		}
	}
}

// startOff returns the start with deviations of the curve's law, at its first two places,
// such that it is read at its lowest knots.
func (c *Curve) startOff(start []float64, places []int, law *LawPrior) [][]float64 {
	z := make([]float64, len(places))
	for k, place := range places {
		z[k] = start[place]
	}
	d, e := law.LnD, law.E*c.ByE[0]
	norm := d*d + e*e
	if !(norm > 0) {
		return nil
	}
	at := c.shift(z, law)
	var starts [][]float64
	for _, x := range c.lowKnots(z[2:]) {
		moved := slices.Clone(start)
		moved[places[0]], moved[places[1]] = d*(x-at)/norm, e*(x-at)/norm
		starts = append(starts, moved)
	}
	return starts
}

// lowKnots are the knots at which the curve is lower than at those on either side, with
// constants off, mostDips of the lowest.
func (c *Curve) lowKnots(off []float64) []float64 {
	values := make([]float64, len(c.LnM))
	for i, x := range c.LnM {
		values[i] = c.with(x, off)
	}
	var low []int
	for i, v := range values {
		if (i == 0 || v < values[i-1]) && (i+1 == len(values) || v <= values[i+1]) {
			low = append(low, i)
		}
	}
	slices.SortStableFunc(low, func(a, b int) int { return cmp.Compare(values[a], values[b]) })
	var out []float64
	for _, i := range low[:min(len(low), mostDips)] {
		out = append(out, c.LnM[i])
	}
	return out
}

// combinations are those of n constants off either way or not, but for none off.
func combinations(n int) [][]float64 {
	var all [][]float64
	if n > mostTogether {
		for k := range n {
			for _, x := range []float64{startsOff, -startsOff} {
				off := make([]float64, n)
				off[k] = x
				all = append(all, off)
			}
		}
		return all
	}
	total := int(math.Pow(3, float64(n)))
	for code := 1; code < total; code++ {
		off := make([]float64, n)
		for k, rest := 0, code; k < n; k, rest = k+1, rest/3 {
			off[k] = [...]float64{0, startsOff, -startsOff}[rest%3]
		}
		all = append(all, off)
	}
	return all
}

// promising are the starts from which to descend: those without constants off, and of a
// group with others the cheapest.
func (l *leaning) promising(g *leanGroup, price float64) [][]float64 {
	if !slices.ContainsFunc(g.vars, func(v int) bool { return !l.isLaw(v) }) || len(g.starts) <= mostDescents {
		return g.starts
	}
	cost := make([]float64, len(g.starts))
	order := make([]int, len(g.starts))
	l.at.reset(len(g.vars))
	for i, z := range g.starts {
		copy(l.at.z, z)
		l.about(&l.at, g, price)
		cost[i], order[i] = l.at.value, i
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(cost[a], cost[b]) })
	var out [][]float64
	for _, i := range order[:mostDescents] {
		out = append(out, g.starts[i])
	}
	return out
}
