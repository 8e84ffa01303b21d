package paths

import (
	"math"
	"slices"

	"bankfire/paths/study"
)

// LawPrior is how well a law is known: the standard deviations of ln D in the
// middle of its calibrated range and of the activation energy, J/mol. Both
// deviations are shared by all profiles that rest on the law.
type LawPrior struct {
	Key    string
	LnD, E float64
}

// lean looks for deviations of the laws, z of ln D and E each in units of their
// standard deviations, and of the other constants on which the curves rest, that
// bring the path to the data:
//
//	misfit(z) = sum over profiles of chi-square(shift, z),
//	shift = sD zD + ByE[0] sE zE + ByE[1] (sE zE)^2 / 2 + sum of By.Shift z.
//
// It returns the least of misfit + sum of z^2, the deviations taken as values
// with a prior, and the smallest deviations with which the path alone passes,
// misfit(z) <= pass: nil if none do. They are those of ln D and E of each law and
// then those of the constants in the order of deviationsOf.
func lean(cs []Curve, laws []LawPrior, pass float64) (least float64, smallest []float64) {
	least, _, smallest = newLeaning(cs, laws).find(pass)
	return least, smallest
}

// find is lean, with the deviations of the least as well.
func (l *leaning) find(pass float64) (least float64, at, smallest []float64) {
	z := make([]float64, l.size())
	if l.misfit(z) <= pass {
		smallest = slices.Clone(z)
	}
	l.settle(z, 1)
	at = slices.Clone(z)
	if least = l.misfit(z) + dot(z, z); smallest != nil {
		return least, at, smallest
	}
	// the lower the price of a deviation, the closer the path comes to the data
	if l.settle(z, cheapest); !(l.misfit(z) <= pass) {
		return least, at, nil
	}
	smallest = slices.Clone(z)
	low, high := math.Log(cheapest), -math.Log(cheapest)
	for range priceSteps {
		mid := (low + high) / 2
		if l.settle(z, math.Exp(mid)); l.misfit(z) <= pass {
			copy(smallest, z)
			low = mid
		} else {
			high = mid
		}
	}
	return least, at, smallest
}

// How far the price of a deviation is lowered, and how finely it is found.
const (
	cheapest   = 1e-8
	priceSteps = 30
)

// leaning is the curves with what they rest on: two deviations a law, numbered first,
// and one of each constant on which a curve rests.
type leaning struct {
	cs     []Curve
	laws   []LawPrior
	others []study.Deviation
	vars   [][]int // of each curve, the numbers of its deviations: D and E of its law, if it has one, then those of other constants
	groups []leanGroup
	at, to basin // scratch, as the rest
	move   []float64
	part   pull
}

// leanGroup is deviations that have profiles in common, which are found together.
type leanGroup struct {
	vars   []int       // their numbers, ascending
	curves []int       // the curves that depend on them
	places [][]int     // of the deviations of each curve, in vars
	starts [][]float64 // deviations from which to descend, in the order of vars
}

// deviationsOf are the constants of other constants, in the order of the curves.
func deviationsOf(cs []Curve) []study.Deviation {
	var list []study.Deviation
	for i := range cs {
		if cs[i].By == nil {
			continue
		}
		for _, d := range cs[i].By.Of {
			if !slices.Contains(list, d) {
				list = append(list, d)
			}
		}
	}
	return list
}

func newLeaning(cs []Curve, laws []LawPrior) *leaning {
	l := &leaning{cs: cs, laws: laws, others: deviationsOf(cs)}
	for i := range cs {
		l.vars = append(l.vars, l.varsOf(&cs[i]))
	}
	for _, vars := range l.joined() {
		l.groups = append(l.groups, l.group(vars))
	}
	return l
}

func (l *leaning) size() int { return 2*len(l.laws) + len(l.others) }

// isLaw reports whether a deviation is one of a law's.
func (l *leaning) isLaw(v int) bool { return v < 2*len(l.laws) }

// law is the law of a curve, nil if it has none with errors.
func (l *leaning) law(c *Curve) *LawPrior {
	if c.Law == 0 {
		return nil
	}
	return &l.laws[c.Law-1]
}

// varsOf are the numbers of the deviations that a curve depends on.
func (l *leaning) varsOf(c *Curve) []int {
	var vars []int
	if c.Law > 0 {
		vars = append(vars, 2*c.Law-2, 2*c.Law-1)
	}
	if c.By != nil {
		for _, d := range c.By.Of {
			vars = append(vars, 2*len(l.laws)+slices.Index(l.others, d))
		}
	}
	return vars
}

// joined divides the deviations into those that have profiles in common.
func (l *leaning) joined() [][]int {
	of := make([]int, l.size()) // the least number of those that each is joined to
	for v := range of {
		of[v] = v
	}
	join := func(a, b int) {
		from, to := max(of[a], of[b]), min(of[a], of[b])
		for v := range of {
			if of[v] == from {
				of[v] = to
			}
		}
	}
	for k := range l.laws {
		join(2*k, 2*k+1)
	}
	for _, vars := range l.vars {
		for _, v := range vars {
			join(vars[0], v)
		}
	}
	var groups [][]int
	for first := range of {
		var vars []int
		for v := range of {
			if of[v] == first {
				vars = append(vars, v)
			}
		}
		if vars != nil {
			groups = append(groups, vars)
		}
	}
	return groups
}

