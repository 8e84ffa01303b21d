package paths

import (
	"fmt"
	"math"
	"slices"
)

// Curve is one profile on one path: chi-square against the logarithm of a
// multiplier on D, with the profile's own free values fitted at every knot.
// Between knots it is a cubic Hermite polynomial, beyond them constant.
type Curve struct {
	LnM, ChiSq, Slope []float64  // knots, LnM ascending, at least three
	Still, Full       float64    // chi-square without any diffusion, and after diffusion without end
	Best              float64    // chi-square of the profile's own best fit
	Points            int        // data points
	Free              int        // degrees of freedom that values fitted from the points alone take
	Shared            bool       // of no profile, but of what sharing a value costs those of its crystal
	Crystal           int        // the crystal it was measured in: those of one number are judged jointly as well
	Law               int        // the law it rests on, counted from 1 among Judge's laws; 0 if that has no errors
	ByE               [2]float64 // first and second derivative of ln G by the law's activation energy, mol/J
	By                *By        // what deviations of other constants make of it; nil if none do
}

// At returns chi-square at lnM.
func (c *Curve) At(lnM float64) float64 {
	chi, _ := c.at(lnM)
	return chi
}

// at returns value and slope at lnM.
func (c *Curve) at(lnM float64) (value, slope float64) {
	i, found := slices.BinarySearch(c.LnM, lnM)
	switch {
	case found:
		return c.ChiSq[i], c.Slope[i]
	case i == 0:
		return c.ChiSq[0], 0
	case i == len(c.LnM):
		return c.ChiSq[i-1], 0
	}
	return c.piece(i - 1).at(lnM)
}

// bend returns value, slope and second derivative at lnM, where that jumps at a knot
// from the side above it.
func (c *Curve) bend(lnM float64) (value, slope, bend float64) {
	return hermite(c.LnM, c.ChiSq, c.Slope, lnM)
}

// hermite returns value, slope and second derivative at x of the cubic Hermite
// polynomial with values ys and slopes at the knots xs, beyond which it is constant. The
// second derivative jumps at a knot from the side above it.
func hermite(xs, ys, slopes []float64, x float64) (value, slope, bend float64) {
	i, found := slices.BinarySearch(xs, x)
	last := len(xs) - 1
	piece := func(i int) cubic { return cubic{xs[i], xs[i+1], ys[i], ys[i+1], slopes[i], slopes[i+1]} }
	switch {
	case found && i < last:
		return ys[i], slopes[i], piece(i).bend(x)
	case found:
		return ys[i], slopes[i], 0
	case i == 0:
		return ys[0], 0, 0
	case i > last:
		return ys[last], 0, 0
	}
	q := piece(i - 1)
	value, slope = q.at(x)
	return value, slope, q.bend(x)
}

// cubic is one piece of a curve: value and slope at both ends.
type cubic struct{ x0, x1, y0, y1, s0, s1 float64 }

func (c *Curve) piece(i int) cubic {
	return cubic{c.LnM[i], c.LnM[i+1], c.ChiSq[i], c.ChiSq[i+1], c.Slope[i], c.Slope[i+1]}
}

// at returns value and slope at x.
func (q cubic) at(x float64) (value, slope float64) {
	h := q.x1 - q.x0
	t := (x - q.x0) / h
	rise := q.y1 - q.y0
	b := 3*rise - h*(2*q.s0+q.s1)
	a := h*(q.s0+q.s1) - 2*rise
	return q.y0 + t*(h*q.s0+t*(b+t*a)), q.s0 + t*(2*b+3*t*a)/h
}

// bend returns the second derivative at x.
func (q cubic) bend(x float64) float64 {
	h := q.x1 - q.x0
	t := (x - q.x0) / h
	rise := q.y1 - q.y0
	b := 3*rise - h*(2*q.s0+q.s1)
	a := h*(q.s0+q.s1) - 2*rise
	return (2*b + 6*a*t) / (h * h)
}

