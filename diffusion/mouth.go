package diffusion

import (
	"math"

	"bankfire/thermal/numeric"
)

// mouth is one end of the crystal in one solve.
type mouth struct {
	inside  float64 // s times the conductance of the half cell, for a factor of 1; 0 is sealed
	slow    bool    // mass transfer,
	parts   []part  // in these parts,
	area    float64 // through r^n; half of it if half of the time counts
	beyond  float64 // what is behind it, C
	k, cell float64 // K at the end and in the cell beside it
}

// mouths returns both ends in solve k of a span, of length s.
func (p *Plan) mouths(op *operator, sp *span, k int, st step, s float64, rough bool) (in, out mouth) {
	n := len(op.vol)
	in, out = mouth{k: 1, cell: 1}, mouth{k: 1, cell: 1}
	if op.k != nil {
		in.k, in.cell, out.k, out.cell = op.kIn, op.k[0], op.kOut, op.k[n-1]
	}
	shape := p.problem.Shape
	in.lead(&sp.inner, p.problem.Inner, s*op.cond[0], shape.area(p.grid.faces[0]), st, k, rough)
	out.lead(&sp.outer, p.problem.Outer, s*op.out, shape.area(p.grid.faces[n]), st, k, rough)
	return in, out
}

// lead opens the mouth as an end does in solve k.
func (m *mouth) lead(e *ending, rims []Rim, inside, area float64, st step, k int, rough bool) {
	if !e.open {
		return
	}
	m.inside, m.beyond = inside, e.behind(rims, k, rough)
	if e.exchange.fine == nil {
		return
	}
	m.slow, m.parts, m.area = true, e.exchange.of(rough)[k], area
	if !st.euler {
		m.area /= 2
	}
}

// lets returns what comes in through an open mouth while the cell beside it holds
// c. D's factor in the half cell is the mean of those at both of its sides.
func (m *mouth) lets(own func(float64) float64, c float64) float64 {
	factor := own(max(c, 0))
	through := func(surface float64) float64 {
		return m.inside * (factor + own(max(surface, 0))) / 2 * (surface/m.k - c/m.cell)
	}
	if !m.slow {
		return through(m.beyond)
	}
	sum := 0.0
	rest := c / m.cell * m.k // a surface that nothing would leave for the cell
	for _, q := range m.parts {
		beyond := m.beyond + q.above
		excess := func(surface float64) float64 {
			return float64(m.area*q.k*(beyond-surface)) - float64(q.share*through(surface))
		}
		surface, err := numeric.Root(excess, rest, beyond, surfaceError*math.Abs(beyond-rest))
		if err == nil { // or else nothing passes, and there is nothing to find
			sum += float64(q.share * through(surface))
		}
	}
	return sum
}

// widen takes what is behind an open mouth, in units of k, into a range.
func (m *mouth) widen(lo, hi, k float64) (float64, float64) {
	if m.inside == 0 {
		return lo, hi
	}
	lo, hi = leastMost(lo, hi, m.beyond/k)
	for _, q := range m.parts {
		lo, hi = leastMost(lo, hi, (m.beyond+q.above)/k)
	}
	return lo, hi
}

// surfaceError is how closely the value at a surface is found, as a part of what
// drives the flux.
const surfaceError = 1e-12

// open fills in what goes through both ends, and if wanted by how much that
// changes with u.
func (w *newton) open(own func(float64) float64, in, out *mouth, c []float64, slopes bool) {
	n := len(c)
	w.inflow, w.outflow = 0, 0
	if slopes {
		w.against[0], w.onward[n] = 0, 0
	}
	d := slopeStep * w.size
	if in.inside > 0 {
		w.inflow = in.lets(own, c[0])
		if slopes && d > 0 {
			w.against[0] = max(0, (w.inflow-in.lets(own, c[0]+d))/d*in.cell)
		}
	}
	if out.inside > 0 {
		w.outflow = -out.lets(own, c[n-1])
		if slopes && d > 0 {
			w.onward[n] = max(0, (-w.outflow-out.lets(own, c[n-1]+d))/d*out.cell)
		}
	}
}

// enter books what came in through a mouth in one solve; slope is by how much
// that falls with u.
func (m *mouth) enter(b *book, amount, slope float64, euler bool) {
	if m.inside == 0 {
		return
	}
	if !euler {
		amount *= 2
	}
	b.lo, b.hi = m.widen(b.lo, b.hi, m.k)
	b.inflow += amount
	b.scale += math.Abs(amount)
	b.noise += float64(slope * math.Abs(m.beyond/m.k) * 0x1p-51)
}
