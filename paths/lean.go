package paths

import (
	"math"

	"gonum.org/v1/gonum/optimize"
)

// LawPrior is how well a law is known: the standard deviations of ln D in the
// middle of its calibrated range and of the activation energy, J/mol. Both
// deviations are shared by all profiles that rest on the law.
type LawPrior struct {
	Key    string
	LnD, E float64
}

// leaning is the path with the laws allowed to deviate: chi-square with the
// deviations' own priors, and each law's deviations in standard deviations.
type leaning struct {
	chiSq float64
	laws  []Leaning // root of the sum of squares of both deviations
}

// lean minimises, over the deviations z of ln D and E of each law in units of
// their standard deviations,
//
//	sum over profiles of chi-square(shift) + sum of z^2,
//	shift = sD zD + ByE[0] sE zE + ByE[1] (sE zE)^2 / 2,
//
// from no deviation and from those that bring each profile to its own best.
func lean(cs []Curve, laws []LawPrior) leaning {
	objective := func(z []float64) float64 {
		sum := 0.0
		for i := range cs {
			sum += cs[i].At(cs[i].shift(z, laws))
		}
		for _, v := range z {
			sum += v * v
		}
		return sum
	}
	z := make([]float64, 2*len(laws))
	best := objective(z)
	for _, start := range leanStarts(cs, laws) {
		found, value := descend(objective, start)
		if value < best {
			z, best = found, value
		}
	}
	out := leaning{chiSq: best}
	for k, law := range laws {
		out.laws = append(out.laws, Leaning{law.Key, math.Hypot(z[2*k], z[2*k+1])})
	}
	return out
}

// shift returns by how much the laws' deviations move the profile along LnM.
func (c *Curve) shift(z []float64, laws []LawPrior) float64 {
	if c.Law == 0 {
		return 0
	}
	k := c.Law - 1
	e := z[2*k+1] * laws[k].E
	return z[2*k]*laws[k].LnD + e*(c.ByE[0]+e*c.ByE[1]/2)
}

// leanStarts returns no deviation and, for each profile, the likeliest
// deviations that bring it to its own lowest point.
func leanStarts(cs []Curve, laws []LawPrior) [][]float64 {
	starts := [][]float64{make([]float64, 2*len(laws))}
	for i := range cs {
		c := &cs[i]
		if c.Law == 0 {
			continue
		}
		k := c.Law - 1
		lnM, _ := c.Lowest()
		byD, byE := laws[k].LnD, laws[k].E*c.ByE[0]
		if norm := byD*byD + byE*byE; norm > 0 {
			z := make([]float64, 2*len(laws))
			z[2*k], z[2*k+1] = lnM*byD/norm, lnM*byE/norm
			starts = append(starts, z)
		}
	}
	return starts
}

// descend finds a minimum of f near z by the method of Nelder and Mead 1965,
// Computer J. 7, 308-313.
func descend(f func([]float64) float64, z []float64) ([]float64, float64) {
	if len(z) == 0 {
		return z, f(z)
	}
	result, err := optimize.Minimize(optimize.Problem{Func: f}, z, &optimize.Settings{
		Converger: &optimize.FunctionConverge{Absolute: leanError, Iterations: leanPatience},
	}, &optimize.NelderMead{})
	if err != nil || result == nil {
		return z, f(z)
	}
	return result.X, result.F
}

// When a fit of deviations has settled, in chi-square.
const (
	leanError    = 1e-7
	leanPatience = 40
)
