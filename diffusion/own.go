package diffusion

import "math"

// D that depends on the element's own composition C makes the problem
// nonlinear. With w the state half way through a Crank-Nicolson step (the one
// after a backward-Euler step), F the fluxes at w and V the cell volumes, a step
// solves
//
//	V (w - c) = s F(w)
//
// by Newton iterations. At a face D enters as the arithmetic mean of its two
// cells,
//
//	F = cond (h(C_L) + h(C_R))/2 (u_L - u_R),  u = C/K,
//
// so that a front into material with D = 0 moves; but see bridge.go for a jump of
// the host and mouth.go for the ends. Values are never clipped; D below C = 0 is D
// at 0.
//
// The first w is c as it would be if it went on as in the step before. That
// misses by about the square of the step, and one iteration by the square of
// that: enough for second order. More follow until what is left is small beside
// what the step itself misses. Each takes away what it finds from the whole
// balance, so mass is kept by any number of them.

// newton is the scratch of a nonlinear step, and what the next one takes from it.
type newton struct {
	before, change  []float64 // c; w - c
	length          float64   // of the solve that made change; 0 is none
	factor          []float64 // of each cell: D's factor at w
	onward, against []float64 // of each face: by how much s F grows with u inside and falls with u outside, never negative
	pivot, on, back []float64 // of each cell: reciprocal of its pivot, and times that what goes onwards and comes back
	rhs             []float64 // the right-hand side, then the change of u
	inflow, outflow float64   // s F through the innermost and the outermost face
	lo, hi          float64   // of u, in the crystal and behind open ends: between them w lies
	size, extent    float64   // of C there: the largest, without its sign, and the range
	changed         float64   // largest change, without its sign
	cond            []float64 // conductance of each face at unit D
	bridges         []bridge  // where the host jumps
	bridged         []float64 // cond in a zoned host
}

func (w *newton) resize(n int) {
	for _, v := range []*[]float64{&w.before, &w.change, &w.factor, &w.pivot, &w.on, &w.back, &w.rhs} {
		*v = resized(*v, n)
	}
	w.onward, w.against = resized(w.onward, n+1), resized(w.against, n+1)
}

// mostNewton is how many iterations there are at most.
const mostNewton = 40

// iteration is a job of such a problem, in the step in hand.
type iteration struct {
	plan  *Plan
	f     *Field
	job   Job
	rough bool
	book  book

	sp      *span     // nil where the job has none or rests
	c       []float64 // the answer in the cells that are there
	g       float64   // its integral
	k       int       // the solve
	st      step
	s       float64 // its length
	op      *operator
	in, out mouth
	solves  int     // so far
	left    float64 // by how much the last iteration has moved the state
	anew    bool    // the slopes are to be taken anew
	busy    bool    // not settled yet
}

// runOwn takes the start through all spans of one or two jobs.
func (p *Plan) runOwn(dst [2]*Field, jobs [2]Job, rough bool) {
	var its [2]iteration
	spans := 0
	for n, f := range dst {
		if f == nil {
			continue
		}
		p.reset(f)
		its[n] = iteration{plan: p, f: f, job: jobs[n], rough: rough, book: p.opened}
		spans = max(spans, len(jobs[n].Course.spans))
	}
	for i := range spans {
		its[0].enter(i)
		its[1].enter(i)
		for k := range p.solves(rough) {
			its[0].begin(k)
			its[1].begin(k)
			iterate(&its[0], &its[1])
			its[0].end()
			its[1].end()
		}
	}
	for n := range its {
		if f := its[n].f; f != nil {
			p.grow(f, &its[n].book, &its[n].job.Course.last)
			its[n].book.close(&f.Stats, p, f.Cols[0][:p.stages[f.stage].cells()])
			p.trim(f)
		}
	}
}

