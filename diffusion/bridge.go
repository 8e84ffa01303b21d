package diffusion

import (
	"math"
	"sort"
)

// Where the host jumps, so does C, and with it D that depends on C: the mean over
// both cells would be that of neither side, however small the cells. There the two
// half cells are in series, each with the mean of D in its cell and at its side of
// the face, where u is between those of the cells.

// bridge is a face at which the host jumps.
type bridge struct {
	face            int
	share           float64 // of its resistance at unit D that lies inside
	inside, outside float64 // K at both of its sides
}

// layBridges finds the bridges of a coupled problem at a temperature, K.
func (w *newton) layBridges(p *Plan, op *operator, temp float64) {
	h, lnK := p.host, p.problem.LnK
	unit := lnK(h.x[len(h.x)/2], temp)
	w.bridged = append(w.bridged[:0], op.cond...)
	w.cond, w.bridges = w.bridged, w.bridges[:0]
	for _, z := range p.problem.Zones[:len(p.problem.Zones)-1] {
		b := sort.SearchFloat64s(p.grid.faces, z.Outer)
		a := b - 1
		if b >= len(op.vol) {
			break // not there yet
		}
		if h.atFaces[2*a+1] == h.atFaces[2*b] {
			continue
		}
		inside, outside := lnK(h.atFaces[2*a+1], temp)-unit, lnK(h.atFaces[2*b], temp)-unit
		left, right := lnK(h.x[a], temp)-unit, lnK(h.x[b], temp)-unit
		ra := h.half[2*a+1] * meanInverse(math.Exp(-left), left, inside)
		rb := h.half[2*b] * meanInverse(math.Exp(-right), right, outside)
		w.bridges = append(w.bridges, bridge{b, ra / (ra + rb), math.Exp(inside), math.Exp(outside)})
	}
}

// crossBridges makes the conductances of the bridges those that the mean of D in
// their two cells must be multiplied by in the state of potential u.
func (w *newton) crossBridges(own func(float64) float64, op *operator, u []float64) {
	for _, b := range w.bridges {
		left, right := w.factor[b.face-1], w.factor[b.face]
		mean := (left + right) / 2
		if mean == 0 {
			continue // nothing on either side
		}
		meets := max(0, (u[b.face-1]+u[b.face])/2)
		left, right = (left+own(b.inside*meets))/2, (right+own(b.outside*meets))/2
		w.cond[b.face] = op.cond[b.face] / mean / (b.share/left + (1-b.share)/right)
	}
}

// levelBridges makes the slopes at the bridges those at the D of the moment: how it
// changes there is left to the next iteration.
func (w *newton) levelBridges(s float64) {
	for _, b := range w.bridges {
		through := s * w.cond[b.face] * (w.factor[b.face-1] + w.factor[b.face]) / 2
		w.onward[b.face], w.against[b.face] = through, through
	}
}
