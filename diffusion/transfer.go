package diffusion

import (
	"math"
	"sort"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// A rim of mass transfer lets in
//
//	k (C_eq - C_surface),  k = exp(LnA - E/T) in m/s,
//
// per unit of area, on the total flux. Over one solve that is a conductance
// r^n K times the integral of k dt, in series with the half cell's: D and its
// multiplier scale the latter alone. Where k and D follow temperature differently,
// a step is cut into parts in which their ratio hardly changes, side by side: so
// a cold year is not taken for a conductance of the wake in the same step.

// exchange is what a rim of mass transfer does in the steps of a span, and in
// those of the rough schedule.
type exchange struct{ fine, rough [][]part }

// part is a stretch of time in a step: its share of the step's integral of D dt,
// its integral of k dt, m, and by how much C_eq there is above its mean over the
// step.
type part struct{ share, k, above float64 }

func (x *exchange) of(rough bool) [][]part {
	if rough {
		return x.rough
	}
	return x.fine
}

// exchange cuts the steps between the given times; mean is that of C_eq over them,
// if it changes.
func (p *Plan) exchange(h *thermal.History, r *Rim, times []float64, mean means) exchange {
	c := cutter{plan: p, rim: r, h: h, breaks: p.problem.Law.breaks(h)}
	if r.Given != nil {
		c.given = p.breaks(h, r.Given)
	}
	var x exchange
	for i := range p.steps {
		x.fine = append(x.fine, c.step(times[i], times[i+1]))
	}
	for i := 0; i < len(p.steps); i += p.steps.pair(i) {
		both := weighed(nil, x.fine[i], 1)
		if p.steps.pair(i) == 2 {
			a, b := p.steps[i].df, p.steps[i+1].df
			both = weighed(weighed(nil, x.fine[i], a/(a+b)), x.fine[i+1], b/(a+b))
		}
		x.rough = append(x.rough, both)
	}
	if len(mean.fine) > 0 {
		takeMeans(x.fine, mean.fine)
		takeMeans(x.rough, mean.rough)
	}
	return x
}

// weighed appends the parts to dst, their shares times a factor.
func weighed(dst, parts []part, factor float64) []part {
	for _, q := range parts {
		q.share *= factor
		dst = append(dst, q)
	}
	return dst
}

// takeMeans makes of values in parts what they are above their steps' means.
func takeMeans(steps [][]part, mean []float64) {
	for i, parts := range steps {
		for j := range parts {
			parts[j].above -= mean[i]
		}
	}
}

// cutter cuts steps into parts.
type cutter struct {
	plan          *Plan
	rim           *Rim
	h             *thermal.History
	breaks, given []float64 // of D along the history; with those of C_eq, if it is given
	law           Law       // between two breaks
	parts         []part
	lnG           []float64 // of each part
	halvings      int       // that cut may still do
}

// step returns the parts of a step from ta to tb; none where nothing diffuses.
func (c *cutter) step(ta, tb float64) []part {
	c.parts, c.lnG, c.halvings = nil, c.lnG[:0], maxHalvings
	i, j := sort.SearchFloat64s(c.breaks, ta), sort.SearchFloat64s(c.breaks, tb)
	marks := pieces(c.breaks[i:j], ta, tb)
	for i := 1; i < len(marks); i++ {
		c.law = c.plan.problem.Law.over(c.h, marks[i-1], marks[i])
		c.cut(marks[i-1], marks[i])
	}
	whole := math.Inf(-1)
	for _, g := range c.lnG {
		whole = numeric.LnAdd(whole, g)
	}
	for i, g := range c.lnG {
		c.parts[i].share = math.Exp(g - whole)
	}
	return c.parts
}

// cut adds the parts of a stretch in which temperature and D are smooth.
func (c *cutter) cut(a, b float64) {
	m := a + (b-a)/2
	_, begin := c.h.At(a)
	middle, _ := c.h.At(m)
	end, _ := c.h.At(b)
	at := c.lnRatio(middle)
	changes := math.Max(math.Abs(c.lnRatio(begin)-at), math.Abs(c.lnRatio(end)-at))
	if c.halvings > 0 && a < m && m < b && changes > evenRatio {
		c.halvings--
		c.cut(a, m)
		c.cut(m, b)
		return
	}
	g := c.law.LnIntegral(c.h, a, b)
	if math.IsInf(g, -1) {
		return
	}
	k := c.rim.Rate
	q := part{k: math.Exp(k.LnA + c.h.LnArrhenius(k.E, 0, a, b))}
	switch {
	case c.rim.Given != nil:
		q.above = c.plan.meanOver(c.h, c.rim.Given, c.given, a, b)
	case c.rim.Equilibrium != nil:
		q.above = math.Exp(c.law.lnAlong(c.h, *c.rim.Equilibrium, a, b) - g)
	}
	c.parts, c.lnG = append(c.parts, q), append(c.lnG, g)
}

// lnRatio returns ln of D/k at a temperature.
func (c *cutter) lnRatio(temp float64) float64 {
	k := c.rim.Rate
	return c.law.LnD(temp) - k.LnA + k.E/temp
}

// evenRatio is by how much ln of D/k may change in half of a part: two
// conductances in series are then right to some 1e-4.
const evenRatio = 0.05

// through returns the conductance of a half cell, cond in a solve of length s,
// in series with the exchange of a rim over the same solve, and by how much what
// it leads to is above its mean over the step; without exchange the half cell's
// alone. area is r^n, and K times it if the problem is coupled.
func (e *ending) through(cond, s, area float64, st step, k int, rough bool) (conductance, above float64) {
	if e.exchange.fine == nil {
		return float64(s * cond), 0
	}
	if !st.euler {
		area /= 2
	}
	for _, q := range e.exchange.of(rough)[k] {
		inside, outside := float64(s*cond)*q.share, float64(area*q.k)
		if inside > 0 && outside > 0 {
			c := 1 / (1/inside + 1/outside)
			conductance += c
			above += float64(c / conductance * (q.above - above))
		}
	}
	return conductance, above
}

// area returns r^n.
func (s Shape) area(r float64) float64 { return math.Pow(r, float64(s)) }
