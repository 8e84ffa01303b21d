package diffusion

// crew is four jobs going side by side. Idle lanes take steps of length 0 and
// are thrown away.
type crew struct {
	plan  *Plan
	dst   []Field // one to four
	jobs  []Job
	books [lanes]book
	g     four // each lane's integral over the span, 0 where it rests
}

// runFour is runOne for up to four jobs, side by side in the scratch of dst[0].
func (p *Plan) runFour(dst []Field, jobs []Job) {
	cr := crew{plan: p, dst: dst, jobs: jobs}
	cells := len(p.grid.centres)
	f := &dst[0]
	f.lane4.resize(cells)
	for len(f.cols4) < len(p.starts) {
		f.cols4 = append(f.cols4, nil)
	}
	f.cols4 = f.cols4[:len(p.starts)]
	for j, start := range p.starts {
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
	for k := range dst {
		cr.fetch(k)
		cr.books[k].close(&dst[k].Stats, p, dst[k].Cols[0])
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
	last := len(p.grid.centres) - 1
	for j, c := range f.cols4 {
		e := cr.ends(i, j, n)
		if j > 0 {
			f.lane4.forward(&e, c)
			f.lane4.substitute(c, st.euler)
			continue
		}
		first0, last0 := c[0], c[last]
		p.eliminate4(&f.lane4, &s, &e, c)
		f.lane4.substitute(c, st.euler)
		for k := range cr.dst {
			if cr.g[k] != 0 {
				one := ends{e.kIn[k], e.kOut[k], e.vIn[k], e.vOut[k]}
				cr.books[k].enter(&p.still, one, st.euler, first0[k], last0[k], c[0][k], c[last][k])
			}
		}
	}
}

func (cr *crew) ends(i, j, n int) ends4 {
	var e ends4
	for k := range cr.dst {
		if cr.g[k] != 0 {
			one := cr.plan.ends(&cr.plan.still, &cr.jobs[k].Course.spans[i], j, n, cr.plan.steps[n], cr.g[k], false)
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
