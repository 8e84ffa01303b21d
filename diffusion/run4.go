package diffusion

// crew is four jobs going side by side. Idle lanes take steps of length 0 and
// are thrown away.
type crew struct {
	plan  *Plan
	dst   []Field // one to four
	jobs  []Job
	books [lanes]book
	stage int
	g     four             // each lane's integral over the span, 0 where it rests
	ops   [lanes]*operator // in the solve in hand
}

// runFour is runOne for up to four jobs, side by side in the scratch of dst[0].
func (p *Plan) runFour(dst []Field, jobs []Job) {
	cr := crew{plan: p, dst: dst, jobs: jobs}
	cells := len(p.grid.centres)
	f := &dst[0]
	f.lane4.resize(cells)
	f.u4 = resized4(f.u4, cells)
	for len(f.cols4) < len(p.fresh) {
		f.cols4 = append(f.cols4, nil)
	}
	f.cols4 = f.cols4[:len(p.fresh)]
	for j, start := range p.fresh {
		f.cols4[j] = resized4(f.cols4[j], cells)
		for i, v := range start {
			f.cols4[j][i] = four{v, v, v, v}
		}
	}
	spans := 0
	for k := range dst {
		p.reset(&dst[k])
		cr.books[k] = p.opened
		spans = max(spans, len(jobs[k].Course.spans))
	}
	for i := range spans {
		cr.span(i)
	}
	cr.grow(&jobs[0].Course.last)
	for k := range dst {
		cr.fetch(k)
		cr.books[k].close(&dst[k].Stats, p, dst[k].Cols[0][:p.stages[cr.stage].cells()])
		p.trim(&dst[k])
	}
}

// grow takes the crew to the stage in which a span begins, which is the same for all:
// see abreast.
func (cr *crew) grow(begins *span) {
	p := cr.plan
	for cr.stage < begins.stage {
		before := p.stages[cr.stage].cells()
		cr.stage++
		if st := &p.stages[cr.stage]; st.moved {
			cr.move(before, st, begins)
		}
		for j, c := range cr.dst[0].cols4 {
			for i, v := range p.stages[cr.stage].tails[j] {
				for k := range c[i] {
					c[i][k] += v
				}
			}
		}
		c := cr.dst[0].cols4[0]
		for k := range cr.dst {
			cr.books[k].grow(p, cr.stage, func(i int) float64 { return c[i][k] })
		}
	}
}

// move is what grow and move of a plan do for one run.
func (cr *crew) move(before int, st *stage, begins *span) {
	p, cols := cr.plan, cr.dst[0].cols4
	for k := range cr.dst {
		for i := st.cells(); i < before; i++ {
			cr.books[k].put(-p.grid.volumes[i] * cols[0][i][k])
		}
	}
	for j, c := range cols {
		laid, ok := p.lays(&begins.outer, begins.laid, j)
		for i := before; i < st.cells(); i++ {
			if c[i] = c[before-1]; ok {
				c[i] = four{laid, laid, laid, laid}
			}
		}
	}
}

// span takes the crew through span i. A lane without such a span, or that does
// not diffuse in it, takes steps of length 0, which change nothing.
func (cr *crew) span(i int) {
	for k := range cr.dst {
		cr.g[k] = 0
		if spans := cr.jobs[k].Course.spans; i < len(spans) {
			cr.g[k] = spans[i].integral(cr.jobs[k].LnM)
		}
		if cr.g[k] != 0 {
			cr.dst[k].Stats.Steps += len(cr.plan.steps)
		}
	}
	if i < len(cr.jobs[0].Course.spans) {
		cr.grow(&cr.jobs[0].Course.spans[i])
	}
	if cr.g == (four{}) {
		return
	}
	for n := range cr.plan.steps {
		cr.step(i, n)
	}
}

// step does solve n of span i.
func (cr *crew) step(i, n int) {
	f, p := &cr.dst[0], cr.plan
	st := p.steps[n]
	var s four
	for k := range cr.dst {
		s[k] = st.length(cr.g[k])
	}
	one := cr.operators(i, n)
	cells := p.stages[cr.stage].cells()
	last := cells - 1
	for j, c := range f.cols4 {
		c = c[:cells]
		u := c
		if p.host != nil {
			u = f.u4[:cells]
			potential4(u, &cr.ops, c)
		}
		e := cr.ends(i, j, n)
		first0, last0 := c[0], c[last]
		switch {
		case j > 0:
			f.lane4.forward(&e, u)
		case one:
			f.lane4.eliminate(cr.ops[0], &s, &e, u)
		default:
			f.lane4.eliminateEach(&cr.ops, &s, &e, u)
		}
		f.lane4.substitute(&cr.ops, c, st.euler)
		for k := range cr.dst {
			if j == 0 && cr.g[k] != 0 {
				one := ends{e.kIn[k], e.kOut[k], e.vIn[k], e.vOut[k]}
				cr.books[k].enter(cr.ops[k], one, st.euler, first0[k], last0[k], c[0][k], c[last][k])
			}
		}
	}
}

// operators finds each lane's operator in solve n of span i, the same for lanes of
// one course, and reports whether all have one in common. A lane that rests has
// the plan's own: another's K may be nothing where it is large.
func (cr *crew) operators(i, n int) (one bool) {
	if cr.plan.host == nil {
		still := &cr.plan.stages[cr.stage].still
		cr.ops = [lanes]*operator{still, still, still, still}
		return true
	}
	one = true
	for k := range cr.ops {
		cr.ops[k] = cr.operator(i, n, k)
		one = one && cr.ops[k] == cr.ops[0]
	}
	return one
}

func (cr *crew) operator(i, n, k int) *operator {
	if k >= len(cr.dst) {
		return cr.ops[0]
	}
	if cr.g[k] == 0 {
		return &cr.plan.stages[cr.stage].still
	}
	for b := range k {
		if cr.jobs[b].Course == cr.jobs[k].Course && cr.g[b] != 0 {
			return cr.ops[b]
		}
	}
	cr.dst[k].op.place = k
	return cr.dst[k].couple(cr.plan, cr.stage, 1/cr.jobs[k].Course.spans[i].coldness.fine[n])
}

func (cr *crew) ends(i, j, n int) ends4 {
	var e ends4
	for k := range cr.dst {
		if cr.g[k] != 0 {
			one := cr.plan.ends(cr.ops[k], &cr.jobs[k].Course.spans[i], j, n, cr.plan.steps[n], cr.g[k], false)
			e.kIn[k], e.kOut[k], e.vIn[k], e.vOut[k] = one.kIn, one.kOut, one.vIn, one.vOut
		}
	}
	return e
}

// fetch copies lane k into its field.
func (cr *crew) fetch(k int) {
	for j, c := range cr.dst[0].cols4 {
		for i := range c {
			cr.dst[k].Cols[j][i] = c[i][k]
		}
	}
}
