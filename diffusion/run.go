package diffusion

import (
	"fmt"
	"math"
	"slices"
)

// Job is one run of a plan: a course, with D multiplied by exp(LnM).
type Job struct {
	Course *Course
	LnM    float64
}

// Stats say how a run went.
type Stats struct {
	Steps     int     // solves
	MassDrift float64 // content not accounted for by start and rims, as a part of all that was there or came
	Overshoot float64 // by how much the answer leaves the range of start and rim values, as a part of that range; 0 if coupled: it may
}

// Field is the outcome of a run. Its memory is reused by the next run into it.
type Field struct {
	Cols [][]float64 // cell means: the answer, then its derivative by each free value
	// StepErr and CellErr estimate, cell by cell, what the steps and the cells
	// did to each column: solution less truth, times safety. Filled by Audit.
	StepErr, CellErr [][]float64
	Stats            Stats

	stage  int // that the run has come to
	lane   lane
	op     operator  // of the solve in hand, of a coupled problem
	u      []float64 // C/K
	newton newton    // of a nonlinear step
	lane4  lane4
	cols4  [][]four
	u4     []four
	atSpan []float64    // of each span and column, the values at both ends when it begins
	atEdge [][2]float64 // of each boundary and column, those on both sides when it begins
	beside [][2]float64 // of each span, column and boundary, those on both sides when it begins; in a zoned host only
	atEnds [][2]float64 // of each solve and column in spans in which an end exchanges, those in the first and last cell before it
	other  *Field       // the coarser runs of Audit
}

// Run solves the plan's problem for all jobs and writes the outcome of jobs[k]
// to dst[k]; the slices must have equal lengths. Up to four jobs go side by
// side, two where D depends on the element itself, those of one course where zones
// are added; and dst[k] depends on jobs[k] alone, to the bit. Run does not allocate
// once dst has been used before; one dst belongs to one goroutine at a time. Cells
// that are never there hold what they would be added with.
// Courses made by another plan are refused.
func (p *Plan) Run(dst []Field, jobs []Job) error {
	if len(dst) != len(jobs) {
		panic(fmt.Sprintf("diffusion: len(dst) %d != len(jobs) %d", len(dst), len(jobs)))
	}
	if err := p.checkJobs(jobs); err != nil {
		return err
	}
	for len(jobs) > 0 {
		n := p.abreast(jobs)
		switch {
		case n == 1:
			p.runOne(&dst[0], jobs[0], false)
		case p.problem.Own != nil:
			p.runOwn([2]*Field{&dst[0], &dst[1]}, [2]Job{jobs[0], jobs[1]}, false)
		default:
			p.runFour(dst[:n], jobs[:n])
		}
		dst, jobs = dst[n:], jobs[n:]
	}
	return nil
}

func (p *Plan) checkJobs(jobs []Job) error {
	for k, j := range jobs {
		switch {
		case j.Course == nil || j.Course.plan != p:
			return fmt.Errorf("diffusion: job %d has no course of this plan", k)
		case !finite(j.LnM):
			return fmt.Errorf("diffusion: job %d multiplies D by exp(%g)", k, j.LnM)
		}
	}
	return nil
}

