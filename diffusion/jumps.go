package diffusion

import (
	"fmt"
	"math"

	"bankfire/thermal/numeric"
)

// A jump narrower than a cell spreads slower on a grid than it should until it
// is about as wide as a cell, and half the cells are no better: their
// difference then says little. But for a jump on an even grid both the grid's
// answer and the true one are known, so what Audit reports for the two cells at
// a jump contains the difference. Jumps are the zone boundaries with edges
// narrower than a cell and whatever a rim does.

// should is what the first cell beside a jump of 1 has become after
// gamma = G/h^2, h being the width of a cell: the mean of erfc(x/(2 sqrt(G)))/2
// (Crank 1975, equation 2.14),
//
//	sqrt(gamma) (ierfc(0) - ierfc(1/(2 sqrt(gamma)))).
func should(gamma float64) float64 {
	root := math.Sqrt(gamma)
	if root == 0 {
		return 0
	}
	return root * (numeric.Ierfc(0) - numeric.Ierfc(1/(2*root)))
}

// does is what an even grid makes of it, (1 - exp(-2 gamma) I0(2 gamma))/2, the
// half of a walk that has left its place (Feller 1966, An introduction to
// probability theory, volume 2, section II.7).
func does(gamma float64) float64 { return (1 - besselScaled(2*gamma)) / 2 }

// lag is how much less than it should the first cell beside a jump of 1 has
// changed after gamma, where the jump had spread by blurred at the start, both
// in units of h^2.
func lag(blurred, gamma float64) float64 {
	if blurred > lagTail {
		return 0 // an edge that the cells resolve
	}
	begun := 0.0 // what the grid would have needed to spread it as much
	if blurred > 0 {
		root, err := numeric.Root(func(g float64) float64 { return does(g) - should(blurred) }, 0, 2*lagTail, 1e-12)
		if err != nil {
			panic(fmt.Sprintf("diffusion: no grid spreads a jump by %g: %v", blurred, err)) // does is monotone: cannot happen
		}
		begun = root
	}
	if sum := blurred + gamma; sum > lagTail {
		return (lagLead - (begun-blurred)/2) / (4 * math.Sqrt(math.Pi) * sum * math.Sqrt(sum))
	}
	return should(blurred+gamma) - does(begun+gamma)
}

const (
	// lagTail is where lag goes over to its leading term, then right to 3 %,
	// and lagLead what is in it: should is 1/2 - (1 - 1/(24 gamma))/sqrt(16 pi gamma)
	// and does 1/2 - (1 + 1/(16 gamma))/sqrt(16 pi gamma).
	lagTail = 10
	lagLead = 1.0/16 + 1.0/24
	// besselPoints is how many points make the trapezoidal rule exact to 1e-11
	// up to 2 lagTail.
	besselPoints = 32
)

// besselScaled returns exp(-x) I0(x), the mean over theta of exp(x (cos theta - 1))
// (Abramowitz and Stegun 1964, 9.6.16).
func besselScaled(x float64) float64 {
	sum := 0.0
	for i := range besselPoints {
		sum += math.Exp(x * (math.Cos(2*math.Pi*float64(i)/besselPoints) - 1))
	}
	return sum / besselPoints
}

// addJumps adds to err, of column j, what the grid does to the jumps of a job.
// f holds the job's outcome.
func (p *Plan) addJumps(err []float64, f *Field, job Job, j int) {
	at := 0 // in what was noted of the edges
	for s := range p.stages {
		zones, left := p.stages[s].zones, job.during(s, len(p.stages))
		for i := max(1, zones[0]); i < zones[1]; i++ {
			edge := edge{p.outside[i-1], p.problem.Zones[i-1].Edge, f.atEdge[at+j]}
			at += len(f.Cols)
			if p.host == nil {
				p.addEdge(err, edge, left)
			} else {
				p.addHostEdge(err, edge, job, s, func(span int) [2]float64 {
					return f.beside[(span*len(f.Cols)+j)*(len(p.outside)-1)+i-1]
				})
			}
		}
		if s == job.Course.last.stage {
			break
		}
	}
	if p.host != nil {
		p.addWall(err, p.fresh[j], job, 0, false)
		for s := range p.stages[:job.Course.last.stage+1] {
			p.addWall(err, p.fresh[j], job, s, true)
		}
	}
	p.addRim(err, f, job, j, rim{to: len(p.stages)})
	for s := range p.stages[:job.Course.last.stage+1] {
		p.addRim(err, f, job, j, rim{cell: p.stages[s].cells() - 1, side: 1, from: s, to: s + 1})
	}
}

// during returns the diffusion integral of the job from one stage to before another,
// m2.
func (j Job) during(from, to int) float64 {
	sum := 0.0
	for i := range j.Course.spans {
		if s := j.Course.spans[i].stage; s >= from && s < to {
			sum += j.Course.spans[i].integral(j.LnM)
		}
	}
	return sum
}

// edge is a zone boundary when it begins.
type edge struct {
	face  int
	width float64    // m
	sides [2]float64 // what is in the cells beside it
}

