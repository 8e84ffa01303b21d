package paths

import (
	"cmp"
	"math"
	"slices"
)

// A glance judges a member of a family by a plan of few cells and steps and by a curve
// of few multipliers, and says whether the verdict is beyond doubt: that it is the one
// that a path which is written out would get. By how much the two may differ was found
// for some members, see stepping.

// glanceDecades are the multipliers with which a glance begins, four times four that go
// side by side: some of those of a scan, and about 1 all.
var glanceDecades = [16]float64{-6, -4.5, -3.5, -2.5, -2, -1.5, -1, -0.5, 0, 0.5, 1, 1.5, 2, 3, 4, 6}

func glanceKnots() []float64 {
	var lnM []float64
	for _, x := range glanceDecades {
		lnM = append(lnM, x*math.Ln10)
	}
	return lnM
}

const (
	glanceNear   = 0.2  // of lnM: how near to a dip a knot is near
	glanceFar    = 30.0 // chi-square above what passes from which on a dip is far
	glanceRounds = 20
	doubts       = 2.0 // times the largest difference that was found between a glance and a path that is written out
)

// slack bounds by how much the root of chi-square, c standing for the critical one,
// differs between a glance and a path that is written out,
//
//	slack (1 + |root - c|):
//
// the root is a length in the space of the data, and moves by no more than what the
// model moves there.
type slack float64

// exactSlack is that by the exact plan, whose curve of few multipliers alone may miss the
// lowest chi-square.
const exactSlack slack = 1e-3

// side is 1 where chi-square is surely above the critical one of so many degrees of
// freedom for a path that is written out, -1 where it is surely below, else 0. By another
// plan there may be a degree more or less, since they are counted from the profile.
func (s slack) side(chiSq, confidence float64, degrees int) int {
	around := 0
	if s > exactSlack {
		around = 1
	}
	switch {
	case degrees < 1+around:
		return 0
	case s.clear(chiSq, Critical(confidence, degrees+around)) > 0:
		return 1
	case s.clear(chiSq, Critical(confidence, degrees-around)) < 0:
		return -1
	}
	return 0
}

// clear is the sign of chiSq - level, 0 where that is in doubt.
func (s slack) clear(chiSq, level float64) int {
	d := math.Sqrt(math.Max(chiSq, 0)) - math.Sqrt(math.Max(level, 0))
	switch {
	case !(math.Abs(d) > doubts*float64(s)*(1+math.Abs(d))):
		return 0
	case d > 0:
		return 1
	}
	return -1
}

// settle puts knots where the sum of the curves dips: at each lowest point until it
// stays, or near it where that is far above level.
func settle(cs []Curve, each []sampler, level float64) (sum Curve, err error) {
	sum = Sum(cs)
	for range glanceRounds {
		at := sum.unsettled(level)
		if len(at) == 0 {
			break
		}
		if sum, err = sampleAll(cs, each, at); err != nil {
			break
		}
	}
	return sum, err
}

// bounds returns the multiplier that agrees best and its 95 % interval. It puts knots at
// both and between, until they stay: sum is that of the curves.
func bounds(cs []Curve, each []sampler, sum Curve) (shift float64, shift95 [2]float64, err error) {
	var lnM, lo, hi float64
	for round := range glanceRounds {
		var best float64
		lnM, best = sum.Lowest()
		level := best + Critical(0.95, 1)
		lo, hi = sum.Below(level)
		wanted := []float64{sum.crossed(lo, level), lnM, sum.crossed(hi, level)}
		if round == 0 {
			wanted = append(wanted, (lo+lnM)/2, (lnM+hi)/2)
		}
		at := slices.DeleteFunc(wanted, func(x float64) bool { return math.IsInf(x, 0) || math.IsNaN(x) || sum.nearest(x) <= shiftError })
		if len(at) == 0 {
			break
		}
		if sum, err = sampleAll(cs, each, at); err != nil {
			return 0, shift95, err
		}
	}
	return math.Exp(lnM), [2]float64{math.Exp(lo), math.Exp(hi)}, nil
}

// crossed returns where a knot tells more of where the curve crosses level, which is at
// x as far as is known: there, or away from both knots about it if these have not seen
// level, since what is steep between them is met only slowly else; NaN if one of them has.
func (c *Curve) crossed(x, level float64) float64 {
	i, found := slices.BinarySearch(c.LnM, x)
	if found || i == 0 || i == len(c.LnM) {
		return math.NaN()
	}
	a, b := c.LnM[i-1], c.LnM[i]
	if math.Min(math.Abs(c.ChiSq[i-1]-level), math.Abs(c.ChiSq[i]-level)) <= curveError || b-a <= 4*shiftError {
		return math.NaN()
	}
	return math.Max(a+(b-a)/8, math.Min(x, b-(b-a)/8))
}

