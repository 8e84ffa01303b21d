package diffusion

import (
	"fmt"
	"math"
	"slices"
)

// A crystal grows outwards in stages. The grid of all zones is laid once; in a stage
// the solver sees the cells up to the rim of the moment, whose half cell leads to
// what holds there. The others keep what they will be added with. An edge between
// two zones comes with the outer one: what of it lies inside is added to the cells
// that are there, whatever they hold by then.

// stage is the stretch of a path between two additions of zones.
type stage struct {
	from  float64     // s from the start of the path; 0 in the first
	zones [2]int      // those that are added with it: from the first to before the second
	outer float64     // how far out it reaches, m
	moved bool        // it begins because the outer face has moved
	still operator    // of the cells that are there: without coupling the same in every solve; with it, what a resting lane has
	tails [][]float64 // of each column, what edges that come with the stage add to the cells that were there before
}

// cells is how many there are.
func (s *stage) cells() int { return len(s.still.vol) }

// layStages finds the stages of the plan.
func (p *Plan) layStages() error {
	zones := p.problem.Zones
	for i := range zones {
		before := len(p.stages) - 1
		if from := zones[i].Added; before < 0 || from > p.stages[before].from {
			p.stages = append(p.stages, stage{from: math.Max(from, 0), zones: [2]int{i, i}})
			before++
		}
		p.stages[before].zones[1] = i + 1
		p.stages[before].outer = zones[i].Outer
		p.outside = append(p.outside, slices.Index(p.grid.faces, zones[i].Outer))
	}
	if bounds := p.problem.layers(); bounds != nil {
		p.stages[len(p.stages)-1].outer = p.problem.turns()[0]
		p.addMoves(bounds)
	}
	cond := p.problem.conductances(p.grid)
	for i, k := range cond {
		centre := i == 0 && p.problem.R0 == 0 && p.problem.Shape != Slab
		if !(k > 0 || centre) || math.IsInf(k, 0) {
			return fmt.Errorf("diffusion: D is not a positive number near %g m", p.grid.faces[i])
		}
	}
	for i := range p.stages {
		n := slices.Index(p.grid.faces, p.stages[i].outer)
		op := operator{vol: p.grid.volumes[:n], cond: cond[:n+1], out: 1 / p.problem.halfCell(p.grid.faces[n], p.grid.faces[n-1])}
		if p.problem.LnK != nil {
			ones := slices.Repeat([]float64{1}, n)
			op.k, op.inverse, op.kIn, op.kOut = ones, ones, 1, 1
		}
		p.stages[i].still = op
	}
	return nil
}

// addColumn adds to the plan a column that starts with the zones at the given values,
// and with a profile unless nil.
func (p *Plan) addColumn(values []float64, profile func(r float64) float64) error {
	n := len(p.grid.centres)
	fresh := make([]float64, n)
	var means []float64 // of the zones that are there
	for s := range p.stages {
		st := &p.stages[s]
		if st.moved {
			st.tails = append(st.tails, nil)
			continue
		}
		tail := slices.Clone(means)
		means = make([]float64, n)
		if s+1 < len(p.stages) && !p.stages[s+1].moved {
			means = means[:st.cells()]
		}
		p.problem.cellMeans(means, p.grid, values[:st.zones[1]])
		copy(fresh[len(tail):], means[len(tail):])
		for i, v := range tail {
			tail[i] = means[i] - v
		}
		st.tails = append(st.tails, tail)
	}
	if profile != nil {
		addProfile(means, p.problem.Shape, p.grid, profile)
		addProfile(fresh, p.problem.Shape, p.grid, profile)
	}
	if i := slices.IndexFunc(means, func(v float64) bool { return !finite(v) }); i >= 0 {
		return fmt.Errorf("diffusion: column %d starts at %g near %g m", len(p.starts), means[i], p.grid.centres[i])
	}
	p.starts, p.fresh = append(p.starts, means), append(p.fresh, fresh)
	return nil
}

// stageAt returns the stage in force from t on, s.
func (p *Plan) stageAt(t float64) int {
	s := len(p.stages) - 1
	for s > 0 && p.stages[s].from > t {
		s--
	}
	return s
}

// abreast returns how many of the jobs, one or more, may go side by side: where
// zones are added, those of one course, which are all in one stage.
func (p *Plan) abreast(jobs []Job) int {
	most := min(lanes, len(jobs))
	if p.problem.Own != nil {
		most = min(2, len(jobs))
	}
	n := 1
	for n < most && (len(p.stages) == 1 || jobs[n].Course == jobs[0].Course) {
		n++
	}
	return n
}

// grow takes a run to the stage in which a span begins.
func (p *Plan) grow(f *Field, b *book, begins *span) {
	for f.stage < begins.stage {
		before := p.stages[f.stage].cells()
		f.stage++
		st := &p.stages[f.stage]
		if st.moved {
			for i := st.cells(); i < before; i++ {
				b.put(-p.grid.volumes[i] * f.Cols[0][i])
			}
			for j, c := range f.Cols {
				p.move(c, j, before, st, begins)
			}
		}
		for j, c := range f.Cols {
			for i, v := range st.tails[j] {
				c[i] += v
			}
		}
		c := f.Cols[0]
		b.grow(p, f.stage, func(i int) float64 { return c[i] })
		p.noteEdges(f)
	}
}

// noteEdges notes what is on both sides of the boundaries that come with the
// field's stage, column by column.
func (p *Plan) noteEdges(f *Field) {
	zones := p.stages[f.stage].zones
	for i := max(1, zones[0]); i < zones[1]; i++ {
		for _, c := range f.Cols {
			f.atEdge = append(f.atEdge, [2]float64{c[p.outside[i-1]-1], c[p.outside[i-1]]})
		}
	}
}

// grow books what a stage begins with, at being the answer in cell i then.
func (b *book) grow(p *Plan, to int, at func(i int) float64) {
	st := &p.stages[to]
	before := 0
	if to > 0 {
		before = p.stages[to-1].cells()
		for i, v := range st.tails[0] {
			b.put(p.grid.volumes[i] * v)
			b.see(at(i))
		}
	}
	for i := before; i < st.cells(); i++ {
		b.put(p.grid.volumes[i] * at(i))
		b.see(at(i))
	}
}

// put books an amount that the crystal began with or was added.
func (b *book) put(amount float64) {
	b.start += amount
	b.scale += math.Abs(amount)
}