// addEdge adds what the grid does, in a diffusion integral of g, to the jump at
// a zone boundary with an edge of the given width. Where D differs between the
// two sides, the faster one moves what the slower one lets through. There an
// edge that cells resolve has a fault of its own: the flux through it should at
// once be its slope times the geometric mean of both D (Carslaw and Jaeger 1959,
// section 2.15, for two media), and on the grid begins with their harmonic mean
// until a cell has taken part.
func (p *Plan) addEdge(err []float64, e edge, g float64) {
	a, b := e.face-1, e.face
	jump := e.sides[1] - e.sides[0]
	da := p.problem.factor(p.grid.centres[a]) * p.problem.own(e.sides[0])
	db := p.problem.factor(p.grid.centres[b]) * p.problem.own(e.sides[1])
	ra, rb := math.Sqrt(da), math.Sqrt(db)
	blur := e.blur()
	lagAt := func(d float64, cell int) float64 {
		h := p.width(cell)
		return lag(blur/(h*h), d*g/(h*h))
	}
	err[a] -= jump * 2 * rb / (ra + rb) * lagAt(da, a)
	err[b] += jump * 2 * ra / (ra + rb) * lagAt(db, b)
	h := (p.width(a) + p.width(b)) / 2
	slope := jump / h * math.Min(1, e.width/edgesPerWidth/h)
	lacks := slope * (ra*rb - 2*da*db/(da+db)) * g
	err[a] -= lacks / p.width(a) * math.Pow(1+da*g/(h*h), -1.5)
	err[b] += lacks / p.width(b) * math.Pow(1+db*g/(h*h), -1.5)
}

// blur returns the diffusion integral that would have made the edge of a jump, m2.
func (e edge) blur() float64 { return e.width / edgesPerWidth * e.width / edgesPerWidth / 2 }

// noteSpan notes what addJumps needs of a span that begins, where there are n cells.
func (p *Plan) noteSpan(f *Field, n int) {
	for _, c := range f.Cols {
		f.atSpan = p.appendEnds(f.atSpan, c[:n])
		if p.host == nil {
			continue
		}
		for _, at := range p.outside[:len(p.outside)-1] {
			f.beside = append(f.beside, [2]float64{c[at-1], c[at]})
		}
	}
}

// appendEnds appends the values of a column at both ends of the crystal, on the
// straight line through the two cells beside them.
func (p *Plan) appendEnds(to, c []float64) []float64 {
	last := len(c) - 1
	if last == 0 {
		return append(to, c[0], c[0])
	}
	a := p.width(0) / (p.width(0) + p.width(1))
	b := p.width(last) / (p.width(last) + p.width(last-1))
	return append(to, c[0]+a*(c[0]-c[1]), c[last]+b*(c[last]-c[last-1]))
}

func (p *Plan) width(i int) float64 { return p.grid.faces[i+1] - p.grid.faces[i] }

// rim is one end of the crystal while it is that.
type rim struct {
	cell     int // beside it
	side     int // 0 is the inner end, 1 the outer
	from, to int // stages: in which it is first and no more
}

// addRim adds what the grid does to the changes of a rim. Each acts like a jump
// of twice its size between two cells, of which one side is seen; of a rim that
// exchanges see rimjumps.go. Where more is added there, no rim makes good any more
// for what has not come in; that spreads.
func (p *Plan) addRim(err []float64, f *Field, job Job, j int, r rim) {
	if r.cell >= len(err) {
		return // it is gone
	}
	h := p.width(r.cell)
	perG := p.problem.factor(p.grid.centres[r.cell]) / (h * h)
	left, noted := job.during(r.from, r.to), 0
	late := 1 / math.Sqrt(1+4*math.Pi*perG*job.during(r.to, len(p.stages)))
	var before outside
	for i := range job.Course.spans {
		sp := &job.Course.spans[i]
		g := sp.integral(job.LnM)
		if g == 0 {
			continue
		}
		at := noted
		if sp.exchanges() {
			noted += len(p.steps) * len(f.Cols)
		}
		if sp.stage < r.from || sp.stage >= r.to {
			continue
		}
		end := [...]*ending{&sp.inner, &sp.outer}[r.side]
		if !end.open {
			before, left = outside{}, math.Max(left-g, 0)
			continue
		}
		exchanges := end.exchange.fine != nil
		if !exchanges && !math.IsInf(before.b, 1) {
			before = outside{f.atSpan[(i*len(f.Cols)+j)*2+r.side], math.Inf(1)}
		}
		for k, st := range p.steps {
			if !(perG*left > talbotHead) {
				break // nothing comes in any more
			}
			e := p.ends(&p.stages[sp.stage].still, sp, j, k, st, g, false)
			now := outside{[...]float64{e.vIn, e.vOut}[r.side], math.Inf(1)}
			if exchanges {
				c := f.atEnds[at+k*len(f.Cols)+j][r.side]
				d := p.problem.own(before.surface(c))
				if now.b = end.exchange.sum(k) / (st.df * g * perG * h * d); !(now.b >= 0) {
					continue // nothing diffuses
				}
				err[r.cell] -= now.since(before, c) * exchangeLag(now.b, perG*d*left) * late
			} else if now != before && left > 0 {
				err[r.cell] -= 2 * (now.value - before.value) * lag(0, perG*left*(p.problem.own(before.value)+p.problem.own(now.value))/2) * late
			}
			before, left = now, math.Max(left-st.df*g, 0)
		}
	}
}
