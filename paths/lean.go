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
	l := leaning{cs, laws}
	_, least = l.settle(1)
	none := make([]float64, 2*len(laws))
	if l.misfit(none) <= pass {
		return least, none
	}
	// the lower the price of a deviation, the closer the path comes to the data
	if smallest, _ = l.settle(cheapest); !(l.misfit(smallest) <= pass) {
		return least, nil
	}
	low, high := math.Log(cheapest), -math.Log(cheapest)
	for range priceSteps {
		mid := (low + high) / 2
		if z, _ := l.settle(math.Exp(mid)); l.misfit(z) <= pass {
			smallest, low = z, mid
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

// leaning is the curves with the laws that they rest on.
type leaning struct {
	cs   []Curve
	laws []LawPrior
}

func (l *leaning) misfit(z []float64) float64 {
	sum := 0.0
	for i := range l.cs {
		sum += l.cs[i].At(l.cs[i].shift(z, l.laws))
	}
	return sum
}

// settle minimises misfit(z) + price sum of z^2, from no deviation and from
// those that bring each profile to its own best.
func (l *leaning) settle(price float64) (z []float64, value float64) {
	objective := func(z []float64) float64 { return l.misfit(z) + price*dot(z, z) }
	z = make([]float64, 2*len(l.laws))
	value = objective(z)
	for _, start := range leanStarts(l.cs, l.laws) {
		if found, v := descend(objective, start); v < value {
			z, value = found, v
		}
	}
	return z, value
}

func dot(a, b []float64) float64 {
	sum := 0.0
	for i := range a {
		sum += float64(a[i] * b[i])
	}
	return sum
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