// enter takes the job to span i.
func (t *iteration) enter(i int) {
	t.sp = nil
	if t.f == nil || i >= len(t.job.Course.spans) {
		return
	}
	sp := &t.job.Course.spans[i]
	t.plan.grow(t.f, &t.book, sp)
	t.c = t.f.Cols[0][:t.plan.stages[sp.stage].cells()]
	t.plan.noteSpan(t.f, len(t.c))
	if t.g = sp.integral(t.job.LnM); t.g != 0 {
		t.sp = sp
		t.f.newton.length = 0 // after an event there is nothing to go on from
	}
}

// begin prepares solve k of the span.
func (t *iteration) begin(k int) {
	if t.sp == nil {
		return
	}
	p, f, w := t.plan, t.f, &t.f.newton
	t.k, t.st = k, p.solves(t.rough)[k]
	t.s = t.st.length(t.g)
	t.op = p.operator(f, t.sp, k, t.rough)
	t.in, t.out = p.mouths(t.op, t.sp, k, t.st, t.s, t.rough)
	f.noteEnds(t.sp, t.c)
	lo, hi := w.guess(t.c, t.s)
	w.bound(f, t.op, &t.in, &t.out, lo, hi)
	if p.problem.source != nil {
		w.lo, w.hi = math.Inf(-1), math.Inf(1)
	}
	w.cond = t.op.cond
	if p.host != nil {
		w.layBridges(p, t.op, 1/t.sp.coldness.of(t.rough)[k])
	}
	t.solves, t.left, t.anew, t.busy = 0, w.extent, true, true
}

// iterate iterates until both have settled.
func iterate(a, b *iteration) {
	for a.busy || b.busy {
		a.assemble()
		b.assemble()
		switch {
		case a.busy && b.busy:
			if a.anew && b.anew {
				factoriseTwo(&a.f.newton, &b.f.newton, a.op.vol, b.op.vol)
			} else {
				a.factorise()
				b.factorise()
			}
			sweepTwo(&a.f.newton, &b.f.newton)
		case a.busy:
			a.factorise()
			a.f.newton.sweep()
		default:
			b.factorise()
			b.f.newton.sweep()
		}
		a.advance()
		b.advance()
	}
}

// assemble fills in the matrix, if it is to be taken anew, and what is missing
// from the balance.
func (t *iteration) assemble() {
	if !t.busy {
		return
	}
	p, c, w, own := t.plan, t.c, &t.f.newton, t.plan.problem.Own
	u := t.f.driving(t.op, c)
	w.confine(t.op, c, u)
	p.own.look(w.factor, c)
	w.crossBridges(own, t.op, u)
	w.open(own, &t.in, &t.out, c, t.anew)
	if t.anew {
		w.slopes(own, t.op, t.s, c, u)
		w.levelBridges(t.s)
	}
	w.balance(p.grid.volumes, w.cond, t.s, u)
	p.addSource(w.rhs, t.sp, t.k, t.st, t.rough)
}

func (t *iteration) factorise() {
	if t.anew {
		t.f.newton.factorise(t.op.vol)
	}
}

// advance moves the state by what has been found, and sees whether it has settled.
func (t *iteration) advance() {
	if !t.busy {
		return
	}
	w := &t.f.newton
	t.solves++
	moved := w.move(t.op, t.c)
	t.busy = t.solves < mostNewton && !w.settled(moved, t.left, t.st.euler)
	t.anew = moved > slowNewton*t.left
	t.left = moved
}

// end books the step and takes the state to where it ends.
func (t *iteration) end() {
	if t.sp == nil {
		return
	}
	c, w := t.c, &t.f.newton
	n := len(c)
	t.in.enter(&t.book, w.inflow-float64(w.against[0]*w.rhs[0]), w.against[0], t.st.euler)
	t.out.enter(&t.book, -w.outflow-float64(w.onward[n]*w.rhs[n-1]), w.onward[n], t.st.euler)
	if !t.st.euler {
		w.finish(c)
	}
	t.f.Stats.Steps += t.solves
}

