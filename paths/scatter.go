package paths

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Scatter compares the amounts of diffusion that the crystals of a path ask for,
// each its own multiplier m* on D with its error, with one value for all.
type Scatter struct {
	Crystals int        // that have a say: they pass with some amount of diffusion, the 68 % interval of which is closed
	Common   float64    // the one multiplier that suits these best
	Common68 [2]float64 // its 68 % interval
	Common95 [2]float64 // its 95 % interval
	ChiSq    float64    // by how much their chi-squares together rise from their own multipliers to the common one
	Degrees  int        // crystals less one
	Tail     float64    // of ChiSq; NaN, as are the other numbers, with fewer than three crystals
}

// leastScattered is how many amounts of diffusion it takes to speak of scatter.
const leastScattered = 3

// scatterOf compares the amounts of diffusion of the crystals, whose curves are
// numbered in of and whose joint findings are found. With chi-square of each
// crystal k a parabola in ln m, of standard deviation s_k, it is the usual
//
//	sum over k of ((ln m*_k - ln m)/s_k)^2 at the best common m,
//
// chi-square with one degree less than crystals; the curves themselves are used,
// so that lopsided errors count as they are.
func scatterOf(cs []Curve, of [][]int, found []Finding) Scatter {
	var curves []Curve
	own := 0.0
	out := Scatter{}
	for k, f := range found {
		if f.hopeless() || f.Verdict == AtOdds || !(f.Shift68[0] > 0) || math.IsInf(f.Shift68[1], 1) {
			continue
		}
		var crystal []Curve
		for _, i := range of[k] {
			crystal = append(crystal, cs[i])
		}
		sum := Sum(crystal)
		_, least := sum.Lowest()
		own += least
		curves = append(curves, sum)
		out.Crystals++
	}
	if out.Crystals < leastScattered {
		nan := math.NaN()
		none := [2]float64{nan, nan}
		return Scatter{Crystals: out.Crystals, Common: nan, Common68: none, Common95: none, ChiSq: nan, Tail: nan}
	}
	sum := Sum(curves)
	lnM, least := sum.Lowest()
	out.Common = math.Exp(lnM)
	out.Common68, out.Common95 = interval(&sum, least+Critical(0.68, 1)), interval(&sum, least+Critical(0.95, 1))
	out.ChiSq, out.Degrees = math.Max(least-own, 0), out.Crystals-1
	out.Tail = Tail(out.ChiSq, out.Degrees)
	return out
}

// Chance says how many of the crystals fail, and how many would along a path that
// is true. Its numbers are 0 with fewer than two crystals.
type Chance struct {
	Judged   int     // crystals
	Failed   int     // of them, do not pass the path as it is
	Expected float64 // mean of the number that fails by chance
	Most     int     // that fails by chance in 95 of 100 studies, at most
	Worst    float64 // probability that the smallest of so many tails is by chance as small as it is here
}

// chanceOf counts the crystals that fail at a confidence c. Of N that are judged
// each fails by chance with the probability 1 - c, so that their number is
// binomial; all their tails are above t with the probability (1 - t)^N.
func chanceOf(found []Finding, confidence float64) Chance {
	var out Chance
	least := 1.0
	for _, f := range found {
		if f.Verdict == Unjudged || f.Verdict == Barred {
			continue
		}
		out.Judged++
		if f.Verdict != Reproduces {
			out.Failed++
		}
		least = math.Min(least, f.Tail)
	}
	if out.Judged < 2 {
		return Chance{}
	}
	n := float64(out.Judged)
	fails := distuv.Binomial{N: n, P: 1 - confidence}
	out.Expected = n * (1 - confidence)
	for fails.CDF(float64(out.Most)) < 0.95 && out.Most < out.Judged {
		out.Most++
	}
	out.Worst = -math.Expm1(n * math.Log1p(-least))
	return out
}

// Allows reports whether chance may well have done it, at the confidence: no more
// crystals fail than do in 95 of 100 studies, and none so badly that no true path
// would see it among so many.
func (c *Chance) Allows(confidence float64) bool {
	return c.Failed <= c.Most && c.Worst >= 1-confidence
}
