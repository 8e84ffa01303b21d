package diffusion

import (
	"fmt"
	"math"
	"slices"
	"sort"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// Course is one history as a plan needs it: the diffusion integral between
// events and the rim values averaged exactly over each step. One course serves
// every multiplier on D.
type Course struct {
	plan   *Plan
	spans  []span
	last   span      // of no time, in which it ends
	halved *Course   // of the halved plan, where that has other layers to move over
	events []float64 // s
	route  route     // of the span in hand
}

// span is the stretch between two events.
type span struct {
	stage        int
	laid         float64 // at which material is laid down when it begins, if the rim is not sealed
	lnG          float64 // ln of the integral of D dt, m2
	inner, outer ending
	coldness     means // of 1/T, 1/K, over each step, weighted by D; for coupled problems only
	middles      means // middle of each step, s, and
	widths       means // its duration, s; where there is a source only
}

// means are the means of a value over the steps of a span, weighted by D, and
// over those of the rough schedule.
type means struct{ fine, rough []float64 }

func (m *means) of(rough bool) []float64 {
	if rough {
		return m.rough
	}
	return m.fine
}

// ending is what holds at one end during a span.
type ending struct {
	open     bool
	rim      int      // index into Problem.Inner or Outer
	value    means    // of a rim that is given as a function of time
	exchange exchange // of mass transfer
}

// most is a diffusion integral, m2, beyond which no crystal changes any more.
// It keeps the solver's products finite.
const most = 1e100

// integral returns the span's diffusion integral, m2, with D multiplied by
// exp(lnM).
func (s *span) integral(lnM float64) float64 {
	return math.Min(math.Exp(s.lnG+lnM), most)
}

// LnG returns ln of the diffusion integral over the whole course, m2.
func (c *Course) LnG() float64 {
	sum := math.Inf(-1)
	for _, s := range c.spans {
		sum = numeric.LnAdd(sum, s.lnG)
	}
	return sum
}

// LnGLast returns ln of the diffusion integral since the last zone was added that is
// there, m2: the least that a boundary has seen.
func (c *Course) LnGLast() float64 {
	last := c.last.stage
	for last > 0 && c.plan.stages[last].moved {
		last--
	}
	sum := math.Inf(-1)
	for _, s := range c.spans {
		if s.stage >= last {
			sum = numeric.LnAdd(sum, s.lnG)
		}
	}
	return sum
}

// Course prepares the history up to the time until, in s, for the plan and
// writes it to dst, whose memory is reused; a rim given as a function of time, or
// one that exchanges, needs some of its own. It returns an error if until lies
// outside the history.
func (p *Plan) Course(dst *Course, h *thermal.History, until float64) error {
	if !(until >= 0) || until > h.Life() {
		return fmt.Errorf("diffusion: the path has no time %g s; it lasts %g s", until, h.Life())
	}
	dst.plan = p
	dst.spans = dst.spans[:0]
	p.begin(&dst.last, h, until)
	from := 0.0
	dst.events = p.eventsOn(dst.events, h)
	for i := 0; i <= len(dst.events) && from < until; i++ {
		to := until
		if i < len(dst.events) {
			to = math.Min(to, dst.events[i])
		}
		p.span(dst.addSpan(), &dst.route, h, from, to)
		from = to
	}
	if len(p.problem.Moves) > 0 && p.halved != nil {
		half, err := p.halved()
		if err != nil {
			return err
		}
		dst.halved = new(Course)
		return half.Course(dst.halved, h, until)
	}
	return nil
}

// addSpan returns one more span, whose memory may have been another's.
func (c *Course) addSpan() *span {
	n := len(c.spans)
	if n == cap(c.spans) {
		c.spans = append(c.spans, span{})
	}
	c.spans = c.spans[:n+1]
	return &c.spans[n]
}

func (p *Plan) span(s *span, r *route, h *thermal.History, t0, t1 float64) {
	p.begin(s, h, t0)
	law, coupled := &p.problem.Law, p.problem.LnK != nil
	if !s.inner.follows(p.problem.Inner) && !s.outer.follows(p.problem.Outer) && !coupled && p.problem.source == nil {
		s.lnG = law.LnIntegral(h, t0, t1)
		return
	}
	r.lay(law, h, t0, t1)
	if s.lnG = r.lnG; math.IsInf(s.lnG, -1) {
		return
	}
	if p.coarse() {
		r.cut(p.steps, coarsePace, true)
	} else {
		r.cut(p.steps, pace, false)
	}
	p.attend(&s.inner, p.problem.Inner, h, r)
	p.attend(&s.outer, p.problem.Outer, h, r)
	if coupled {
		p.fill(&s.coldness, r, (*piece).meanColdness)
		p.leadEnds(&s.coldness)
	}
	if p.problem.source != nil {
		s.middles, s.widths = p.clock(r.times)
	}
}

// coarse reports whether the plan's steps are so long that they need not end just when
// the integral has grown by their part, and nothing asks when they do.
func (p *Plan) coarse() bool {
	timed := func(r Rim) bool { return r.Given != nil || r.Kind == Transfer }
	return p.steps.longest() > coarseStep && p.problem.source == nil &&
		!slices.ContainsFunc(p.problem.Inner, timed) && !slices.ContainsFunc(p.problem.Outer, timed)
}

// begin puts the span to what is in force from t on, s.
func (p *Plan) begin(s *span, h *thermal.History, t float64) {
	s.stage = p.stageAt(t)
	s.inner.begin(p.problem.Inner, t)
	s.outer.begin(p.problem.Outer, t)
	if len(p.problem.Moves) == 0 || !s.outer.open {
		return
	}
	switch r := &p.problem.Outer[s.outer.rim]; {
	case r.Given != nil:
		s.laid = r.Given.At(t + nudge*(t-p.stages[max(s.stage-1, 0)].from))
	case r.Equilibrium != nil:
		_, temp := h.At(t)
		s.laid = r.Equilibrium.at(temp)
	default:
		s.laid = r.Value
	}
}

// follows reports whether what holds at the end changes within the span.
func (e *ending) follows(rims []Rim) bool {
	return e.open && rims[e.rim].Kind != Held
}

// attend averages what changes at one end over the steps of a span.
func (p *Plan) attend(e *ending, rims []Rim, h *thermal.History, along *route) {
	if !e.follows(rims) {
		return
	}
	r := &rims[e.rim]
	switch {
	case r.Given != nil:
		p.average(&e.value, h, r.Given, along.times)
	case r.Equilibrium != nil:
		p.fill(&e.value, along, func(q *piece) float64 { return q.mean(*r.Equilibrium) })
	}
	if r.Kind == Transfer {
		e.exchange = p.exchange(h, r, along.times, e.value)
	}
	p.leadEnds(&e.value)
}

// fill fills in the means over the steps of a route of a value whose mean along a
// piece, weighted by D, is over.
func (p *Plan) fill(dst *means, along *route, over func(*piece) float64) {
	dst.fine = resized(dst.fine, len(p.steps))
	along.means(dst.fine, over)
	dst.rough = p.steps.mergedMeans(dst.rough[:0], dst.fine)
}

// begin puts the end to what is in force from t on.
func (e *ending) begin(rims []Rim, t float64) {
	memory := means{e.value.fine[:0], e.value.rough[:0]}
	*e = endingAt(rims, t)
	e.value = memory
}

// endingAt finds the rim in force from t on.
func endingAt(rims []Rim, t float64) ending {
	i := sort.Search(len(rims), func(i int) bool { return rims[i].From > t }) - 1
	if i < 0 {
		return ending{}
	}
	return ending{open: rims[i].Kind != Sealed, rim: i}
}

// pieces returns t0, the breaks strictly between, and t1, ascending.
func pieces(breaks []float64, t0, t1 float64) []float64 {
	in := append([]float64{t0}, within(breaks, t0, t1)...)
	in = append(in, t1)
	slices.Sort(in)
	return slices.Compact(in)
}

// average fills in the means of the given value over the steps,
//
//	integral of v dG / integral of dG.
func (p *Plan) average(dst *means, h *thermal.History, v *Given, times []float64) {
	breaks := p.breaks(h, v)
	dst.fine = resized(dst.fine, len(p.steps))
	for i := range dst.fine {
		dst.fine[i] = p.meanOver(h, v, breaks, times[i], times[i+1])
	}
	dst.rough = p.steps.mergedMeans(dst.rough[:0], dst.fine)
}

// breaks returns the times at which D along a history, the temperature or a value along it may break.
func (p *Plan) breaks(h *thermal.History, v *Given) []float64 {
	breaks := slices.Concat(p.problem.Law.breaks(h), v.Breaks, v.Jumps)
	slices.Sort(breaks)
	return breaks
}

// leadEnds makes the means, if there are any, those of a rim that the damped last
// steps see.
func (p *Plan) leadEnds(m *means) {
	if len(m.fine) == 0 {
		return
	}
	p.steps.leadEnd(m.fine)
	p.rough.leadEnd(m.rough)
}

// clock returns the middles and the durations of the steps, s.
func (p *Plan) clock(times []float64) (middles, widths means) {
	for i := range p.steps {
		middles.fine = append(middles.fine, (times[i]+times[i+1])/2)
		widths.fine = append(widths.fine, times[i+1]-times[i])
	}
	for j := 0; j < len(p.steps); j += p.steps.pair(j) {
		end := j + p.steps.pair(j)
		middles.rough = append(middles.rough, (times[j]+times[end])/2)
		widths.rough = append(widths.rough, times[end]-times[j])
	}
	return middles, widths
}

// meanOver returns the mean of v between ta and tb weighted by D.
func (p *Plan) meanOver(h *thermal.History, v *Given, breaks []float64, ta, tb float64) float64 {
	i := sort.SearchFloat64s(breaks, ta)
	j := sort.SearchFloat64s(breaks, tb)
	marks := pieces(breaks[i:j], ta, tb)
	w := weighted{lnWeight: math.Inf(-1), halvings: maxHalvings}
	for k := 1; k < len(marks); k++ {
		law := p.problem.Law.over(h, marks[k-1], marks[k])
		w.addPiece(&law, h, v, marks[k-1], marks[k])
	}
	if math.IsInf(w.lnWeight, -1) { // a step of no width or no diffusion: any value near it will do
		return v.At(clearOf(breaks, ta))
	}
	return w.mean
}

// clearOf returns a time just after t, or before it at the end of the path,
// that is none of the breaks. The last of them is the end of the path.
func clearOf(breaks []float64, t float64) float64 {
	i := sort.Search(len(breaks), func(i int) bool { return breaks[i] > t })
	if i == len(breaks) {
		i = sort.SearchFloat64s(breaks, t) - 1
	}
	return t + (breaks[i]-t)*nudge
}

const (
	// maxHalvings bounds the divisions in one step. The first minutes of a
	// relaxation that lasts a million years need 40.
	maxHalvings = 200
	// resolved is how closely the five points must give the logarithm of the
	// integral of D itself before they are trusted with the mean of v, and
	// ulps what rounding of the times may add, in parts of their difference.
	resolved = 1e-8
	ulps     = 0x1p-50
	// nudge is how far into its piece a time at a break is moved, as a part of it.
	nudge = 1e-9
)

// weighted is a running mean with the logarithm of its weight.
type weighted struct {
	mean, lnWeight float64
	halvings       int // that addPiece may still do
}

func (w *weighted) add(value, lnWeight float64) {
	if math.IsInf(lnWeight, -1) {
		return
	}
	w.lnWeight = numeric.LnAdd(w.lnWeight, lnWeight)
	w.mean += math.Exp(lnWeight-w.lnWeight) * (value - w.mean)
}

// addPiece adds the mean over [a, b], on which temperature and v are smooth,
// halving it until five points are enough for D.
func (w *weighted) addPiece(law *Law, h *thermal.History, v *Given, a, b float64) {
	exact := law.LnIntegral(h, a, b)
	if math.IsInf(exact, -1) {
		return
	}
	inside := weighted{lnWeight: math.Inf(-1)}
	for _, n := range numeric.Gauss5() {
		t := a + (b-a)*n.X
		temp, _ := h.At(t)
		inside.add(v.At(t), math.Log(n.W)+law.LnD(temp))
	}
	misses := math.Abs(inside.lnWeight + math.Log(b-a) - exact)
	if m := a + (b-a)/2; w.halvings > 0 && a < m && m < b && !(misses <= resolved+ulps*b/(b-a)) {
		w.halvings--
		w.addPiece(law, h, v, a, m)
		w.addPiece(law, h, v, m, b)
		return
	}
	w.add(inside.mean, exact)
}
