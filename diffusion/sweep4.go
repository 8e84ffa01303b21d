package diffusion

// The same solve for four paths side by side, so that the chain of divisions
// of one hides behind the others'. Every line does to four numbers what its
// counterpart in sweep.go does to one, in the same order: each path gets the
// bits it would get alone.

// lanes is how many paths go side by side.
const lanes = 4

type four = [lanes]float64

// ends4 is ends for four paths.
type ends4 struct{ kIn, kOut, vIn, vOut four }

// lane4 is lane for four paths, cell by cell.
type lane4 struct {
	factor, inverse, rhs []four
	middle               four
}

func (l *lane4) resize(n int) {
	l.factor, l.inverse, l.rhs = resized4(l.factor, n), resized4(l.inverse, n), resized4(l.rhs, n)
}

func (p *Plan) eliminate4(l *lane4, s *four, e *ends4, c []four) {
	n := len(c)
	m := n / 2
	vol, cond := p.grid.volumes[:n], p.cond[:n+1]
	x, f := e.kIn, inflow4(&e.kIn, &e.vIn, &c[0])
	y, g := e.kOut, inflow4(&e.kOut, &e.vOut, &c[n-1])
	i, j := 0, n-1
	if n&1 == 0 {
		l.reduce(0, s, vol[0], cond[1], &x, &f, &c[0], &c[1])
		i = 1
	}
	for ; i < m; i, j = i+1, j-1 {
		l.reduce(i, s, vol[i], cond[i+1], &x, &f, &c[i], &c[i+1])
		l.reduce(j, s, vol[j], cond[j], &y, &g, &c[j], &c[j-1])
	}
	for k := range lanes {
		l.middle[k] = 1 / (vol[m] + x[k] + y[k])
		l.rhs[m][k] = f[k] + g[k]
	}
}

// reduce eliminates cell i of volume v and value c, coupled by k to the next
// one of value d: x and f are what was handed to it, and become what it hands
// on.
func (l *lane4) reduce(i int, s *four, v, k float64, x, f, c, d *four) {
	q, inv, rhs := &l.factor[i], &l.inverse[i], &l.rhs[i]
	a0, a1, a2, a3 := float64(s[0]*k), float64(s[1]*k), float64(s[2]*k), float64(s[3]*k)
	i0, i1, i2, i3 := 1/(v+a0+x[0]), 1/(v+a1+x[1]), 1/(v+a2+x[2]), 1/(v+a3+x[3])
	x[0], x[1] = float64(float64(a0*(v+x[0]))*i0), float64(float64(a1*(v+x[1]))*i1)
	x[2], x[3] = float64(float64(a2*(v+x[2]))*i2), float64(float64(a3*(v+x[3]))*i3)
	inv[0], inv[1], inv[2], inv[3] = i0, i1, i2, i3
	i0, i1, i2, i3 = a0*i0, a1*i1, a2*i2, a3*i3
	q[0], q[1], q[2], q[3] = i0, i1, i2, i3
	a0, a1 = float64(a0*(d[0]-c[0])), float64(a1*(d[1]-c[1]))
	a2, a3 = float64(a2*(d[2]-c[2])), float64(a3*(d[3]-c[3]))
	f0, f1, f2, f3 := a0+f[0], a1+f[1], a2+f[2], a3+f[3]
	rhs[0], rhs[1], rhs[2], rhs[3] = f0, f1, f2, f3
	f[0], f[1], f[2], f[3] = float64(i0*f0)-a0, float64(i1*f1)-a1, float64(i2*f2)-a2, float64(i3*f3)-a3
}

func (p *Plan) forward4(l *lane4, s *four, e *ends4, c []four) {
	n := len(c)
	m := n / 2
	f := inflow4(&e.kIn, &e.vIn, &c[0])
	for i := range m {
		l.carry(i, s, p.cond[i+1], &f, &c[i], &c[i+1])
	}
	g := inflow4(&e.kOut, &e.vOut, &c[n-1])
	for j := n - 1; j > m; j-- {
		l.carry(j, s, p.cond[j], &g, &c[j], &c[j-1])
	}
	for k := range lanes {
		l.rhs[m][k] = f[k] + g[k]
	}
}

// carry takes the right-hand side of a further column through cell i of value
// c, coupled by k to the next one of value d.
func (l *lane4) carry(i int, s *four, k float64, f, c, d *four) {
	q, rhs := &l.factor[i], &l.rhs[i]
	for n := range lanes {
		flux := float64(float64(s[n]*k) * (d[n] - c[n]))
		rhs[n] = flux + f[n]
		f[n] = float64(q[n]*rhs[n]) - flux
	}
}

func (l *lane4) substitute(c []four, euler bool) {
	n := len(c)
	m := n / 2
	times := 2.0
	if euler {
		times = 1
	}
	var d four
	for k := range lanes {
		d[k] = l.rhs[m][k] * l.middle[k]
		c[m][k] += float64(times * d[k])
	}
	u := d
	for i := m - 1; i >= 0; i-- {
		l.solve(i, times, &d, &c[i])
	}
	for j := m + 1; j < n; j++ {
		l.solve(j, times, &u, &c[j])
	}
}

// solve finds the change of cell i from its neighbour's d, which becomes its
// own, and adds it to c.
func (l *lane4) solve(i int, times float64, d, c *four) {
	q, inv, rhs := &l.factor[i], &l.inverse[i], &l.rhs[i]
	d0 := float64(rhs[0]*inv[0]) + float64(q[0]*d[0])
	d1 := float64(rhs[1]*inv[1]) + float64(q[1]*d[1])
	d2 := float64(rhs[2]*inv[2]) + float64(q[2]*d[2])
	d3 := float64(rhs[3]*inv[3]) + float64(q[3]*d[3])
	d[0], d[1], d[2], d[3] = d0, d1, d2, d3
	c[0] += float64(times * d0)
	c[1] += float64(times * d1)
	c[2] += float64(times * d2)
	c[3] += float64(times * d3)
}

// inflow4 returns what the rims drive into the cells of value c beside them.
func inflow4(k, v, c *four) four {
	return four{
		float64(k[0] * (v[0] - c[0])), float64(k[1] * (v[1] - c[1])),
		float64(k[2] * (v[2] - c[2])), float64(k[3] * (v[3] - c[3])),
	}
}

func resized4(s []four, n int) []four {
	if cap(s) < n {
		return make([]four, n)
	}
	return s[:n]
}
