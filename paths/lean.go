package paths

import (
	"cmp"
	"math"
	"slices"
)

// LawPrior is how well a law is known: the standard deviations of ln D in the
// middle of its calibrated range and of the activation energy, J/mol. Both
// deviations are shared by all profiles that rest on the law.
type LawPrior struct {
	Key    string
	LnD, E float64
}

// lean looks for deviations of the laws, z of ln D and E each in units of their
// standard deviations, that bring the path to the data:
//
//	misfit(z) = sum over profiles of chi-square(shift),
//	shift = sD zD + ByE[0] sE zE + ByE[1] (sE zE)^2 / 2.
//
// It returns the least of misfit + sum of z^2, the deviations taken as values
// with a prior, and the smallest deviations with which the path alone passes,
// misfit(z) <= pass: nil if none do.
func lean(cs []Curve, laws []LawPrior, pass float64) (least float64, smallest []float64) {
	l := newLeaning(cs, laws)
	z := make([]float64, 2*len(laws))
	if l.misfit(z) <= pass {
		smallest = slices.Clone(z)
	}
	l.settle(z, 1)
	if least = l.misfit(z) + dot(z, z); smallest != nil {
		return least, smallest
	}
	// the lower the price of a deviation, the closer the path comes to the data
	if l.settle(z, cheapest); !(l.misfit(z) <= pass) {
		return least, nil
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
	return least, smallest
}

// How far the price of a deviation is lowered, and how finely it is found.
const (
	cheapest   = 1e-8
	priceSteps = 30
)

// leaning is the curves with the laws that they rest on. Laws have no profile in
// common, so that each law's two deviations are found by themselves.
type leaning struct {
	cs     []Curve
	laws   []LawPrior
	of     [][]int        // the curves of each law
	starts [][][2]float64 // of each law, deviations from which to descend
}

func newLeaning(cs []Curve, laws []LawPrior) *leaning {
	l := &leaning{cs: cs, laws: laws, of: make([][]int, len(laws)), starts: make([][][2]float64, len(laws))}
	for k := range laws {
		l.starts[k] = append(l.starts[k], [2]float64{})
	}
	for i := range cs {
		if k := cs[i].Law - 1; k >= 0 {
			l.of[k] = append(l.of[k], i)
			l.starts[k] = append(l.starts[k], leanStarts(&cs[i], laws[k])...)
		}
	}
	return l
}

func (l *leaning) misfit(z []float64) float64 {
	sum := 0.0
	for i := range l.cs {
		sum += l.cs[i].At(l.cs[i].shift(z, l.laws))
	}
	return sum
}

// settle leaves in z what minimises misfit(z) + price sum of z^2: of each law the
// best of the descents from all its starts.
func (l *leaning) settle(z []float64, price float64) {
	for k := range l.laws {
		best, least := [2]float64{}, math.Inf(1)
		for _, start := range l.starts[k] {
			if at, value := l.descend(k, start, price); value < least {
				best, least = at, value
			}
		}
		z[2*k], z[2*k+1] = best[0], best[1]
	}
}

func dot(a, b []float64) float64 {
	sum := 0.0
	for i := range a {
		sum += float64(a[i] * b[i])
	}
	return sum
}

// bowl2 is a function of two deviations about a point: value, gradient and second
// derivatives.
type bowl2 struct {
	value, d, e, dd, de, ee float64
}

// about is what law k's deviations z cost: the chi-square of its profiles and the
// price of the deviations.
func (l *leaning) about(k int, z [2]float64, price float64) bowl2 {
	b := bowl2{value: price * (z[0]*z[0] + z[1]*z[1]), d: 2 * price * z[0], e: 2 * price * z[1], dd: 2 * price, ee: 2 * price}
	byD, sigmaE := l.laws[k].LnD, l.laws[k].E
	for _, i := range l.of[k] {
		c := &l.cs[i]
		dev := z[1] * sigmaE
		byE := sigmaE * (c.ByE[0] + dev*c.ByE[1])
		value, slope, bend := c.bend(z[0]*byD + dev*(c.ByE[0]+dev*c.ByE[1]/2))
		b.value += value
		b.d += slope * byD
		b.e += slope * byE
		b.dd += bend * byD * byD
		b.de += bend * byD * byE
		b.ee += bend*byE*byE + slope*c.ByE[1]*sigmaE*sigmaE
	}
	return b
}

// step returns where the parabola about the point has its lowest point, its second
// derivatives raised by damp, and how far that is below. It is not ok where the
// parabola has none.
func (b *bowl2) step(damp float64) (d, e, gain float64, ok bool) {
	dd, ee := b.dd+damp, b.ee+damp
	det := dd*ee - b.de*b.de
	if !(dd > 0) || !(det > 0) {
		return 0, 0, 0, false
	}
	d, e = (b.de*b.e-ee*b.d)/det, (b.de*b.d-dd*b.e)/det
	return d, e, -(b.d*d + b.e*e) / 2, true
}

// descend finds a minimum of what law k's deviations cost near z by Newton's method,
// its second derivatives raised as far as it takes to descend (Levenberg 1944, Quart.
// Appl. Math. 2, 164-168; Marquardt 1963, J. SIAM 11, 431-441).
func (l *leaning) descend(k int, z [2]float64, price float64) ([2]float64, float64) {
	at, damp := l.about(k, z, price), 0.0
	for range leanPatience {
		d, e, gain, ok := at.step(damp)
		if ok {
			next := [2]float64{z[0] + d, z[1] + e}
			to := l.about(k, next, price)
			if to.value <= at.value {
				z, at = next, to
				if gain < leanError {
					break
				}
				if damp /= leanDamp * leanDamp; damp < leanLeast*(math.Abs(at.dd)+math.Abs(at.ee)) {
					damp = 0
				}
				continue
			}
			if gain < leanError {
				break
			}
		}
		damp = math.Max(leanDamp*damp, leanFirst*(math.Abs(at.dd)+math.Abs(at.ee)))
	}
	return z, at.value
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

// shift returns by how much the laws' deviations move the profile along LnM.
func (c *Curve) shift(z []float64, laws []LawPrior) float64 {
	if c.Law == 0 {
		return 0
	}
	k := c.Law - 1
	e := z[2*k+1] * laws[k].E
	return z[2*k]*laws[k].LnD + e*(c.ByE[0]+e*c.ByE[1]/2)
}

// leanStarts returns the likeliest deviations of a law that bring a profile which
// rests on it to each of its lowest points, mostDips of the lowest.
func leanStarts(c *Curve, law LawPrior) [][2]float64 {
	byD, byE := law.LnD, law.E*c.ByE[0]
	norm := byD*byD + byE*byE
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
	var starts [][2]float64
	for _, at := range dips[:min(len(dips), mostDips)] {
		starts = append(starts, [2]float64{at.x * byD / norm, at.x * byE / norm})
	}
	return starts
}