// Audit runs the job and measures its error: the differences from the same run
// in half the steps and on half the cells, each divided by three, as befits a
// method of second order (Richardson 1911; see gain), and multiplied by safety. To the
// latter comes what a grid is known to do to jumps that it does not resolve yet
// (see addJumps). It returns an error where the plan's faces cannot be halved.
func (p *Plan) Audit(dst *Field, job Job) error {
	if p.halved == nil {
		return fmt.Errorf("diffusion: the faces do not pair up, so the error of the cells cannot be measured")
	}
	half, err := p.halved()
	if err != nil {
		return err
	}
	if err := p.checkJobs([]Job{job}); err != nil {
		return err
	}
	if dst.other == nil {
		dst.other = new(Field)
	}
	whole := job
	p.runOne(dst, job, false)
	n, cells := len(dst.Cols), len(dst.Cols[0])
	dst.StepErr, dst.CellErr = resizedCols(dst.StepErr, n, cells), resizedCols(dst.CellErr, n, cells)
	p.runOne(dst.other, job, true)
	gain := p.problem.gain()
	for j, c := range dst.Cols {
		for i := range c {
			dst.StepErr[j][i] = (dst.other.Cols[j][i] - c[i]) * (safety / gain)
		}
	}
	if job.Course.halved != nil {
		job.Course = job.Course.halved
	}
	half.runOne(dst.other, job, false)
	for j, c := range dst.Cols {
		p.cellError(dst.CellErr[j], c, dst.other.Cols[j], gain)
		p.addJumps(dst.CellErr[j], dst, whole, j)
		for i := range dst.CellErr[j] {
			dst.CellErr[j][i] *= safety
		}
	}
	return nil
}

// safety covers that half the steps and half the cells are not fine enough for
// a third of the difference to be all of the error: the factor that Roache
// (1998, Verification and validation in computational science and engineering,
// section 5.6) asks for where the order has been shown on three grids.
const safety = 1.25

// cellError fills dst with the difference between fine cell means, averaged in
// pairs, and those of the halved plan, divided by gain.
func (p *Plan) cellError(dst, fine, coarse []float64, gain float64) {
	for i, c := range coarse {
		a, b := 2*i, 2*i+1
		va, vb := p.grid.volumes[a], p.grid.volumes[b]
		mean := (float64(va*fine[a]) + float64(vb*fine[b])) / (va + vb)
		dst[a], dst[b] = (c-mean)/gain, (c-mean)/gain
	}
}

// gain returns what the error of a run in half the steps or cells is more than that
// of a full run, as a part of the latter: 2^p - 1 for order p. That is two; but
// where D follows the element, or a rim exchanges, fronts and thin layers may show
// no more than shownOrder; and beside a rim that moves the layers show no more than 1.
func (p *Problem) gain() float64 {
	exchanges := func(r Rim) bool { return r.Kind == Transfer }
	if len(p.Moves) > 0 {
		return 1
	}
	if p.Own != nil || slices.ContainsFunc(p.Inner, exchanges) || slices.ContainsFunc(p.Outer, exchanges) {
		return math.Pow(2, shownOrder) - 1
	}
	return 3
}

const shownOrder = 1.5

// reset puts the start into the field's columns.
func (p *Plan) reset(f *Field) {
	f.Cols = resizedCols(f.Cols, len(p.fresh), len(p.grid.centres))
	for j, start := range p.fresh {
		copy(f.Cols[j], start)
	}
	f.Stats = Stats{}
	f.stage, f.atSpan, f.atEdge, f.beside, f.atEnds = 0, f.atSpan[:0], f.atEdge[:0], f.beside[:0], f.atEnds[:0]
	p.noteEdges(f)
}

// trim takes cells off that no crystal has in the end.
func (p *Plan) trim(f *Field) {
	for j := range f.Cols {
		f.Cols[j] = f.Cols[j][:p.cells()]
	}
}

// runOne takes the start through all spans of the job's course.
func (p *Plan) runOne(f *Field, job Job, rough bool) {
	if p.problem.Own != nil {
		p.runOwn([2]*Field{f}, [2]Job{job}, rough)
		return
	}
	p.reset(f)
	f.lane.resize(len(p.grid.centres))
	book := p.opened
	for i := range job.Course.spans {
		sp := &job.Course.spans[i]
		g := sp.integral(job.LnM)
		p.grow(f, &book, sp)
		n := p.stages[sp.stage].cells()
		p.noteSpan(f, n)
		if g == 0 {
			continue
		}
		for k, st := range p.solves(rough) {
			f.Stats.Steps++
			op := p.operator(f, sp, k, rough)
			for j, c := range f.Cols {
				c = c[:n]
				e := p.ends(op, sp, j, k, st, g, rough)
				f.noteEnds(sp, c)
				first, last := f.solve(op, st.length(g), e, c, j > 0, st.euler)
				if j == 0 {
					book.enter(op, e, st.euler, first, last, c[0], c[n-1])
				}
			}
		}
	}
	p.grow(f, &book, &job.Course.last)
	book.close(&f.Stats, p, f.Cols[0][:p.stages[f.stage].cells()])
	p.trim(f)
}

