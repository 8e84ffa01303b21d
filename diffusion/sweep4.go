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
	cells  []cell4
	middle four
}

// cell4 is a cell's part of lane4.
type cell4 struct{ factor, rhs, series, inverse four }

func (l *lane4) resize(n int) {
	if cap(l.cells) < n {
		l.cells = make([]cell4, n)
	}
	l.cells = l.cells[:n]
}

// eliminate is that of lane, for paths that have one operator in common.
func (l *lane4) eliminate(op *operator, s *four, e *ends4, c []four) {
	n := len(c)
	m := n / 2
	vol, cond := op.vol[:n], op.cond[:n+1]
	s0, s1, s2, s3 := s[0], s[1], s[2], s[3]
	x, f := &e.kIn, inflow4(&e.kIn, &e.vIn, &c[0])
	y, g := &e.kOut, inflow4(&e.kOut, &e.vOut, &c[n-1])
	i, j := 0, n-1
	if n&1 == 0 {
		v, k := vol[0], cond[1]
		x = l.reduce(0, v, v, v, v, float64(s0*k), float64(s1*k), float64(s2*k), float64(s3*k), x, &f, &c[0], &c[1])
		i = 1
	}
	for ; i < m; i, j = i+1, j-1 {
		v, k := vol[i], cond[i+1]
		x = l.reduce(i, v, v, v, v, float64(s0*k), float64(s1*k), float64(s2*k), float64(s3*k), x, &f, &c[i], &c[i+1])
		v, k = vol[j], cond[j]
		y = l.reduce(j, v, v, v, v, float64(s0*k), float64(s1*k), float64(s2*k), float64(s3*k), y, &g, &c[j], &c[j-1])
	}
	for k := range lanes {
		l.middle[k] = 1 / (vol[m] + x[k] + y[k])
	}
	l.meet(m, &f, &g)
}

// eliminateEach is eliminate for paths with an operator each.
func (l *lane4) eliminateEach(ops *[lanes]*operator, s *four, e *ends4, c []four) {
	n := len(c)
	m := n / 2
	o0, o1, o2, o3 := ops[0], ops[1], ops[2], ops[3]
	s0, s1, s2, s3 := s[0], s[1], s[2], s[3]
	x, f := &e.kIn, inflow4(&e.kIn, &e.vIn, &c[0])
	y, g := &e.kOut, inflow4(&e.kOut, &e.vOut, &c[n-1])
	i, j := 0, n-1
	if n&1 == 0 {
		x = l.reduce(0, o0.vol[0], o1.vol[0], o2.vol[0], o3.vol[0], float64(s0*o0.cond[1]), float64(s1*o1.cond[1]),
			float64(s2*o2.cond[1]), float64(s3*o3.cond[1]), x, &f, &c[0], &c[1])
		i = 1
	}
	for ; i < m; i, j = i+1, j-1 {
		x = l.reduce(i, o0.vol[i], o1.vol[i], o2.vol[i], o3.vol[i], float64(s0*o0.cond[i+1]), float64(s1*o1.cond[i+1]),
			float64(s2*o2.cond[i+1]), float64(s3*o3.cond[i+1]), x, &f, &c[i], &c[i+1])
		y = l.reduce(j, o0.vol[j], o1.vol[j], o2.vol[j], o3.vol[j], float64(s0*o0.cond[j]), float64(s1*o1.cond[j]),
			float64(s2*o2.cond[j]), float64(s3*o3.cond[j]), y, &g, &c[j], &c[j-1])
	}
	for k := range lanes {
		l.middle[k] = 1 / (ops[k].vol[m] + x[k] + y[k])
	}
	l.meet(m, &f, &g)
}

// meet finds the change of the middle cell m, from what both chains hand on.
func (l *lane4) meet(m int, f, g *four) {
	for k := range lanes {
		l.cells[m].rhs[k] = float64((f[k] + g[k]) * l.middle[k])
	}
}

// reduce eliminates cell i of value c and volumes v, coupled by a to the next one of
// value d: x and f are what was handed to it, f and what is returned what it hands
// on.
func (l *lane4) reduce(i int, v0, v1, v2, v3, a0, a1, a2, a3 float64, x, f, c, d *four) *four {
	to := &l.cells[i]
	v0, v1, v2, v3 = v0+x[0], v1+x[1], v2+x[2], v3+x[3]
	i0, i1, i2, i3 := 1/(v0+a0), 1/(v1+a1), 1/(v2+a2), 1/(v3+a3)
	to.inverse[0], to.inverse[1], to.inverse[2], to.inverse[3] = i0, i1, i2, i3
	v0, v1 = float64(float64(a0*v0)*i0), float64(float64(a1*v1)*i1)
	v2, v3 = float64(float64(a2*v2)*i2), float64(float64(a3*v3)*i3)
	to.series[0], to.series[1], to.series[2], to.series[3] = v0, v1, v2, v3
	a0, a1, a2, a3 = float64(a0*i0), float64(a1*i1), float64(a2*i2), float64(a3*i3)
	to.factor[0], to.factor[1], to.factor[2], to.factor[3] = a0, a1, a2, a3
	s0, s1, s2, s3 := d[0]-c[0], d[1]-c[1], d[2]-c[2], d[3]-c[3]
	f0, f1, f2, f3 := f[0], f[1], f[2], f[3]
	to.rhs[0], to.rhs[1] = float64(a0*s0)+float64(f0*i0), float64(a1*s1)+float64(f1*i1)
	to.rhs[2], to.rhs[3] = float64(a2*s2)+float64(f2*i2), float64(a3*s3)+float64(f3*i3)
	f[0], f[1] = float64(a0*f0)-float64(v0*s0), float64(a1*f1)-float64(v1*s1)
	f[2], f[3] = float64(a2*f2)-float64(v2*s2), float64(a3*f3)-float64(v3*s3)
	return &to.series
}

