package diffusion

import "math"

// book keeps the account of one run's answer: what was there, what came
// through the rims, and the values between which a profile without drift must
// stay. In a step far longer than a cell's own time the flow through a rim is a
// tiny difference of values times a large conductance; what it may be wrong by
// is no drift.
type book struct {
	start  float64 // content before the run, and of what was added since
	inflow float64 // content that came through both ends
	scale  float64 // all that was there or moved, without its sign
	noise  float64 // what rounding of the values may have done to the inflow
	lo, hi float64 // least and greatest of start and rim values so far
}

// openBook returns the account of a run before its first step.
func (p *Plan) openBook() book {
	b := book{lo: math.Inf(1), hi: math.Inf(-1)}
	b.grow(p, 0, func(i int) float64 { return p.fresh[0][i] })
	return b
}

func (b *book) see(value float64) { b.lo, b.hi = leastMost(b.lo, b.hi, value) }

// enter books one solve from the values of the first and last cell before and
// after it. Crank-Nicolson sees the mean of both, over twice the length.
func (b *book) enter(op *operator, e ends, euler bool, first0, last0, first1, last1 float64) {
	if n := len(op.k); n > 0 { // what drives the flux is C/K
		first0, first1, last0, last1 = first0/op.k[0], first1/op.k[0], last0/op.k[n-1], last1/op.k[n-1]
	}
	if e.kIn != 0 {
		b.see(e.vIn)
		b.flow(e.kIn, e.vIn, first0, first1, euler)
	}
	if e.kOut != 0 {
		b.see(e.vOut)
		b.flow(e.kOut, e.vOut, last0, last1, euler)
	}
}

func (b *book) flow(k, v, before, after float64, euler bool) {
	amount := k * (v - after)
	if !euler {
		amount = k * ((v - before) + (v - after))
	}
	b.inflow += amount
	b.scale += math.Abs(amount)
	b.noise += k * (math.Abs(v) + math.Abs(after)) * 0x1p-52
}

// close writes what the account says of the final answer c, in the cells that are
// there.
func (b *book) close(s *Stats, p *Plan, c []float64) {
	content, lo, hi := 0.0, b.lo, b.hi
	for i, v := range c {
		content += p.grid.volumes[i] * v
		lo, hi = leastMost(lo, hi, v)
	}
	if b.scale > 0 {
		s.MassDrift = math.Max(0, math.Abs(content-b.start-b.inflow)-b.noise) / b.scale
	}
	if b.hi > b.lo && p.host == nil {
		s.Overshoot = max(hi-b.hi, b.lo-lo) / (b.hi - b.lo)
	}
}
