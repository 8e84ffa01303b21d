package paths

import (
	"context"
	"math"
	"slices"

	"bankfire/diffusion"
	"bankfire/paths/study"
)

// gTable is what a profile says of every path that it knows by its diffusion integral
// G alone: chi-square against ln G, solved once.
type gTable struct {
	curve   Curve // its LnM is ln G, m2
	degrees []int // at the knots: the data that have a say, less the values fitted
	law     diffusion.Law
	at      Finding // of the curve itself: its shift factors are diffusion integrals, m2
	lnG     float64 // of the lowest chi-square
	lowest  float64
	numErr  float64 // the largest that was audited, in sigma
}

// newTable makes the table of an element with a plan that is fine enough on the path,
// where the data agree best and wherever ln G of members lies, from reached[0] to
// reached[1]. It is nil, with the reason, where G is not enough.
func newTable(ctx context.Context, e *element, path *study.Path, reached [2]float64, confidence float64) (t *gTable, why string, err error) {
	for refined := 0; ; {
		p, _, err := audited(e, path, refined)
		if err != nil {
			return nil, "", err
		}
		why, enough := p.gEnough()
		if !enough {
			return nil, why, nil
		}
		t := &gTable{law: p.element.Law.Law}
		if err := t.solve(ctx, p); err != nil {
			return nil, "", err
		}
		if err := t.audit(ctx, p, reached); err != nil {
			return nil, "", err
		}
		if refined = p.finer(t.numErr); refined > p.refined {
			continue
		}
		t.at = find(&t.curve, confidence)
		t.curve.Crystal = e.place
		return t, why, nil
	}
}

// auditSpacing is how far apart in ln G knots are audited: about a factor of three.
const auditSpacing = 1.0

// audit measures the numerical error, which is one of ln G alone, where the data agree
// best, and at knots that include what members reach.
func (t *gTable) audit(ctx context.Context, p *profile, reached [2]float64) error {
	x := t.curve.LnM
	first, _ := slices.BinarySearch(x, reached[0])
	last, _ := slices.BinarySearch(x, reached[1])
	at := []float64{t.lnG}
	for i := max(first-1, 0); i <= min(last, len(x)-1); i++ {
		if len(at) == 1 || i == last || x[i]-at[len(at)-1] >= auditSpacing {
			at = append(at, x[i])
		}
	}
	for _, lnG := range at {
		if err := ctx.Err(); err != nil {
			return err
		}
		if err := p.audit(lnG - p.runs[0].course.LnG()); err != nil {
			return err
		}
		t.numErr = math.Max(t.numErr, p.numErr(p.fitRun(0, nil)))
	}
	return nil
}

// gEnough reports whether the profile knows a path by its diffusion integral alone,
// and why or why not.
func (p *profile) gEnough() (why string, ok bool) {
	if p.crystal.Exists != nil {
		return "the crystal exists only from a moment on", false
	}
	for _, runs := range [][]variant{p.runs, p.redrawn} {
		for i := range runs {
			if why, ok = runs[i].plan.GEnough(); !ok {
				return why, false
			}
		}
	}
	if math.IsInf(p.runs[0].course.LnG(), -1) {
		return "nothing diffuses along the first of its paths", false
	}
	return why, true
}

// sharpest is the part of the smallest length that the traverse can see by which a
// boundary is blurred at the lower end of a table: nothing is seen of it.
const sharpest = 1e-3

