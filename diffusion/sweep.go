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
// one: two conductances in series. With q = a/(e + a), a cell of value c and the
// next one of value c', the change is
//
//	d = q (c' - c + d') + f/(e + a),  f' = q f - q e (c' - c),
//
// f being handed on to the cell and f' by it. Only positive numbers are added to
// make the factors, and the large products a c' and a c of a long step never
// meet: rounding stays that of what the cells hold. Products that are added are
// wrapped in float64(), so that no processor fuses them and all give the same
// bits.

// ends says what both ends of the crystal do in one solve: conductances, 0
// where sealed, already times s, and the values behind them.
type ends struct{ kIn, kOut, vIn, vOut float64 }

// lane is the scratch of one path. For each cell but the middle one: q, 1/(e + a),
// q e, and the part of the change that does not wait for the next cell's; of the
// middle one the change.
type lane struct {
	factor, inverse, series, rhs []float64
	middle                       float64 // reciprocal of the middle cell's pivot
}

func (l *lane) resize(n int) {
	l.factor, l.inverse = resized(l.factor, n), resized(l.inverse, n)
	l.series, l.rhs = resized(l.series, n), resized(l.rhs, n)
}

// eliminate reduces the matrix for a step s, and the right-hand side of c.
func (l *lane) eliminate(op *operator, s float64, e ends, c []float64) {
	n := len(c)
	m := n / 2
	vol, cond := op.vol[:n], op.cond[:n+1]
	factor, inverse, series, rhs := l.factor[:n], l.inverse[:n], l.series[:n], l.rhs[:n]
	// handed on from the left and right: conductance and right-hand side
	x, f := e.kIn, float64(e.kIn*(e.vIn-c[0]))
	y, g := e.kOut, float64(e.kOut*(e.vOut-c[n-1]))
	i, j := 0, n-1
	if n&1 == 0 { // the left chain is one cell longer
		a, v, step := float64(s*cond[1]), vol[0]+x, c[1]-c[0]
		inv := 1 / (v + a)
		q := float64(a * inv)
		x = float64(float64(a*v) * inv)
		factor[0], inverse[0], series[0], rhs[0] = q, inv, x, float64(q*step)+float64(f*inv)
		f = float64(q*f) - float64(x*step)
		i = 1
	}
	for ; i < m; i, j = i+1, j-1 {
		a, b := float64(s*cond[i+1]), float64(s*cond[j])
		v, w := vol[i]+x, vol[j]+y
		invA, invB := 1/(v+a), 1/(w+b)
		stepA, stepB := c[i+1]-c[i], c[j-1]-c[j]
		qa, qb := float64(a*invA), float64(b*invB)
		x, y = float64(float64(a*v)*invA), float64(float64(b*w)*invB)
		factor[i], inverse[i], series[i], rhs[i] = qa, invA, x, float64(qa*stepA)+float64(f*invA)
		factor[j], inverse[j], series[j], rhs[j] = qb, invB, y, float64(qb*stepB)+float64(g*invB)
		f = float64(qa*f) - float64(x*stepA)
		g = float64(qb*g) - float64(y*stepB)
	}
	l.middle = 1 / (vol[m] + x + y)
	rhs[m] = float64((f + g) * l.middle)
}

// forward is eliminate for a further column of the same step.
func (l *lane) forward(e ends, c []float64) {
	n := len(c)
	m := n / 2
	factor, inverse, series, rhs := l.factor[:n], l.inverse[:n], l.series[:n], l.rhs[:n]
	f := float64(e.kIn * (e.vIn - c[0]))
	for i := range m {
		step := c[i+1] - c[i]
		rhs[i] = float64(factor[i]*step) + float64(f*inverse[i])
		f = float64(factor[i]*f) - float64(series[i]*step)
	}
	g := float64(e.kOut * (e.vOut - c[n-1]))
	for j := n - 1; j > m; j-- {
		step := c[j-1] - c[j]
		rhs[j] = float64(factor[j]*step) + float64(g*inverse[j])
		g = float64(factor[j]*g) - float64(series[j]*step)
	}
	rhs[m] = float64((f + g) * l.middle)
}

// substitute solves outwards from the middle and adds the change to c, twice
// for Crank-Nicolson.
func (l *lane) substitute(c []float64, euler bool) {
	n := len(c)
	m := n / 2
	factor, rhs := l.factor[:n], l.rhs[:n]
	times := 2.0
	if euler {
		times = 1
	}
	d := rhs[m]
	u := d
	c[m] += float64(times * d)
	i, j := m-1, m+1
	for ; j < n; i, j = i-1, j+1 {
		d = rhs[i] + float64(factor[i]*d)
		u = rhs[j] + float64(factor[j]*u)
		c[i] += float64(times * d)
		c[j] += float64(times * u)
	}
	if i == 0 {
		d = rhs[0] + float64(factor[0]*d)
		c[0] += float64(times * d)
	}
}

// substituteCoupled is substitute where the changes are of C/K.
func (l *lane) substituteCoupled(k, c []float64, euler bool) {
	n := len(c)
	m := n / 2
	factor, rhs := l.factor[:n], l.rhs[:n]
	k = k[:n]
	times := 2.0
	if euler {
		times = 1
	}
	d := rhs[m]
	u := d
	c[m] += float64(k[m] * float64(times*d))
	i, j := m-1, m+1
	for ; j < n; i, j = i-1, j+1 {
		d = rhs[i] + float64(factor[i]*d)
		u = rhs[j] + float64(factor[j]*u)
		c[i] += float64(k[i] * float64(times*d))
		c[j] += float64(k[j] * float64(times*u))
	}
	if i == 0 {
		d = rhs[0] + float64(factor[0]*d)
		c[0] += float64(k[0] * float64(times*d))
	}
}

// resized returns s with length n, of new memory only if it must grow.
func resized(s []float64, n int) []float64 {
	if cap(s) < n {
		return make([]float64, n)
	}
	return s[:n]
}