func (l *lane4) forward(e *ends4, c []four) {
	n := len(c)
	m := n / 2
	f := inflow4(&e.kIn, &e.vIn, &c[0])
	for i := range m {
		l.carry(i, &f, &c[i], &c[i+1])
	}
	g := inflow4(&e.kOut, &e.vOut, &c[n-1])
	for j := n - 1; j > m; j-- {
		l.carry(j, &g, &c[j], &c[j-1])
	}
	l.meet(m, &f, &g)
}

// carry takes the right-hand side of a further column through cell i of value
// c, next to one of value d.
func (l *lane4) carry(i int, f, c, d *four) {
	at := &l.cells[i]
	for n := range lanes {
		step := d[n] - c[n]
		at.rhs[n] = float64(at.factor[n]*step) + float64(f[n]*at.inverse[n])
		f[n] = float64(at.factor[n]*f[n]) - float64(at.series[n]*step)
	}
}

// substitute is that of lane. Where the problem is coupled the operators make of
// changes of C/K changes of C; otherwise they have no K.
func (l *lane4) substitute(ops *[lanes]*operator, c []four, euler bool) {
	m := len(c) / 2
	times := 2.0
	if euler {
		times = 1
	}
	d := l.cells[m].rhs
	if ops[0].k == nil {
		for k := range lanes {
			c[m][k] += float64(times * d[k])
		}
		l.outwards(c, m-1, -1, times)
		l.outwards(c, m+1, 1, times)
		return
	}
	for k := range lanes {
		c[m][k] += float64(ops[k].k[m] * float64(times*d[k]))
	}
	l.outwardsEach(ops, c, m-1, -1, times)
	l.outwardsEach(ops, c, m+1, 1, times)
}

// outwards finds the changes of the cells from i on, by each, from that of the
// middle one, and adds them to c.
func (l *lane4) outwards(c []four, i, by int, times float64) {
	d := &l.cells[i-by].rhs
	d0, d1, d2, d3 := d[0], d[1], d[2], d[3]
	for ; uint(i) < uint(len(c)); i += by {
		at, to := &l.cells[i], &c[i]
		d0, d1 = at.rhs[0]+float64(at.factor[0]*d0), at.rhs[1]+float64(at.factor[1]*d1)
		d2, d3 = at.rhs[2]+float64(at.factor[2]*d2), at.rhs[3]+float64(at.factor[3]*d3)
		to[0] += float64(times * d0)
		to[1] += float64(times * d1)
		to[2] += float64(times * d2)
		to[3] += float64(times * d3)
	}
}

// outwardsEach is outwards where the changes are of C/K.
func (l *lane4) outwardsEach(ops *[lanes]*operator, c []four, i, by int, times float64) {
	d := &l.cells[i-by].rhs
	d0, d1, d2, d3 := d[0], d[1], d[2], d[3]
	k0, k1, k2, k3 := ops[0].k[:len(c)], ops[1].k[:len(c)], ops[2].k[:len(c)], ops[3].k[:len(c)]
	for ; uint(i) < uint(len(c)); i += by {
		at, to := &l.cells[i], &c[i]
		d0, d1 = at.rhs[0]+float64(at.factor[0]*d0), at.rhs[1]+float64(at.factor[1]*d1)
		d2, d3 = at.rhs[2]+float64(at.factor[2]*d2), at.rhs[3]+float64(at.factor[3]*d3)
		to[0] += float64(k0[i] * float64(times*d0))
		to[1] += float64(k1[i] * float64(times*d1))
		to[2] += float64(k2[i] * float64(times*d2))
		to[3] += float64(k3[i] * float64(times*d3))
	}
}

// potential4 fills dst with C/K.
func potential4(dst []four, ops *[lanes]*operator, c []four) {
	n := len(c)
	k0, k1, k2, k3 := ops[0].inverse[:n], ops[1].inverse[:n], ops[2].inverse[:n], ops[3].inverse[:n]
	dst = dst[:n]
	for i := range c {
		v, u := &c[i], &dst[i]
		u[0], u[1] = float64(v[0]*k0[i]), float64(v[1]*k1[i])
		u[2], u[3] = float64(v[2]*k2[i]), float64(v[3]*k3[i])
	}
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