// operator returns what solve k of a span needs of the grid: the plan's own, or
// one made for it in the field.
func (p *Plan) operator(f *Field, sp *span, k int, rough bool) *operator {
	if p.host != nil {
		return f.couple(p, sp.stage, 1/sp.coldness.of(rough)[k])
	}
	return &p.stages[sp.stage].still
}

// solve advances a column by one solve, a further one or the first, and returns its
// first and last value before.
func (f *Field) solve(op *operator, s float64, e ends, c []float64, further, euler bool) (first, last float64) {
	first, last = c[0], c[len(c)-1]
	u := c
	if op.k != nil {
		u = f.potential(op, c)
	}
	if further {
		f.lane.forward(e, u)
	} else {
		f.lane.eliminate(op, s, e, u)
	}
	if op.k == nil {
		f.lane.substitute(c, euler)
	} else {
		f.lane.substituteCoupled(op.k, c, euler)
	}
	return first, last
}

func (p *Plan) solves(rough bool) schedule {
	if rough {
		return p.rough
	}
	return p.steps
}

// length returns s of the solve, m2, where g is the span's whole integral:
// the step for backward Euler, half of it for Crank-Nicolson.
func (s step) length(g float64) float64 {
	if s.euler {
		return s.df * g
	}
	return s.df * g / 2
}

// ends returns what the ends of column j are in solve k of a span whose whole
// integral is g.
func (p *Plan) ends(op *operator, sp *span, j, k int, st step, g float64, rough bool) ends {
	var e ends
	s := st.length(g)
	shape, inside, outside := p.problem.Shape, p.grid.faces[0], p.grid.faces[len(op.vol)]
	kIn, kOut := 1.0, 1.0
	if op.k != nil {
		kIn, kOut = op.kIn, op.kOut
	}
	if sp.inner.open {
		e.kIn, e.vIn = sp.inner.through(op.cond[0], s, shape.area(inside)*kIn, st, k, rough)
		if e.vIn += sp.inner.behind(p.problem.Inner, k, rough); j > 0 {
			e.vIn = at(p.problem.Free[j-1].Inner, sp.inner.rim)
		}
		e.vIn /= kIn
	}
	if sp.outer.open {
		e.kOut, e.vOut = sp.outer.through(op.out, s, shape.area(outside)*kOut, st, k, rough)
		if e.vOut += sp.outer.behind(p.problem.Outer, k, rough); j > 0 {
			e.vOut = at(p.problem.Free[j-1].Outer, sp.outer.rim)
		}
		e.vOut /= kOut
	}
	return e
}

// behind returns what is behind an open end in solve k of its span.
func (e *ending) behind(rims []Rim, k int, rough bool) float64 {
	if len(e.value.fine) == 0 {
		return rims[e.rim].Value
	}
	return e.value.of(rough)[k]
}

// at returns slopes[i], or 0 where there are none.
func at(slopes []float64, i int) float64 {
	if slopes == nil {
		return 0
	}
	return slopes[i]
}

// resizedCols returns cols as n columns of the given length, of new memory
// only where it must grow.
func resizedCols(cols [][]float64, n, length int) [][]float64 {
	for len(cols) < n {
		cols = append(cols, nil)
	}
	for j := range n {
		cols[j] = resized(cols[j], length)
	}
	return cols[:n]
}
