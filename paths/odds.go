package paths

import (
	"cmp"
	"math"
	"slices"
)

// Demand is by how much two profiles of a path disagree: each passes alone, with
// its own amount of diffusion, and the two with none that they share. Were the path
// true, D of one would have to be Ratio times what its law says relative to D of
// the other.
type Demand struct {
	Of, To  int        // the profiles, counted in the order of the curves: Of asks for more diffusion than To
	Ratio   float64    // of their own best multipliers on D, at least 1
	Ratio68 [2]float64 // its 68 % interval; 0 or +Inf at a side the data leave open
	Ratio95 [2]float64 // its 95 % interval
	ChiSq   float64    // by how much the chi-squares of the two rise from their own multipliers to the best common one
}

// mostDemands is how many pairs of profiles at odds are listed at most.
const mostDemands = 10

// Demands compares, two by two, the profiles that pass alone, which have the
// findings each. Those pairs are listed whose ratio cannot be 1 at the confidence,
// those that disagree most first. The interval is that of the profile likelihood of
// d = ln Ratio, in which the amount of diffusion itself is fitted again for each d,
//
//	min over x of (chi-square_Of(x + d) + chi-square_To(x)).
func Demands(cs []Curve, each []Finding, confidence float64) []Demand {
	var list []Demand
	for j := range cs {
		for i := range j {
			if each[i].hopeless() || each[j].hopeless() {
				continue
			}
			if d := disagree(cs, i, j); d.ChiSq > Critical(confidence, 1) {
				list = append(list, d)
			}
		}
	}
	slices.SortStableFunc(list, func(a, b Demand) int { return cmp.Compare(b.ChiSq, a.ChiSq) })
	list = list[:min(len(list), mostDemands)]
	for k := range list {
		d := &list[k]
		d.Ratio68 = ratioInterval(&cs[d.Of], &cs[d.To], Critical(0.68, 1))
		d.Ratio95 = ratioInterval(&cs[d.Of], &cs[d.To], Critical(0.95, 1))
	}
	return list
}

// disagree compares two profiles, without the intervals.
func disagree(cs []Curve, i, j int) Demand {
	sum := Sum([]Curve{cs[i], cs[j]})
	_, together := sum.Lowest()
	x, own := cs[i].Lowest()
	y, other := cs[j].Lowest()
	if x < y {
		i, j = j, i
	}
	return Demand{Of: i, To: j, Ratio: math.Exp(math.Abs(x - y)), ChiSq: math.Max(together-own-other, 0)}
}

// ratioInterval returns the interval of the ratio of the multipliers of a and b
// whose chi-squares together rise by no more than level. Of that a may spend a part
// u and b what is left, so that ln of the ratio reaches up to
//
//	max over u of (upper end of a at a rise of u - lower end of b at one of level - u),
//
// and likewise down, with u = level sin^2 t: two parabolas make a sine of t.
func ratioInterval(a, b *Curve, level float64) [2]float64 {
	_, least := a.Lowest()
	_, other := b.Lowest()
	ends := func(t float64) (lo, hi float64) {
		part := square(math.Sin(t))
		aLo, aHi := a.Below(least + level*part)
		bLo, bHi := b.Below(other + level*(1-part))
		return aLo - bHi, aHi - bLo
	}
	lo := -highest(func(t float64) float64 { lo, _ := ends(t); return -lo })
	hi := highest(func(t float64) float64 { _, hi := ends(t); return hi })
	return [2]float64{math.Exp(lo), math.Exp(hi)}
}

func square(x float64) float64 { return x * x }

// How finely the parts are looked through from 0 to pi/2, and then divided by
// golden section about the best: two parabolas are met to 1e-9 of their interval.
const (
	partSteps  = 32
	partGolden = 24
)

// highest returns the highest value of f between 0 and pi/2, which is smooth but
// for what the shapes of the curves do to it. What is not a number is passed over.
func highest(f func(t float64) float64) float64 {
	const step = math.Pi / 2 / partSteps
	best, at := math.Inf(-1), 0.0
	for i := range partSteps + 1 {
		t := float64(i) * step
		if v := f(t); v > best {
			best, at = v, t
		}
	}
	lo, hi := math.Max(at-step, 0), math.Min(at+step, math.Pi/2)
	const golden = math.Phi - 1
	for range partGolden {
		x, y := hi-golden*(hi-lo), lo+golden*(hi-lo)
		vx, vy := f(x), f(y)
		best = math.Max(best, math.Max(vx, vy))
		if vx > vy {
			hi = y
		} else {
			lo = x
		}
	}
	return best
}
