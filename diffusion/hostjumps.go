package diffusion

import "math"

// In a zoned host it is u = C/K that jumps at a zone boundary, and it jumps anew
// whenever temperature moves the ratio of both K. With K sqrt(D) in the place of
// sqrt(D) all is as in jumps.go (Crank 1975, section 2.4.2, is the truth there).

// hostEdge is a boundary between cells a and b, and how D differs there.
type hostEdge struct {
	plan   *Plan
	a, b   int
	ca, cb float64 // what is there when it begins
	ra, rb float64 // roots of D's factors
}

// addHostEdge is addEdge in a zoned host, of a boundary that comes with a stage. What
// the boundary holds when temperature jumps is between what the cells beside it held
// when that span began, beside(span).
func (p *Plan) addHostEdge(err []float64, edge edge, job Job, stage int, beside func(span int) [2]float64) {
	ca, cb := edge.sides[0], edge.sides[1]
	e := hostEdge{
		plan: p, a: edge.face - 1, b: edge.face, ca: ca, cb: cb,
		ra: math.Sqrt(p.problem.factor(p.grid.centres[edge.face-1]) * p.problem.own(ca)),
		rb: math.Sqrt(p.problem.factor(p.grid.centres[edge.face]) * p.problem.own(cb)),
	}
	was, meets, last := 0.0, 0.0, 0
	job.eachStep(p, stage, func(span int, temp, left float64) {
		ratio := e.ratio(temp)
		if was != 0 && span != last {
			meets = e.meets(beside(span), was)
		}
		last = span
		switch {
		case was == 0:
			blur := edge.blur()
			e.add(err, (ca+cb)/2*(1/ratio-1), ratio, 0, left)    // the part that K makes
			e.add(err, (cb-ca)*(1+1/ratio)/2, ratio, blur, left) // and the part that C makes
			e.addSlope(err, edge.width, temp, left)
			meets = (e.ra*ca + e.rb*cb) / (e.ra + ratio*e.rb) // C on side a of the boundary
		case ratio != was:
			e.add(err, meets*(was/ratio-1), ratio, 0, left)
		}
		was = ratio
	})
}

// meets returns what C is on side a of the boundary where the cells beside it hold
// these values, for the flux of the one half cell to be that of the other.
func (e *hostEdge) meets(c [2]float64, ratio float64) float64 {
	ga, gb := e.ra*e.ra/e.plan.width(e.a), e.rb*e.rb/e.plan.width(e.b)
	return (ga*c[0] + gb*c[1]) / (ga + ratio*gb)
}

// ratio returns K beyond the boundary over K before it.
func (e *hostEdge) ratio(temp float64) float64 {
	lnK, at := e.plan.problem.LnK, e.plan.host.atFaces
	return math.Exp(lnK(at[2*e.b], temp) - lnK(at[2*e.a+1], temp))
}

// add adds a jump of u, in units of C on side a.
func (e *hostEdge) add(err []float64, jump, ratio, blur, g float64) {
	ha, hb := e.plan.width(e.a), e.plan.width(e.b)
	both := e.ra + ratio*e.rb
	err[e.a] -= jump * 2 * ratio * e.rb / both * lag(blur/(ha*ha), e.ra*e.ra*g/(ha*ha))
	err[e.b] += jump * 2 * ratio * e.ra / both * lag(blur/(hb*hb), e.rb*e.rb*g/(hb*hb))
}

// addSlope adds what the grid does at first to slopes of u that differ, or to
// equal ones where D differs: see addEdge.
func (e *hostEdge) addSlope(err []float64, edge, temp, g float64) {
	p, da, db := e.plan, e.ra*e.ra, e.rb*e.rb
	ha, hb := p.width(e.a), p.width(e.b)
	h := (ha + hb) / 2
	of := (e.cb - e.ca) / h * math.Min(1, edge/edgesPerWidth/h)
	sa := of - e.ca*p.hostSlope(e.a, true, temp)
	sb := (of - e.cb*p.hostSlope(e.b, false, temp)) / e.ratio(temp)
	ratio := e.ratio(temp)
	lacks := (e.ra*sa+e.rb*sb)/(1/e.ra+1/(ratio*e.rb)) - (sa+sb)/(1/da+1/(ratio*db))
	err[e.a] -= lacks * g / ha * math.Pow(1+da*g/(h*h), -1.5)
	err[e.b] += lacks * g / hb * math.Pow(1+db*g/(h*h), -1.5)
}

// hostSlope returns the slope of ln K, 1/m, in the outer or inner half of a cell.
func (p *Plan) hostSlope(cell int, outer bool, temp float64) float64 {
	lnK, h := p.problem.LnK, p.host
	middle := lnK(h.x[cell], temp)
	if outer {
		return (lnK(h.atFaces[2*cell+1], temp) - middle) / (p.grid.faces[cell+1] - p.grid.centres[cell])
	}
	return (middle - lnK(h.atFaces[2*cell], temp)) / (p.grid.centres[cell] - p.grid.faces[cell])
}

// addWall adds what the grid does at a sealed end towards which ln K slopes: u is
// level there from the first moment on, and the first cell is late to see it. (At
// a centre nothing slopes.) An outer end comes with a stage.
func (p *Plan) addWall(err, start []float64, job Job, stage int, outer bool) {
	cell, next, sign, rims := 0, 1, -1.0, p.problem.Inner
	if outer {
		n := p.stages[stage].cells()
		cell, next, sign, rims = n-1, n-2, 1, p.problem.Outer
	}
	if !outer && p.problem.R0 == 0 && p.problem.Shape != Slab || next < 0 || next >= len(err) || cell >= len(err) || endingAt(rims, p.stages[stage].from).open {
		return
	}
	begun := false
	job.eachStep(p, stage, func(_ int, temp, left float64) {
		if begun {
			return
		}
		begun = true
		h := p.width(cell)
		slope := (start[next]-start[cell])/(p.grid.centres[next]-p.grid.centres[cell]) - start[cell]*p.hostSlope(cell, outer, temp)
		late := sign * slope * h * kinkLag(p.problem.factor(p.grid.centres[cell])*left/(h*h))
		err[cell] += late
		err[next] -= late
	})
}

// kinkLag is how much less than it should the first cell has changed after gamma
// where a slope of 1/h ran against a wall, between its limits gamma^2/2 and
// 1/(24 sqrt(pi gamma)): the Laplace transforms over gamma of what it does and
// should are (sqrt(1 + 4/p) - 1)/(2 p) and (1 - exp(-sqrt(p)))/p^2.
func kinkLag(gamma float64) float64 {
	if gamma == 0 {
		return 0
	}
	return 1 / (2/(gamma*gamma) + 24*math.Sqrt(math.Pi*gamma))
}

// eachStep calls visit for every solve of a coupled job from a stage on, with its
// span, its temperature, K, and the diffusion integral that is left when it begins.
func (j Job) eachStep(p *Plan, stage int, visit func(span int, temp, left float64)) {
	left := j.during(stage, len(p.stages))
	for i := range j.Course.spans {
		sp := &j.Course.spans[i]
		g := sp.integral(j.LnM)
		if g == 0 || sp.stage < stage {
			continue
		}
		for k, st := range p.steps {
			visit(i, 1/sp.coldness.fine[k], left)
			left = math.Max(left-st.df*g, 0)
		}
	}
}
