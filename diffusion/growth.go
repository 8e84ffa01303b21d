package diffusion

import (
	"fmt"
	"math"
	"slices"
)

// Where the outer face moves at a rate, the material that it moves over is laid out in
// thin layers. One is added, or taken away as it is, when the face is in its middle: a
// step of growth between two of diffusion, each half done on either side of the other
// (Strang 1968, SIAM J. Numer. Anal. 5, 506-517), of which a rim that is held leaves an
// error of order 3/2 in the layers. Adding each when the face begins it has order 1.

// Move is a time in which the outer face moves: material is added at the value of the
// rim, or where that is sealed at what is there, or goes as it is.
type Move struct {
	From, Until float64 // s from the start of the path
	Rate        float64 // m/s, negative where the crystal shrinks
}

// defaultLayers is how many layers are laid over all that the face moves over.
const defaultLayers = 200

// before returns how far out the face was before it moved, m. The zones are those
// after all moves.
func (p *Problem) before() float64 {
	r := p.size()
	for _, m := range p.Moves {
		r -= m.Rate * (m.Until - m.From)
	}
	return r
}

// turns returns where the face is before, between and after moves, m.
func (p *Problem) turns() []float64 {
	at := []float64{p.before()}
	for i, m := range p.Moves {
		r := at[i] + m.Rate*(m.Until-m.From)
		if math.Abs(r-p.size()) < sameFace*p.size() {
			r = p.size()
		}
		if near := slices.IndexFunc(at, func(x float64) bool { return math.Abs(x-r) < sameFace*p.size() }); near >= 0 {
			r = at[near]
		}
		at = append(at, r)
	}
	return at
}

// sameFace is how far apart, as a part of the crystal, two places of the face are one.
const sameFace = 1e-9

// layers returns the bounds of the layers, ascending; nil where nothing moves.
func (p *Problem) layers() []float64 {
	if len(p.Moves) == 0 {
		return nil
	}
	turns := p.turns()
	slices.Sort(turns)
	turns = slices.Compact(turns)
	whole := turns[len(turns)-1] - turns[0]
	out := turns[:1:1]
	for i := 1; i < len(turns); i++ {
		a, b := turns[i-1], turns[i]
		n := max(1, int(math.Round((b-a)/whole*float64(p.layerCount())/2))) // of twice the thickness
		if !p.thick {
			n *= 2
		}
		for k := 1; k < n; k++ {
			out = append(out, a+(b-a)*float64(k)/float64(n))
		}
		out = append(out, b)
	}
	return out
}

func (p *Problem) layerCount() int {
	if p.layered > 0 {
		return p.layered
	}
	return defaultLayers
}

// far returns the outer end of all cells, m: beyond the crystal where it shrinks.
func (p *Problem) far() float64 {
	if len(p.Moves) == 0 {
		return p.size()
	}
	return slices.Max(p.turns())
}

// checkMoves refuses moves that overlap, or of more than the outermost zone.
func (p *Problem) checkMoves() error {
	last := p.Zones[len(p.Zones)-1]
	inner, ready := p.R0, math.Max(last.Added, 0)
	if n := len(p.Zones); n > 1 {
		inner = p.Zones[n-2].Outer
	}
	for i, m := range p.Moves {
		if !finite(m.Rate) || m.Rate == 0 || !finite(m.From) || !(m.Until > m.From) || m.From < ready {
			return fmt.Errorf("diffusion: move %d of %g m/s from %g to %g s, where all before is done at %g s", i, m.Rate, m.From, m.Until, ready)
		}
		ready = m.Until
	}
	if len(p.Moves) > 0 {
		if least := slices.Min(p.turns()); !(least > inner) {
			return fmt.Errorf("diffusion: the face moves as far in as %g m, not outside %g m, where the outermost zone begins", least, inner)
		}
	}
	return nil
}

// addMoves adds the stages of the moves.
func (p *Plan) addMoves(bounds []float64) {
	turns := p.problem.turns()
	zone := len(p.problem.Zones)
	for i, m := range p.problem.Moves {
		from, to := slices.Index(bounds, turns[i]), slices.Index(bounds, turns[i+1])
		by := 1
		if to < from {
			by = -1
		}
		for k := from; k != to; k += by {
			middle := (bounds[k] + bounds[k+by]) / 2
			p.stages = append(p.stages, stage{
				from: m.From + (middle-turns[i])/m.Rate, zones: [2]int{zone, zone}, outer: bounds[k+by], moved: true,
			})
		}
	}
}

// lays returns the value, of the answer or of a column of a free value, at which
// material is laid down in a span that begins; ok is false where the rim is sealed.
func (p *Plan) lays(e *ending, value float64, j int) (laid float64, ok bool) {
	switch {
	case !e.open:
		return 0, false
	case j > 0:
		return at(p.problem.Free[j-1].Outer, e.rim), true
	}
	return value, true
}

// move fills in what a stage that begins with a move adds to a column of a run, in
// which so many cells were there before.
func (p *Plan) move(c []float64, j, before int, st *stage, begins *span) {
	laid, ok := p.lays(&begins.outer, begins.laid, j)
	for i := before; i < st.cells(); i++ {
		if !ok {
			laid = c[before-1]
		}
		c[i] = laid
	}
}