// finish takes c from the middle of a step to its end.
func (w *newton) finish(c []float64) {
	for i, d := range w.change {
		c[i] = w.before[i] + float64(2*d)
	}
}

// slowNewton is the part of what was left that an iteration may leave without the
// slopes being taken anew.
const slowNewton = 0.1

// guess takes c to where the last change would bring it, if that was made by a
// step about as long as this one, of length s. It returns the least and the
// greatest value before.
func (w *newton) guess(c []float64, s float64) (lo, hi float64) {
	if w.length == 0 {
		w.resize(len(c))
	}
	ratio := s / w.length
	if !(ratio <= longestGuess) {
		ratio = 0
		clear(w.change)
	}
	before, change := w.before[:len(c)], w.change[:len(c)]
	lo, hi = c[0], c[0]
	for i, v := range c {
		lo, hi = leastMost(lo, hi, v)
		d := float64(change[i] * ratio)
		before[i], change[i], c[i] = v, d, v+d
	}
	w.length = s
	return lo, hi
}

// longestGuess is how much longer a step may be than the one that it goes on
// from.
const longestGuess = 2

// bound takes the range of values in the crystal, lo to hi, and behind its ends.
// No state after a step of backward Euler, and none half way through one of
// Crank-Nicolson, leaves that of u.
func (w *newton) bound(f *Field, op *operator, in, out *mouth, lo, hi float64) {
	lo, hi = in.widen(lo, hi, 1)
	lo, hi = out.widen(lo, hi, 1)
	w.size, w.extent = max(-lo, hi), hi-lo
	w.lo, w.hi = lo, hi
	if op.k == nil {
		return
	}
	lo, hi = math.Inf(1), math.Inf(-1)
	for _, u := range f.potential(op, w.before) {
		lo, hi = leastMost(lo, hi, u)
	}
	lo, hi = in.widen(lo, hi, in.k)
	w.lo, w.hi = out.widen(lo, hi, out.k)
}

// leastMost takes one more value into a range.
func leastMost(lo, hi, value float64) (float64, float64) {
	if value < lo {
		lo = value
	}
	if value > hi {
		hi = value
	}
	return lo, hi
}

// confine brings the state c, of potential u, back to where it must lie, from
// where an iteration has left it. So none runs away, and what the last one found
// stays as it is.
func (w *newton) confine(op *operator, c, u []float64) {
	lo, hi := w.lo, w.hi
	for i, v := range u {
		if v >= lo && v <= hi {
			continue
		}
		v = min(max(v, lo), hi)
		u[i], c[i] = v, v
		if op.k != nil {
			c[i] = v * op.k[i]
		}
		w.change[i] = c[i] - w.before[i]
	}
}

// slopes fills in by how much the fluxes through the faces inside change with u.
// Where D changes little between two cells and u is C, the flux is nearly the
// fall of the integral of D: then the slopes are D itself.
func (w *newton) slopes(own func(float64) float64, op *operator, s float64, c, u []float64) {
	n := len(u)
	factor, cond := w.factor[:n], w.cond[:n]
	onward, against := w.onward[:n], w.against[:n]
	for i := 1; i < n; i++ {
		a := s * cond[i]
		left, right := factor[i-1], factor[i]
		sum := left + right
		if op.k == nil && math.Abs(left-right) <= alike*sum {
			onward[i], against[i] = float64(a*left), float64(a*right)
			continue
		}
		mean, steep := float64(a*sum)/2, float64(a*(u[i-1]-u[i]))/2
		left, right = w.slope(own, c, i-1), w.slope(own, c, i)
		if op.k != nil {
			left *= op.k[i-1]
			right *= op.k[i]
		}
		onward[i] = max(0, mean+float64(steep*left))
		against[i] = max(0, mean-float64(steep*right))
	}
}

// alike is the part of its sum by which D may differ between two cells for the
// slopes to be D: they are then right to a hundredth.
const alike = 0.1

