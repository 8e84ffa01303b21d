package paths

import (
	"math"
	"slices"

	"bankfire/paths/study"
	"gonum.org/v1/gonum/mathext"
	"gonum.org/v1/gonum/stat/distuv"
)

// Verdict is what became of one path against the data.
type Verdict int

// The verdicts, in the order in which Judge looks for them, and the one it
// does not give: Barred is for a path that breaks a limit of the user's.
const (
	Unjudged   Verdict = iota // none, since no degrees of freedom are left, or it was never judged: does not pass
	Reproduces                // the path passes as it is
	TooSharp                  // it would pass with more diffusion
	TooSmooth                 // it would pass with less diffusion
	AtOdds                    // each profile would pass alone, with its own amount of diffusion
	WrongShape                // no amount of diffusion along this path passes
	Barred                    // the user rules it out
)

func (v Verdict) String() string {
	return [...]string{"not judged", "reproduces", "too sharp", "too smooth", "at odds", "wrong shape", "barred"}[v]
}

// Finding is what chi-square says of one profile, or of several jointly.
type Finding struct {
	Verdict Verdict
	Shift   float64    // the multiplier on D that agrees best
	Shift68 [2]float64 // its 68 % interval; 0 or +Inf at a side the data leave open
	Shift95 [2]float64 // its 95 % interval
	Tail    float64    // probability of a larger chi-square, were the path true; NaN if not judged
	Misfit  float64    // chi-square of the path as it is
	Above   float64    // Misfit less chi-square of each profile's own best fit
	Points  int        // data points
	Degrees int        // points less the values fitted without a prior
	Ranges  int        // how many separate ranges of multipliers make up the 95 % interval
}

// Outcome is the verdict on one path.
type Outcome struct {
	Finding              // joint
	Profiles []Finding   // each by itself, in the order of the curves
	Crystals []Finding   // the profiles of each crystal jointly, in the order in which the curves have them
	Scatter  Scatter     // of the crystals' amounts of diffusion
	Chance   Chance      // how many crystals fail, and would by chance
	WithLaws LawsAllowed // the same with the laws' own errors allowed for
	Odds     []Demand    // by how much profiles disagree, where all or those of a crystal are at odds; Judge leaves it empty
}

// LawsAllowed is the verdict when the laws may deviate within their errors. Its
// numbers are NaN where there is none.
type LawsAllowed struct {
	Verdict Verdict
	Tail    float64
	Misfit  float64   // chi-square with the deviations fitted, and their own added
	Leaning []Leaning // the smallest deviations with which the path passes, in the order of the laws, empty if there are none; nil if it does not pass
	Others  []Off     // those of other constants, with those of the laws
}

// Off is by how many standard deviations a path asks for a constant to be off, with its
// sign: above 0 if it is to be larger.
type Off struct {
	study.Deviation
	Sigma float64
}

// Leaning is by how many standard deviations, of ln D and E together, a path
// leans on a law.
type Leaning struct {
	Law    string
	Sigma  float64
	LnD, E float64 // of each, with its sign: above 0 if it is to be larger
}

// Judge weighs a path by the curves of the profiles it must satisfy, which
// share one multiplier m on D, at the given confidence (0.95, say). With
// p(m) the chi-square tail, at m degrees less one where m was chosen,
//
//	no degrees are left              not judged
//	p(1) passes                      reproduces
//	p(m*) passes at the best m*      too sharp (m* > 1) or too smooth (m* < 1)
//	each p(m*) at its own m*         at odds
//	neither                          wrong shape
//
// where to pass is to be no smaller than 1 - confidence. If m spends the last
// degree, what is left of chi-square is there because m met a bound, so that it
// counts as one again. What is not a number does not pass. The profiles of each
// crystal are judged jointly in the same way. The second verdict
// allows each of the laws to deviate, shared by all its profiles, at the cost
// of its prior, and so each other constant of Curve.By. Judge never solves. It panics if there are no curves.
func Judge(dst *Outcome, cs []Curve, laws []LawPrior, confidence float64) {
	dst.Profiles = dst.Profiles[:0]
	dst.Profiles = append(dst.Profiles, alone(cs, confidence)...)
	dst.Finding = jointly(cs, dst.Profiles, confidence)
	dst.Crystals = dst.Crystals[:0]
	of := byCrystal(cs)
	for _, own := range of {
		var curves []Curve
		for _, i := range own {
			curves = append(curves, cs[i])
		}
		dst.Crystals = append(dst.Crystals, jointly(curves, alone(curves, confidence), confidence))
	}
	dst.Scatter, dst.Chance = scatterOf(cs, of, dst.Crystals), chanceOf(dst.Crystals, confidence)
	dst.Odds = nil
	dst.WithLaws = allow(cs, laws, &dst.Finding, confidence)
}

// alone judges each profile by itself.
func alone(cs []Curve, confidence float64) []Finding {
	var each []Finding
	for i := range cs {
		if !cs[i].Shared {
			each = append(each, find(&cs[i], confidence))
		}
	}
	return each
}

