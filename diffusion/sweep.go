package diffusion

// One solve advances cell means c by the diffusion integral it covers. With V
// the cell volumes, K the conductances between cells and s the length of the
// step in G (half of it for Crank-Nicolson), it finds the change d from
//
//	(V + s K) d = s (k (v - c) - K c)
//
// at rims of conductance k held at v; then c becomes c + d (backward Euler) or
// c + 2 d (Crank-Nicolson). Solving for the change keeps a flat profile flat
// and a resting one as it is, to the bit, and what rounding does to the mass
// is a part of what moved, not of what is there.
//
// Elimination runs from both ends to the middle cell, in that order at every
// width, so that two chains of divisions overlap. A cell of excess e (its
// pivot less the coupling a to the next cell) hands a e/(e + a) on to the next
// one: two conductances in series. Only positive numbers are added, so the
// factors are accurate to round-off however long the step. Products that are
// added are wrapped in float64(), so that no processor fuses them and all give
// the same bits.

// ends says what both ends of the crystal do in one solve: conductances, 0
// where sealed, already times s, and the values behind them.
type ends struct{ kIn, kOut, vIn, vOut float64 }

// lane is the scratch of one path. For each cell but the middle one: the part
// of its right-hand side handed on, the reciprocal of its pivot, and the
// right-hand side.
type lane struct {
	factor, inverse, rhs []float64
	middle               float64 // reciprocal of the middle cell's pivot
}

func (l *lane) resize(n int) {
	l.factor, l.inverse, l.rhs = resized(l.factor, n), resized(l.inverse, n), resized(l.rhs, n)
}

// eliminate reduces the matrix for a step s, and the right-hand side of c.
func (p *Plan) eliminate(l *lane, s float64, e ends, c []float64) {
	n := len(c)
	m := n / 2
	vol, cond := p.grid.volumes[:n], p.cond[:n+1]
	factor, inverse, rhs := l.factor[:n], l.inverse[:n], l.rhs[:n]
	// handed on from the left and right: excess and right-hand side
	xi, fi := e.kIn, float64(e.kIn*(e.vIn-c[0]))
	xj, fj := e.kOut, float64(e.kOut*(e.vOut-c[n-1]))
	i, j := 0, n-1
	if n&1 == 0 { // the left chain is one cell longer
		a := float64(s * cond[1])
		inv := 1 / (vol[0] + a + xi)
		q, flux := a*inv, float64(a*(c[1]-c[0]))
		f := flux + fi
		factor[0], inverse[0], rhs[0] = q, inv, f
		xi, fi = float64(float64(a*(vol[0]+xi))*inv), float64(q*f)-flux
		i = 1
	}
	for ; i < m; i, j = i+1, j-1 {
		a, b := float64(s*cond[i+1]), float64(s*cond[j])
		invA, invB := 1/(vol[i]+a+xi), 1/(vol[j]+b+xj)
		fluxA, fluxB := float64(a*(c[i+1]-c[i])), float64(b*(c[j-1]-c[j]))
		qa, qb := a*invA, b*invB
		fa, fb := fluxA+fi, fluxB+fj
		factor[i], inverse[i], rhs[i] = qa, invA, fa
		factor[j], inverse[j], rhs[j] = qb, invB, fb
		xi, fi = float64(float64(a*(vol[i]+xi))*invA), float64(qa*fa)-fluxA
		xj, fj = float64(float64(b*(vol[j]+xj))*invB), float64(qb*fb)-fluxB
	}
	l.middle = 1 / (vol[m] + xi + xj)
	rhs[m] = fi + fj
}

// forward is eliminate for a further column of the same step.
func (p *Plan) forward(l *lane, s float64, e ends, c []float64) {
	n := len(c)
	m := n / 2
	cond, factor, rhs := p.cond[:n+1], l.factor[:n], l.rhs[:n]
	f := float64(e.kIn * (e.vIn - c[0]))
	for i := range m {
		flux := float64(float64(s*cond[i+1]) * (c[i+1] - c[i]))
		rhs[i] = flux + f
		f = float64(factor[i]*rhs[i]) - flux
	}
	g := float64(e.kOut * (e.vOut - c[n-1]))
	for j := n - 1; j > m; j-- {
		flux := float64(float64(s*cond[j]) * (c[j-1] - c[j]))
		rhs[j] = flux + g
		g = float64(factor[j]*rhs[j]) - flux
	}
	rhs[m] = f + g
}

// substitute solves outwards from the middle and adds the change to c, twice
// for Crank-Nicolson.
func (l *lane) substitute(c []float64, euler bool) {
	n := len(c)
	m := n / 2
	factor, inverse, rhs := l.factor[:n], l.inverse[:n], l.rhs[:n]
	times := 2.0
	if euler {
		times = 1
	}
	d := rhs[m] * l.middle
	u := d
	c[m] += float64(times * d)
	i, j := m-1, m+1
	for ; j < n; i, j = i-1, j+1 {
		d = float64(rhs[i]*inverse[i]) + float64(factor[i]*d)
		u = float64(rhs[j]*inverse[j]) + float64(factor[j]*u)
		c[i] += float64(times * d)
		c[j] += float64(times * u)
	}
	if i == 0 {
		d = float64(rhs[0]*inverse[0]) + float64(factor[0]*d)
		c[0] += float64(times * d)
	}
}

// resized returns s with length n, of new memory only if it must grow.
func resized(s []float64, n int) []float64 {
	if cap(s) < n {
		return make([]float64, n)
	}
	return s[:n]
}