// turns returns the ends of the piece and, between them, where it turns,
// ascending: from each to the next it only rises or only falls.
func (q cubic) turns() []float64 {
	h, rise := q.x1-q.x0, q.y1-q.y0
	b := 3*rise - h*(2*q.s0+q.s1)
	a := h*(q.s0+q.s1) - 2*rise
	xs := append(make([]float64, 0, 4), q.x0, q.x1)
	for _, t := range quadraticRoots(3*a, 2*b, h*q.s0) {
		if x := q.x0 + t*h; x > q.x0 && x < q.x1 {
			xs = append(xs, x)
		}
	}
	slices.Sort(xs)
	return xs
}

// value returns the piece at x, at its ends exactly their values.
func (q cubic) value(x float64) float64 {
	switch x {
	case q.x0:
		return q.y0
	case q.x1:
		return q.y1
	}
	y, _ := q.at(x)
	return y
}

// lowest returns the least value of the piece and where it is.
func (q cubic) lowest() (x, y float64) {
	y = math.Inf(1)
	for _, turn := range q.turns() {
		if v := q.value(turn); v < y {
			x, y = turn, v
		}
	}
	return x, y
}

// quadraticRoots returns the real roots of a t^2 + b t + c, without the loss
// of digits where one is much smaller than the other.
func quadraticRoots(a, b, c float64) []float64 {
	d := b*b - 4*a*c
	if !(d >= 0) {
		return nil
	}
	q := -(b + math.Copysign(math.Sqrt(d), b)) / 2
	var roots []float64
	if a != 0 {
		roots = append(roots, q/a)
	}
	if q != 0 {
		roots = append(roots, c/q)
	}
	return roots
}

// Lowest returns the least chi-square of the curve and where it is.
func (c *Curve) Lowest() (lnM, chiSq float64) {
	lnM, chiSq = c.LnM[0], c.ChiSq[0]
	for i := range len(c.LnM) - 1 {
		if x, y := c.piece(i).lowest(); y < chiSq {
			lnM, chiSq = x, y
		}
	}
	return lnM, chiSq
}

// Below returns the smallest interval that holds every lnM at which chi-square
// does not exceed level. An end that is not reached within the knots is
// infinite: the profile sets no bound on that side.
func (c *Curve) Below(level float64) (lo, hi float64) {
	lo, hi = math.Inf(-1), math.Inf(1)
	last := len(c.LnM) - 1
	if c.ChiSq[0] > level {
		lo = c.crossing(level, 0, 1)
	}
	if c.ChiSq[last] > level {
		hi = c.crossing(level, last, -1)
	}
	return lo, hi
}

// crossing returns the first lnM, walking from knot from in the direction
// step, at which the curve comes down to level; NaN if it never does.
func (c *Curve) crossing(level float64, from, step int) float64 {
	for i := from; i+step >= 0 && i+step < len(c.LnM); i += step {
		q := c.piece(min(i, i+step))
		turns := q.turns()
		if step < 0 {
			slices.Reverse(turns)
		}
		for k := 1; k < len(turns); k++ {
			if q.value(turns[k]) <= level {
				return bisect(func(x float64) bool { return q.value(x) > level }, turns[k-1], turns[k])
			}
		}
	}
	return math.NaN()
}

// bisect returns the border between outside, where far(x) holds, and inside,
// to round-off.
func bisect(far func(float64) bool, outside, inside float64) float64 {
	for range 60 {
		mid := outside + (inside-outside)/2
		if far(mid) {
			outside = mid
		} else {
			inside = mid
		}
	}
	return inside
}

// Ranges returns how many separate ranges of lnM have a chi-square of no more
// than level.
func (c *Curve) Ranges(level float64) int {
	n := 0
	inside := false
	see := func(y float64) {
		if y <= level && !inside {
			n++
		}
		inside = y <= level
	}
	for i := range len(c.LnM) - 1 {
		q := c.piece(i)
		for _, x := range q.turns() {
			see(q.value(x))
		}
	}
	return n
}

// parabolaSlopes fills dst with the derivative, at each x, of the parabola
// through its point (x, y) and its neighbours; there are at least three points.
func parabolaSlopes(dst, x, y []float64) {
	for i := range dst {
		j := min(max(i, 1), len(x)-2)
		d01 := (y[j] - y[j-1]) / (x[j] - x[j-1])
		d12 := (y[j+1] - y[j]) / (x[j+1] - x[j])
		dst[i] = d01 + (2*x[i]-x[j-1]-x[j])*(d12-d01)/(x[j+1]-x[j-1])
	}
}

