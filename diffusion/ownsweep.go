package diffusion

// Jobs in which D depends on C go two by two. Each has steps, iterations and an end
// of its own; only the elimination, a chain of divisions that waits for itself, is
// done for both together, and takes half of the time. What else a solve does keeps
// the processor busy by itself. factoriseTwo and sweepTwo do to two jobs what
// factorise and sweep do to one, in the same order: each gets the bits that it
// would get alone.

// factorise prepares for sweep to solve (V K + slopes) d = rhs, from both ends to
// the middle. As in sweep.go only positive numbers are added: a cell of excess e
// that drives a outwards and is driven b by the next one hands on b e/(e + a).
func (w *newton) factorise(vol []float64) {
	n := len(vol)
	m := n / 2
	pivot, on, back := w.pivot[:n], w.on[:n], w.back[:n]
	onward, against := w.onward[:n+1], w.against[:n+1]
	x, y := against[0], onward[n]
	i, j := 0, n-1
	if n&1 == 0 { // the left chain is one cell longer
		e, a := vol[0]+x, onward[1]
		inv := 1 / (e + a)
		pivot[0], on[0], back[0] = inv, float64(a*inv), float64(against[1]*inv)
		x = float64(back[0] * e)
		i = 1
	}
	for ; i < m; i, j = i+1, j-1 {
		e, a := vol[i]+x, onward[i+1]
		f, b := vol[j]+y, against[j]
		invA, invB := 1/(e+a), 1/(f+b)
		backA, backB := float64(against[i+1]*invA), float64(onward[j]*invB)
		x, y = float64(backA*e), float64(backB*f)
		pivot[i], on[i], back[i] = invA, float64(a*invA), backA
		pivot[j], on[j], back[j] = invB, float64(b*invB), backB
	}
	pivot[m] = 1 / (vol[m] + x + y)
}

// sweep solves in place of the right-hand side.
func (w *newton) sweep() {
	d := w.rhs
	n := len(d)
	m := n / 2
	pivot, on, back := w.pivot[:n], w.on[:n], w.back[:n]
	x, y := 0.0, 0.0
	i, j := 0, n-1
	if n&1 == 0 {
		x = float64(on[0] * d[0])
		i = 1
	}
	for ; i < m; i, j = i+1, j-1 {
		a, b := d[i]+x, d[j]+y
		d[i], d[j] = a, b
		x, y = float64(on[i]*a), float64(on[j]*b)
	}
	d[m] = float64((d[m] + x + y) * pivot[m])
	x, y = d[m], d[m]
	i, j = m-1, m+1
	for ; j < n; i, j = i-1, j+1 {
		x = float64(d[i]*pivot[i]) + float64(back[i]*x)
		y = float64(d[j]*pivot[j]) + float64(back[j]*y)
		d[i], d[j] = x, y
	}
	if i == 0 {
		d[0] = float64(d[0]*pivot[0]) + float64(back[0]*x)
	}
}

// factoriseTwo is factorise for two jobs.
func factoriseTwo(p, q *newton, volP, volQ []float64) {
	n := len(volP)
	m := n / 2
	volQ = volQ[:n]
	pp, po, pb := p.pivot[:n], p.on[:n], p.back[:n]
	pOn, pAg := p.onward[:n+1], p.against[:n+1]
	qp, qo, qb := q.pivot[:n], q.on[:n], q.back[:n]
	qOn, qAg := q.onward[:n+1], q.against[:n+1]
	x, y := pAg[0], pOn[n]
	z, w := qAg[0], qOn[n]
	i, j := 0, n-1
	if n&1 == 0 {
		e, a := volP[0]+x, pOn[1]
		inv := 1 / (e + a)
		pp[0], po[0], pb[0] = inv, float64(a*inv), float64(pAg[1]*inv)
		x = float64(pb[0] * e)
		e, a = volQ[0]+z, qOn[1]
		inv = 1 / (e + a)
		qp[0], qo[0], qb[0] = inv, float64(a*inv), float64(qAg[1]*inv)
		z = float64(qb[0] * e)
		i = 1
	}
	for ; i < m; i, j = i+1, j-1 {
		e, a := volP[i]+x, pOn[i+1]
		f, b := volP[j]+y, pAg[j]
		g, c := volQ[i]+z, qOn[i+1]
		h, d := volQ[j]+w, qAg[j]
		invA, invB := 1/(e+a), 1/(f+b)
		invC, invD := 1/(g+c), 1/(h+d)
		backA, backB := float64(pAg[i+1]*invA), float64(pOn[j]*invB)
		backC, backD := float64(qAg[i+1]*invC), float64(qOn[j]*invD)
		x, y = float64(backA*e), float64(backB*f)
		z, w = float64(backC*g), float64(backD*h)
		pp[i], po[i], pb[i] = invA, float64(a*invA), backA
		pp[j], po[j], pb[j] = invB, float64(b*invB), backB
		qp[i], qo[i], qb[i] = invC, float64(c*invC), backC
		qp[j], qo[j], qb[j] = invD, float64(d*invD), backD
	}
	pp[m] = 1 / (volP[m] + x + y)
	qp[m] = 1 / (volQ[m] + z + w)
}

// sweepTwo is sweep for two jobs.
func sweepTwo(p, q *newton) {
	a, b := p.rhs, q.rhs
	n := len(a)
	m := n / 2
	b = b[:n]
	pp, po, pb := p.pivot[:n], p.on[:n], p.back[:n]
	qp, qo, qb := q.pivot[:n], q.on[:n], q.back[:n]
	var x, y, z, w float64
	i, j := 0, n-1
	if n&1 == 0 {
		x, z = float64(po[0]*a[0]), float64(qo[0]*b[0])
		i = 1
	}
	for ; i < m; i, j = i+1, j-1 {
		c, d, e, f := a[i]+x, a[j]+y, b[i]+z, b[j]+w
		a[i], a[j], b[i], b[j] = c, d, e, f
		x, y = float64(po[i]*c), float64(po[j]*d)
		z, w = float64(qo[i]*e), float64(qo[j]*f)
	}
	a[m] = float64((a[m] + x + y) * pp[m])
	b[m] = float64((b[m] + z + w) * qp[m])
	x, y = a[m], a[m]
	z, w = b[m], b[m]
	i, j = m-1, m+1
	for ; j < n; i, j = i-1, j+1 {
		x = float64(a[i]*pp[i]) + float64(pb[i]*x)
		y = float64(a[j]*pp[j]) + float64(pb[j]*y)
		z = float64(b[i]*qp[i]) + float64(qb[i]*z)
		w = float64(b[j]*qp[j]) + float64(qb[j]*w)
		a[i], a[j], b[i], b[j] = x, y, z, w
	}
	if i == 0 {
		a[0] = float64(a[0]*pp[0]) + float64(pb[0]*x)
		b[0] = float64(b[0]*qp[0]) + float64(qb[0]*z)
	}
}