// group gathers what depends on deviations, and from where to look for the best: from
// none, from the likeliest that bring a profile to its lowest points, and with constants
// off, see startOff.
func (l *leaning) group(vars []int) leanGroup {
	g := leanGroup{vars: vars}
	start := func(places []int, z []float64) {
		at := make([]float64, len(vars))
		for k, place := range places {
			at[place] = z[k]
		}
		l.within(vars, at)
		g.starts = append(g.starts, at)
	}
	start(nil, nil)
	for i := range l.cs {
		if len(l.vars[i]) == 0 || !slices.Contains(vars, l.vars[i][0]) {
			continue
		}
		var places []int
		for _, v := range l.vars[i] {
			places = append(places, slices.Index(vars, v))
		}
		g.curves, g.places = append(g.curves, i), append(g.places, places)
		for _, z := range leanStarts(&l.cs[i], l.law(&l.cs[i])) {
			start(places, z)
		}
	}
	l.startOff(&g)
	return g
}

func (l *leaning) misfit(z []float64) float64 {
	sum := 0.0
	for i := range l.cs {
		sum += l.cs[i].leant(l.own(i, z), l.law(&l.cs[i]))
	}
	return sum
}

// own are the deviations of curve i, in scratch.
func (l *leaning) own(i int, z []float64) []float64 {
	l.part.reset(len(l.vars[i]))
	for k, v := range l.vars[i] {
		l.part.z[k] = z[v]
	}
	return l.part.z
}

// settle leaves in z what minimises misfit(z) + price sum of z^2: of each group the
// best of the descents from all its starts.
func (l *leaning) settle(z []float64, price float64) {
	for k := range l.groups {
		g := &l.groups[k]
		least := math.Inf(1)
		for _, start := range l.promising(g, price) {
			value := l.descend(g, start, price)
			if value < least {
				least = value
				for i, v := range g.vars {
					z[v] = l.at.z[i]
				}
			}
		}
	}
}

func dot(a, b []float64) float64 {
	sum := 0.0
	for i := range a {
		sum += float64(a[i] * b[i])
	}
	return sum
}

// about leaves in b what the deviations b.z of a group cost: the chi-square of its
// profiles and the price of the deviations.
func (l *leaning) about(b *basin, g *leanGroup, price float64) {
	n := len(g.vars)
	b.value = price * dot(b.z, b.z)
	clear(b.bend)
	for i, x := range b.z {
		b.grad[i], b.bend[i*n+i] = 2*price*x, 2*price
	}
	for k, of := range g.curves {
		places, p := g.places[k], &l.part
		p.reset(len(places))
		for i, at := range places {
			p.z[i] = b.z[at]
		}
		p.read(&l.cs[of], l.law(&l.cs[of]))
		b.value += p.value
		for i, at := range places {
			b.grad[at] += p.grad[i]
			for j, other := range places {
				b.bend[at*n+other] += p.bend[i*len(places)+j]
			}
		}
	}
	for i, v := range g.vars { // one that would go on beyond the end of its range stays there
		if out := -math.Copysign(1, b.grad[i]); !l.isLaw(v) && b.z[i]*out >= mostDeviation {
			b.hold(i)
		}
	}
}

// descend finds a minimum of what a group's deviations cost near start, which it
// leaves in at, by Newton's method, its second derivatives raised as far as it takes to
// descend (Levenberg 1944, Quart. Appl. Math. 2, 164-168; Marquardt 1963, J. SIAM 11,
// 431-441).
func (l *leaning) descend(g *leanGroup, start []float64, price float64) float64 {
	n := len(start)
	l.at.reset(n)
	l.to.reset(n)
	l.move = append(l.move[:0], start...)
	copy(l.at.z, start)
	l.about(&l.at, g, price)
	damp := 0.0
	for range leanPatience {
		gain, ok := l.at.step(l.move, damp)
		if ok {
			l.advance(g)
			l.about(&l.to, g, price)
			if l.to.value <= l.at.value {
				l.at, l.to = l.to, l.at
				if gain < leanError {
					break
				}
				if damp /= leanDamp * leanDamp; damp < leanLeast*l.at.size() {
					damp = 0
				}
				continue
			}
			if gain < leanError {
				break
			}
		}
		damp = math.Max(leanDamp*damp, leanFirst*l.at.size())
	}
	return l.at.value
}

// advance leaves in to the deviations that the step makes of those in at, those by
// which curves rest on beside laws within their range.
func (l *leaning) advance(g *leanGroup) {
	for i := range g.vars {
		l.to.z[i] = l.at.z[i] + l.move[i]
	}
	l.within(g.vars, l.to.z)
}

// within brings deviations of constants that are beyond their range to its end.
func (l *leaning) within(vars []int, z []float64) {
	for i, v := range vars {
		if !l.isLaw(v) {
			z[i] = math.Min(math.Max(z[i], -mostDeviation), mostDeviation)
		}
	}
}

// When a fit of deviations has settled, in chi-square; how often it is improved at
// most; and its damping: the first as a part of the second derivatives, by what it is
// raised, and below which part it is none.
const (
	leanError    = 1e-10
	leanPatience = 200
	leanFirst    = 1e-3
	leanDamp     = 4.0
	leanLeast    = 1e-4
)