// sampleAll puts knots at the multipliers on all curves, and returns their sum.
func sampleAll(cs []Curve, each []sampler, at []float64) (Curve, error) {
	for k := range cs {
		if _, err := cs[k].sample(each[k], at); err != nil {
			return Curve{}, err
		}
	}
	return Sum(cs), nil
}

// unsettled returns where to put knots for dips of the curve, a few of the lowest, that
// have none which settle them.
func (c *Curve) unsettled(level float64) []float64 {
	type dip struct {
		low float64
		at  []float64
	}
	var dips []dip
	for i := range len(c.LnM) - 1 {
		x, low := c.piece(i).lowest()
		if !c.dips(i, x) {
			continue
		}
		if at := c.wanted(x, low, level); len(at) > 0 {
			dips = append(dips, dip{low, at})
		}
	}
	slices.SortFunc(dips, func(a, b dip) int { return cmp.Compare(a.low, b.low) })
	var at []float64
	for _, d := range dips[:min(len(dips), mostDips)] {
		at = append(at, d.at...)
	}
	slices.Sort(at)
	return slices.Compact(at)
}

// wanted returns the knots that a dip at x lacks: one at x, or near it if the dip is far
// above level, else one near it on either side too. By the slope from knots far apart it
// could stay in the wrong place.
func (c *Curve) wanted(x, low, level float64) (at []float64) {
	below, above := math.Inf(1), math.Inf(1) // how far knots are on either side of x
	on := math.Inf(1)
	value := low
	for k, knot := range c.LnM {
		if away := math.Abs(knot - x); away < on {
			on, value = away, c.ChiSq[k]
		}
		switch {
		case knot < x-shiftError:
			below = x - knot
		case knot > x+shiftError:
			above = math.Min(above, knot-x)
		}
	}
	if low-level > glanceFar+(value-low)/2 {
		if on > glanceNear {
			at = append(at, x)
		}
		return at
	}
	if on > shiftError {
		at = append(at, x)
	}
	if below > 2*glanceNear && !math.IsInf(below, 1) {
		at = append(at, x-glanceNear)
	}
	if above > 2*glanceNear && !math.IsInf(above, 1) {
		at = append(at, x+glanceNear)
	}
	return at
}

// glanced judges the curves of a glance, of which the sum is settled. It is not sure
// where a scan in full might give another verdict.
func (s slack) glanced(cs []Curve, each []sampler, sum *Curve, confidence float64) (f Finding, sure bool, err error) {
	lnM, best := sum.Lowest()
	nan := math.NaN()
	none := [2]float64{nan, nan}
	f = Finding{Points: sum.Points, Degrees: sum.Points - sum.Free, Misfit: sum.At(0), Shift: math.Exp(lnM), Shift68: none, Shift95: none, Tail: nan}
	side := s.side(f.Misfit, confidence, f.Degrees)
	if side == 0 {
		return f, false, nil
	}
	f.Tail = Tail(f.Misfit, f.Degrees)
	if f.decide(lnM, best, confidence); side < 0 {
		return f, true, nil
	}
	switch s.side(best, confidence, max(f.Degrees-1, 1)) {
	case -1:
		return f, s.clear(sum.lowestBeyond(lnM), best) > 0, nil
	case 0:
		return f, false, nil
	}
	if len(cs) < 2 {
		return f, true, nil
	}
	f.Verdict, sure, err = s.oddsOf(cs, each, confidence)
	return f, sure, err
}

// lowestBeyond is the least value of the curve on the other side of 0 than lnM.
func (c *Curve) lowestBeyond(lnM float64) float64 {
	low := c.At(0)
	for i := range len(c.LnM) - 1 {
		if q := c.piece(i); lnM > 0 && q.x1 <= 0 || lnM <= 0 && q.x0 >= 0 {
			_, y := q.lowest()
			low = math.Min(low, y)
		}
	}
	return low
}

// oddsOf tells the profiles that would pass each alone from those of a wrong shape.
func (s slack) oddsOf(cs []Curve, each []sampler, confidence float64) (v Verdict, sure bool, err error) {
	v, sure = AtOdds, true
	for k := range cs {
		degrees := cs[k].Points - cs[k].Free
		if _, err := settle(cs[k:k+1], each[k:k+1], Critical(confidence, max(degrees, 1))); err != nil {
			return v, false, err
		}
		_, best := cs[k].Lowest()
		switch s.side(best, confidence, degrees-1) {
		case 1:
			return WrongShape, true, nil
		case 0:
			sure = false
		}
	}
	return v, sure, nil
}