// slope returns by how much D's factor grows with c in cell i.
func (w *newton) slope(own func(float64) float64, c []float64, i int) float64 {
	d := slopeStep * w.size
	if d == 0 {
		return 0
	}
	return (own(max(c[i], 0)+d) - w.factor[i]) / d
}

// slopeStep is how far beside a value, as a part of the largest, D is looked at
// for its slope: about the root of round-off.
const slopeStep = 1e-7

// balance fills in by how much V (w - c) misses s F at the state of potential u.
func (w *newton) balance(vol, cond []float64, s float64, u []float64) {
	n := len(u)
	factor, change, rhs := w.factor[:n], w.change[:n], w.rhs[:n]
	cond, vol = cond[:n], vol[:n]
	half := s / 2
	flux, h, v := w.inflow, factor[0], u[0]
	for i := 1; i < n; i++ {
		next := float64(half * cond[i] * (h + factor[i]) * (v - u[i]))
		rhs[i-1] = flux - next - float64(vol[i-1]*change[i-1])
		flux, h, v = next, factor[i], u[i]
	}
	rhs[n-1] = flux - w.outflow - float64(vol[n-1]*change[n-1])
}

// addSource adds the problem's source over the part of the step that is solved
// for: half of a Crank-Nicolson step.
func (p *Plan) addSource(rhs []float64, sp *span, k int, st step, rough bool) {
	if p.problem.source == nil {
		return
	}
	t, dt := sp.middles.of(rough)[k], sp.widths.of(rough)[k]
	if !st.euler {
		dt /= 2
	}
	for i := range rhs {
		r := p.grid.centres[i]
		rhs[i] += float64(p.grid.volumes[i] * dt * p.problem.source(r, t))
	}
}

// move adds what a sweep has found to the state, and returns the largest value
// that c has moved by.
func (w *newton) move(op *operator, c []float64) float64 {
	n := len(c)
	before, change, rhs := w.before[:n], w.change[:n], w.rhs[:n]
	down, up, fallen, risen := 0.0, 0.0, 0.0, 0.0
	for i, d := range rhs {
		if op.k != nil {
			d *= op.k[i]
		}
		x := change[i] + d
		change[i], c[i] = x, before[i]+x
		down, up = leastMost(down, up, d)
		fallen, risen = leastMost(fallen, risen, x)
	}
	w.changed = max(-fallen, risen)
	return max(-down, up)
}

// settled says whether iterations may end that have moved the state by so much,
// and the one before by left. If each takes the same part of what was left,
// moved^2/left is still to come. That must be little beside what the step itself
// misses where the values change by a part x of their range: x^2/2 for backward
// Euler and at least x^3/12 for Crank-Nicolson (as for exp(x)).
func (w *newton) settled(moved, left float64, euler bool) bool {
	x := min(w.changed/w.extent, mostResolved)
	misses := x * x / 2
	if !euler {
		misses = x * x * x / 12
	}
	return moved <= newtonError*w.size ||
		2*moved <= left && moved*(moved/left) <= misses*w.extent*beside+newtonError*w.size
}

const (
	// mostResolved is the change above which these misses say nothing any more.
	mostResolved = 0.25
	// beside is what is little: in tries with fronts, steps and exponentials of a
	// 30-fold change it added a hundredth to the error of the steps, and a tenth where
	// those were a few for all of a path.
	beside = 0.5
	// newtonError is what is nothing, as a part of the largest value.
	newtonError = 1e-13
)

// own returns D's factor at the element's own value c.
func (p *Problem) own(c float64) float64 {
	if p.Own == nil {
		return 1
	}
	return p.Own(max(c, 0))
}

// driving returns the potential u of the state c: c itself, if not coupled.
func (f *Field) driving(op *operator, c []float64) []float64 {
	if op.k == nil {
		return c
	}
	return f.potential(op, c)
}