// jointly judges several profiles, which have the findings each by itself.
func jointly(cs []Curve, each []Finding, confidence float64) Finding {
	sum := Sum(cs)
	f := find(&sum, confidence)
	if f.Verdict == WrongShape && len(each) > 1 && !slices.ContainsFunc(each, Finding.hopeless) {
		f.Verdict = AtOdds
	}
	return f
}

// byCrystal returns the numbers of the curves of each crystal, crystals in the
// order in which they first come.
func byCrystal(cs []Curve) [][]int {
	var of [][]int
	place := map[int]int{}
	for i := range cs {
		k, known := place[cs[i].Crystal]
		if !known {
			k = len(of)
			place[cs[i].Crystal] = k
			of = append(of, nil)
		}
		of[k] = append(of[k], i)
	}
	return of
}

// allow judges the path with the laws' own errors and those of other constants. It
// passes if the smallest deviations with which it does are no larger than they would be
// by chance at the confidence, one degree of freedom a law and one each other constant.
func allow(cs []Curve, laws []LawPrior, joint *Finding, confidence float64) LawsAllowed {
	out := LawsAllowed{Verdict: joint.Verdict, Tail: math.NaN(), Misfit: math.NaN()}
	if joint.Degrees < 1 || math.IsNaN(joint.Misfit) {
		return out
	}
	misfit, z := lean(cs, laws, Critical(confidence, joint.Degrees))
	out.Misfit, out.Tail = misfit, Tail(misfit, joint.Degrees)
	if z == nil {
		return out
	}
	out.Leaning = []Leaning{}
	for k, law := range laws {
		out.Leaning = append(out.Leaning, Leaning{law.Key, math.Hypot(z[2*k], z[2*k+1]), z[2*k], z[2*k+1]})
	}
	for k, d := range deviationsOf(cs) {
		out.Others = append(out.Others, Off{d, z[2*len(laws)+k]})
	}
	if n := len(out.Leaning) + len(out.Others); n > 0 && dot(z, z) <= Critical(confidence, n) {
		out.Verdict = Reproduces
	}
	return out
}

// hopeless reports whether no amount of diffusion passes, as far as is known.
func (f Finding) hopeless() bool { return f.Verdict == WrongShape || f.Verdict == Unjudged }

// find reads one curve.
func find(c *Curve, confidence float64) Finding {
	f := Finding{Points: c.Points, Degrees: c.Points - c.Free, Misfit: c.At(0)}
	f.Above = f.Misfit - c.Best
	if f.Tail = math.NaN(); f.Degrees > 0 {
		f.Tail = Tail(f.Misfit, f.Degrees)
	}
	lnM, best := c.Lowest()
	f.Shift = math.Exp(lnM)
	f.Shift68 = interval(c, best+Critical(0.68, 1))
	f.Shift95 = interval(c, best+Critical(0.95, 1))
	f.Ranges = c.Ranges(best + Critical(0.95, 1))
	f.decide(lnM, best, confidence)
	return f
}

// decide gives the verdict by the tail of the path as it is and the lowest
// chi-square, which is at lnM.
func (f *Finding) decide(lnM, best, confidence float64) {
	passes := func(tail float64) bool { return tail >= 1-confidence } // false for NaN
	switch {
	case f.Degrees < 1:
		f.Verdict = Unjudged
	case passes(f.Tail):
		f.Verdict = Reproduces
	case !passes(Tail(best, max(f.Degrees-1, 1))):
		f.Verdict = WrongShape
	case lnM > 0:
		f.Verdict = TooSharp
	default:
		f.Verdict = TooSmooth
	}
}

func interval(c *Curve, level float64) [2]float64 {
	lo, hi := c.Below(level)
	return [2]float64{math.Exp(lo), math.Exp(hi)}
}

// Tail returns the probability that chi-square with the given degrees of
// freedom exceeds x,
//
//	Q(degrees/2, x/2),
//
// the upper regularised incomplete gamma function (Abramowitz and Stegun 1964,
// 26.4), not formed as 1 - P. With no degrees left it is 1 where x is 0 to
// round-off, else 0.
func Tail(x float64, degrees int) float64 {
	switch {
	case math.IsNaN(x):
		return math.NaN()
	case degrees > 0:
		return mathext.GammaIncRegComp(float64(degrees)/2, math.Max(x, 0)/2)
	case x <= exactFit:
		return 1
	default:
		return 0
	}
}

// exactFit is the chi-square that round-off leaves where as many values are
// free as there are points.
const exactFit = 1e-9

// Critical returns the chi-square that a fraction confidence of repeats stays
// below, at the given degrees of freedom. With one degree it is also by how
// much chi-square rises above its lowest value at the ends of the interval of
// that confidence for one value, the others fitted again.
func Critical(confidence float64, degrees int) float64 {
	return distuv.ChiSquared{K: float64(degrees)}.Quantile(confidence)
}