// settleSlopes fills Slope with the slopes of those parabolas at the knots.
func (c *Curve) settleSlopes() {
	c.Slope = slices.Grow(c.Slope[:0], len(c.LnM))[:len(c.LnM)]
	parabolaSlopes(c.Slope, c.LnM, c.ChiSq)
}

// add puts a knot in its place. A knot already there is kept.
func (c *Curve) add(lnM, chiSq float64) {
	i, found := slices.BinarySearch(c.LnM, lnM)
	if !found {
		c.LnM = slices.Insert(c.LnM, i, lnM)
		c.ChiSq = slices.Insert(c.ChiSq, i, chiSq)
	}
}

// Sum returns the joint curve of several profiles that share one multiplier,
// which all know over the same range. Between any two knots of any of them all
// are cubic, so it is their sum everywhere, to the last bit whatever their order.
// Sum panics if there are none.
func Sum(cs []Curve) Curve {
	if len(cs) == 0 {
		panic("paths: the sum of no curves")
	}
	var sum Curve
	values, slopes := make([]float64, len(cs)), make([]float64, len(cs))
	for i := range cs {
		sum.LnM = append(sum.LnM, cs[i].LnM...)
		sum.Points += cs[i].Points
		sum.Free += cs[i].Free
		values[i] = cs[i].Best
	}
	sum.Best = sumOf(values)
	slices.Sort(sum.LnM)
	sum.LnM = slices.Compact(sum.LnM)
	for _, x := range sum.LnM {
		for i := range cs {
			values[i], slopes[i] = cs[i].at(x)
		}
		sum.ChiSq, sum.Slope = append(sum.ChiSq, sumOf(values)), append(sum.Slope, sumOf(slopes))
	}
	return sum
}

// sumOf adds the values, which it sorts, to the same bits whatever their order.
func sumOf(values []float64) float64 {
	slices.Sort(values)
	sum := 0.0
	for _, v := range values {
		sum += v
	}
	return sum
}

// The scan: multipliers on D over twelve decades, half a decade apart, then
// halved wherever it matters for the verdict and its intervals.
const (
	scanDecades  = 6
	scanKnots    = 25
	concern      = 30.0 // chi-square above the lowest up to which the curve is looked at
	inner        = 10.0 // the same up to which it must be right: 3.84 above the lowest, and above the lowest but one, is read
	curveError   = 0.02 // chi-square, largest miss of the curve half way between knots within inner
	outerError   = 0.03 // the same beyond, of what lies beyond
	shiftError   = 2e-3 // of lnM: shift factors are good to well under 1 %
	leastSpacing = 1e-4 // of lnM: no interval below is halved and no two knots are nearer
	mostRounds   = 16
	mostDips     = 4 // lowest points of their own that are followed at a time, beyond concern
)

// sampler returns chi-square at each of several multipliers.
type sampler func(lnM []float64) ([]float64, error)

// scan builds the curve of what the sampler returns.
func scan(points, free int, chiSq sampler) (Curve, error) {
	var lnM []float64
	for i := range scanKnots {
		lnM = append(lnM, (2*float64(i)/(scanKnots-1)-1)*scanDecades*math.Ln10)
	}
	return scanFrom(lnM, points, free, chiSq)
}

// scanFrom is scan from the given knots on.
func scanFrom(lnM []float64, points, free int, chiSq sampler) (Curve, error) {
	c := Curve{Points: points, Free: free}
	add := func(at []float64) ([]float64, error) { return c.sample(chiSq, at) }
	if _, err := add(lnM); err != nil {
		return c, err
	}
	if err := c.refine(add); err != nil {
		return c, err
	}
	return c, c.polish(add)
}

// sample puts knots at the given multipliers and returns their values.
func (c *Curve) sample(chiSq sampler, at []float64) ([]float64, error) {
	values, err := chiSq(at)
	if err != nil {
		return nil, err
	}
	for i, v := range values {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, fmt.Errorf("paths: chi-square at a multiplier of %g is %g", math.Exp(at[i]), v)
		}
		c.add(at[i], v)
	}
	c.settleSlopes()
	return values, nil
}