// solve scans chi-square from where nothing has diffused that the traverse could see
// to where nothing is left to diffuse.
func (t *gTable) solve(ctx context.Context, p *profile) error {
	size := p.crystal.Size() - p.crystal.R0
	slowest, fastest := p.crystal.Factors(p.element)
	seen := sharpest * math.Min(finest(p.element.Traverse), size)
	lo, hi := math.Log(seen*seen/2/fastest), math.Log(equilibrated*size*size/slowest)
	n := int(math.Ceil((hi-lo)/math.Ln10*2)) + 1
	knots := make([]float64, n)
	for i := range knots {
		knots[i] = lo + (hi-lo)*float64(i)/float64(n-1)
	}
	degrees := map[float64]int{}
	lnG := p.runs[0].course.LnG()
	chiSq := func(at []float64) ([]float64, error) {
		lnM := make([]float64, len(at))
		for i, x := range at {
			lnM[i] = x - lnG
		}
		solutions, err := p.solveFor(ctx, lnM)
		values := make([]float64, len(solutions))
		for i, s := range solutions {
			values[i] = s.ChiSq
			degrees[at[i]] = telling(&p.fit, s) - p.spent(s)
		}
		return values, err
	}
	var err error
	if t.curve, err = scanFrom(knots, p.points, p.counted, chiSq); err != nil {
		return err
	}
	for _, x := range t.curve.LnM {
		t.degrees = append(t.degrees, degrees[x])
	}
	t.lnG, t.lowest = t.curve.Lowest()
	return nil
}

// degreesAt are those at the knot nearest to ln G.
func (t *gTable) degreesAt(lnG float64) int {
	x := t.curve.LnM
	i, _ := slices.BinarySearch(x, lnG)
	if i == len(x) || i > 0 && lnG-x[i-1] < x[i]-lnG {
		i--
	}
	return t.degrees[i]
}

// find is the finding on a path with the diffusion integral, like that on its curve.
func (t *gTable) find(lnG, confidence float64) Finding {
	lnG = t.reach(lnG)
	degrees := t.degreesAt(lnG)
	if !t.holds(lnG) {
		c := t.on(lnG)
		return find(&c, confidence)
	}
	f := t.at
	f.Degrees, f.Misfit, f.Tail = degrees, t.curve.At(lnG), math.NaN()
	if degrees > 0 {
		f.Tail = Tail(f.Misfit, degrees)
	}
	g := math.Exp(lnG)
	f.Shift /= g
	for k := range 2 {
		f.Shift68[k] /= g
		f.Shift95[k] /= g
	}
	f.decide(t.lnG-lnG, t.lowest, confidence)
	return f
}

// reach is ln G, or where nothing diffuses something as small as makes no difference.
func (t *gTable) reach(lnG float64) float64 {
	return math.Max(lnG, t.curve.LnM[0]-3*scanDecades*math.Ln10)
}

// holds reports whether what is known of the whole table is known of the part that a
// scan on the path itself would look at.
func (t *gTable) holds(lnG float64) bool {
	lo, hi := scanEnds(lnG)
	within := func(g float64) bool {
		x := math.Log(g)
		return math.IsInf(x, 0) || x > lo && x < hi
	}
	return within(t.at.Shift) && within(t.at.Shift95[0]) && within(t.at.Shift95[1])
}

// scanEnds are the ends of the scan on a path with the diffusion integral.
func scanEnds(lnG float64) (lo, hi float64) {
	return lnG - scanDecades*math.Ln10, lnG + scanDecades*math.Ln10
}

// on is the curve on a path with the diffusion integral, as far as a scan on it goes.
func (t *gTable) on(lnG float64) Curve {
	lnG = t.reach(lnG)
	lo, hi := scanEnds(lnG)
	c := t.curve
	c.LnM, c.ChiSq, c.Slope = nil, nil, nil
	put := func(x, chi, slope float64) {
		c.LnM, c.ChiSq, c.Slope = append(c.LnM, x-lnG), append(c.ChiSq, chi), append(c.Slope, slope)
	}
	edge := func(x float64) {
		chi, slope := t.curve.at(x)
		put(x, chi, slope)
	}
	edge(lo)
	for i, x := range t.curve.LnM {
		if x > lo && x < hi {
			put(x, t.curve.ChiSq[i], t.curve.Slope[i])
		}
	}
	if len(c.LnM) == 1 {
		edge(lnG)
	}
	edge(hi)
	c.Free = c.Points - t.degreesAt(lnG)
	return c
}

// sampler reads the table for multipliers on D along a path.
func (t *gTable) sampler(lnG float64) sampler {
	lnG = t.reach(lnG)
	return func(lnM []float64) ([]float64, error) {
		values := make([]float64, len(lnM))
		for i, x := range lnM {
			values[i] = t.curve.At(lnG + x)
		}
		return values, nil
	}
}
