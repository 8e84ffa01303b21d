package diffusion

import "math"

// D that depends on the element's own composition C makes the problem
// nonlinear. With w the state half way through a Crank-Nicolson step (the one
// after a backward-Euler step), F the fluxes at w and V the cell volumes, a step
// solves
//
//	V (w - c) = s F(w)
//
// by Newton iterations until they settle: two or three where D changes smoothly,
// one for each cell that a front into material with D = 0 crosses. Two alone would
// be second order too, but nothing would keep a long step from running away. At
// a face D enters as the arithmetic mean of its two cells,
//
//	F = cond (h(C_L) + h(C_R))/2 (u_L - u_R),  u = C/K,
//
// so that such a front moves. Values are never clipped; D below C = 0 is D at 0.

// newton is the scratch of a nonlinear step.
type newton struct {
	before, change  []float64 // c; w - c
	factor, slope   []float64 // of each cell: D's factor at w and its derivative
	flux            []float64 // of each face, outwards, times s
	onward, against []float64 // by how much it grows with the cell inside and falls with the cell outside, never negative
	rhs             []float64
}

func (w *newton) resize(n int) {
	for _, v := range []*[]float64{&w.before, &w.change, &w.factor, &w.slope, &w.rhs} {
		*v = resized(*v, n)
	}
	for _, v := range []*[]float64{&w.flux, &w.onward, &w.against} {
		*v = resized(*v, n+1)
	}
}

// nonlinear does one step of a problem with D that depends on C.
func (p *Plan) nonlinear(f *Field, sp *span, k int, st step, g float64, rough bool, b *book) {
	c, w := f.Cols[0], &f.newton
	w.resize(len(c))
	copy(w.before, c)
	clear(w.change)
	s := st.length(g)
	var op *operator
	var e ends
	for range mostNewton {
		op = p.operator(f, sp, k, rough)
		w.look(p.problem.Own, c)
		op.cond[0] *= (w.factor[0] + p.factorBehind(&sp.inner, p.problem.Inner, k, rough, w.factor[0])) / 2
		n := len(c)
		op.cond[n] *= (w.factor[n-1] + p.factorBehind(&sp.outer, p.problem.Outer, k, rough, w.factor[n-1])) / 2
		e = p.ends(op, sp, 0, k, st, g, rough)
		w.fluxes(op, s, e, c)
		for i, v := range p.grid.volumes {
			w.rhs[i] = w.flux[i] - w.flux[i+1] - float64(v*w.change[i])
		}
		p.addSource(w.rhs, sp, k, st, rough)
		w.solve(p.grid.volumes)
		moved, size := 0.0, 0.0
		for i, d := range w.rhs {
			w.change[i] += d
			c[i] = w.before[i] + w.change[i]
			moved, size = math.Max(moved, math.Abs(d)), math.Max(size, math.Abs(c[i]))
		}
		if moved <= newtonError*size {
			break
		}
	}
	if !st.euler {
		for i, d := range w.change {
			c[i] = w.before[i] + float64(2*d)
		}
	}
	n := len(c) - 1
	b.enter(op, e, st.euler, w.before[0], w.before[n], c[0], c[n])
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
	for i, r := range p.grid.centres {
		rhs[i] += float64(p.grid.volumes[i] * dt * p.problem.source(r, t))
	}
}

// When Newton's iterations have settled, as a part of the largest value, and
// how many there are at most.
const (
	newtonError = 1e-9
	mostNewton  = 40
)

// look takes D's factor and its slope at the state c.
func (w *newton) look(own func(float64) float64, c []float64) {
	size := 0.0
	for _, v := range c {
		size = math.Max(size, math.Abs(v))
	}
	d := slopeStep * size
	for i, v := range c {
		v = math.Max(v, 0)
		w.factor[i] = own(v)
		w.slope[i] = 0
		if low := math.Max(v-d, 0); v+d > low {
			w.slope[i] = (own(v+d) - own(low)) / (v + d - low)
		}
	}
}

// slopeStep is how far beside a value, as a part of the largest, D is looked at
// for its slope: the cube root of round-off.
const slopeStep = 6e-6

// factorBehind is D's factor at what is behind an open end, other at a sealed
// one.
func (p *Plan) factorBehind(e *ending, rims []Rim, k int, rough bool, other float64) float64 {
	if !e.open {
		return other
	}
	return p.problem.Own(math.Max(e.behind(rims, k, rough), 0))
}

// fluxes fills in what goes through each face at the state c, and its slopes.
func (w *newton) fluxes(op *operator, s float64, e ends, c []float64) {
	n := len(c)
	k := func(i int) float64 {
		if op.k == nil {
			return 1
		}
		return op.k[i]
	}
	w.flux[0], w.onward[0], w.against[0] = float64(e.kIn*(e.vIn-c[0]/k(0))), 0, e.kIn/k(0)
	w.flux[n], w.onward[n], w.against[n] = float64(e.kOut*(c[n-1]/k(n-1)-e.vOut)), e.kOut/k(n-1), 0
	for i := 1; i < n; i++ {
		left, right := k(i-1), k(i)
		half := s * op.cond[i] / 2
		mean := float64(half * (w.factor[i-1] + w.factor[i]))
		fall := c[i-1]/left - c[i]/right
		w.flux[i] = float64(mean * fall)
		w.onward[i] = math.Max(0, mean/left+float64(half*w.slope[i-1]*fall))
		w.against[i] = math.Max(0, mean/right-float64(half*w.slope[i]*fall))
	}
}

// solve solves (V + slopes) d = rhs in place, from both ends to the middle. As
// in sweep.go only positive numbers are added: a cell of excess e that drives a
// outwards and is driven b by the next one hands on b e/(e + a).
func (w *newton) solve(vol []float64) {
	n := len(vol)
	m := n / 2
	d := w.rhs
	pivot, back := w.factor, w.slope // no longer needed
	x := w.against[0]
	for i := range m {
		e := vol[i] + x
		pivot[i], back[i] = 1/(e+w.onward[i+1]), w.against[i+1]
		x = float64(float64(w.against[i+1]*e) * pivot[i])
		d[i+1] += float64(float64(w.onward[i+1]*d[i]) * pivot[i])
	}
	y := w.onward[n]
	for j := n - 1; j > m; j-- {
		e := vol[j] + y
		pivot[j], back[j] = 1/(e+w.against[j]), w.onward[j]
		y = float64(float64(w.onward[j]*e) * pivot[j])
		d[j-1] += float64(float64(w.against[j]*d[j]) * pivot[j])
	}
	d[m] /= vol[m] + x + y
	for i := m - 1; i >= 0; i-- {
		d[i] = float64((d[i] + float64(back[i]*d[i+1])) * pivot[i])
	}
	for j := m + 1; j < n; j++ {
		d[j] = float64((d[j] + float64(back[j]*d[j-1])) * pivot[j])
	}
}