// sharpen adds knots to the curves of several profiles until their sum is as
// right around its own lowest point as each of them is around its own.
func sharpen(cs []Curve, each []sampler) error {
	if len(cs) < 2 {
		return nil
	}
	joint := Sum(cs)
	add := func(at []float64) ([]float64, error) {
		all := make([][]float64, len(at)) // for each multiplier the values of all profiles
		for k := range cs {
			values, err := cs[k].sample(each[k], at)
			if err != nil {
				return nil, err
			}
			for i, v := range values {
				all[i] = append(all[i], v)
			}
		}
		joint = Sum(cs)
		sums := make([]float64, len(at))
		for i := range sums {
			sums[i] = sumOf(all[i])
		}
		return sums, nil
	}
	if err := joint.refine(add); err != nil {
		return err
	}
	return joint.polish(add)
}

// refine halves the intervals of concern until the curve foretells the value
// half way.
func (c *Curve) refine(add sampler) error {
	settled := map[[2]float64]bool{}
	for range mostRounds {
		halvings := c.halvings(settled)
		if len(halvings) == 0 {
			return nil
		}
		mids := make([]float64, len(halvings))
		for k, h := range halvings {
			mids[k] = h.mid
		}
		values, err := add(mids)
		if err != nil {
			return err
		}
		for k, h := range halvings {
			if math.Abs(values[k]-h.told) <= h.allowed {
				settled[[2]float64{h.x0, h.mid}] = true
				settled[[2]float64{h.mid, h.x1}] = true
			}
		}
	}
	return nil
}

// halving is an interval to be halved, with what the curve foretells half way,
// by how much it may be wrong, and how low the curve gets in the interval.
type halving struct {
	x0, mid, x1, told, allowed, low float64
	far                             bool // above all that is of concern
}

// halvings returns the intervals to be halved that are not settled: those
// within concern of the lowest point, and those that hold a lowest point of
// their own, because the curve between few knots may pass far above the truth.
// It is followed down until it is known to a small part of what it lies above
// the lowest; of those far above, only the few deepest at a time: where a model
// far too sharp meets points far apart, chi-square is as rough as a rasp.
func (c *Curve) halvings(settled map[[2]float64]bool) []halving {
	_, best := c.Lowest()
	var list []halving
	var dips []float64
	for i := range len(c.LnM) - 1 {
		q := c.piece(i)
		x, low := q.lowest()
		if q.x1-q.x0 < 2*leastSpacing || settled[[2]float64{q.x0, q.x1}] || low > best+concern && !c.dips(i, x) {
			continue
		}
		mid := q.x0 + (q.x1-q.x0)/2
		allowed := curveError + outerError*math.Max(0, low-best-inner)
		h := halving{q.x0, mid, q.x1, q.value(mid), allowed, low, low > best+concern}
		if h.far {
			dips = append(dips, low)
		}
		list = append(list, h)
	}
	if len(dips) > mostDips {
		slices.Sort(dips)
		list = slices.DeleteFunc(list, func(h halving) bool { return h.far && h.low >= dips[mostDips] })
	}
	return list
}

// dips reports whether x, the lowest point of piece i, is also lower than what
// lies on either side of the piece.
func (c *Curve) dips(i int, x float64) bool {
	last := len(c.LnM) - 1
	switch x {
	case c.LnM[i]:
		return i == 0 || c.ChiSq[i-1] >= c.ChiSq[i]
	case c.LnM[i+1]:
		return i+1 == last || c.ChiSq[i+2] >= c.ChiSq[i+1]
	}
	return true
}

// polish puts knots at the lowest point until it stays, or has a knot so near
// that the slope between the two would be one of round-off.
func (c *Curve) polish(add sampler) error {
	x, _ := c.Lowest()
	for range mostRounds {
		if c.nearest(x) < leastSpacing {
			return nil
		}
		if _, err := add([]float64{x}); err != nil {
			return err
		}
		next, _ := c.Lowest()
		if math.Abs(next-x) <= shiftError {
			return nil
		}
		x = next
	}
	return nil
}

// nearest returns how far the nearest knot is from lnM.
func (c *Curve) nearest(lnM float64) float64 {
	i, _ := slices.BinarySearch(c.LnM, lnM)
	least := math.Inf(1)
	for _, k := range c.LnM[max(i-1, 0):min(i+1, len(c.LnM))] {
		least = math.Min(least, math.Abs(k-lnM))
	}
	return least
}
