package paths

import (
	"math"
	"slices"

	"bankfire/paths/study"
)

// edges are what is known of the widths of an element's edges: one width for all, or
// one a boundary, and for those that are open the widths that are solved for.
//
// A profile is a sum over boundaries, each of which has a part by its own width alone,
//
//	profile(w) = sum over boundaries b of part_b(w_b),
//
// and the solution is linear in it. So each boundary is solved with its own widths, the
// others being in the middle of theirs, and what several widths do together is
//
//	profile(w) = middle + sum over b of (profile with w_b alone - middle):
//
// as many solves as there are widths in all, not their product. Where D follows the
// element itself that does not hold, and one width may be open.
type edges struct {
	known []study.Nuisance // one for all boundaries, or one each
	nodes [][]float64      // widths between which each is interpolated: one where it is known exactly
}

// newEdges chooses nodes for each width that is open, so many.
func newEdges(known []study.Nuisance, counts []int) edges {
	e := edges{known: known}
	for k, n := range known {
		e.nodes = append(e.nodes, nodes(n, 0, math.Inf(1), counts[k]))
	}
	return e
}

// middle is the node of a width that it has while others are away from theirs.
func (e *edges) middle(k int) int { return len(e.nodes[k]) / 2 }

// middles are the widths that all have then.
func (e *edges) middles() []float64 {
	out := make([]float64, len(e.nodes))
	for k := range out {
		out[k] = e.nodes[k][e.middle(k)]
	}
	return out
}

// open are the numbers of the widths that have more than one node.
func (e *edges) open() []int {
	var list []int
	for k, nodes := range e.nodes {
		if len(nodes) > 1 {
			list = append(list, k)
		}
	}
	return list
}

// runs are the widths to solve for: all nodes of the first that is open, the others in
// their middle, then the other nodes of the next one.
func (e *edges) runs() [][]float64 {
	var out [][]float64
	for i, k := range e.open() {
		for j, width := range e.nodes[k] {
			if i > 0 && j == e.middle(k) {
				continue
			}
			widths := e.middles()
			widths[k] = width
			out = append(out, widths)
		}
	}
	if out == nil {
		out = append(out, e.middles())
	}
	return out
}

// middleRun is the run in which all widths are in their middle.
func (e *edges) middleRun() int {
	if open := e.open(); open != nil {
		return e.middle(open[0])
	}
	return 0
}

// weights returns the weights with which the runs make the profile of the given widths.
func (e *edges) weights(widths []float64) []float64 {
	var out []float64
	for i, k := range e.open() {
		by := lagrange(e.nodes[k], widths[k])
		if i == 0 {
			out = append(out, by...)
			continue
		}
		middle := e.middle(k)
		out[e.middleRun()] += by[middle] - 1
		out = append(append(out, by[:middle]...), by[middle+1:]...)
	}
	if out == nil {
		out = []float64{1}
	}
	return out
}

// halfways are widths half way between two nodes of width k, the others in their
// middle: where interpolation is worst.
func (e *edges) halfways(k int) [][]float64 {
	var out [][]float64
	for j := 1; j < len(e.nodes[k]); j++ {
		widths := e.middles()
		widths[k] = (e.nodes[k][j-1] + e.nodes[k][j]) / 2
		out = append(out, widths)
	}
	return out
}

// free are the numbers of the widths that the fit decides.
func (e *edges) free() []int {
	var list []int
	for k, n := range e.known {
		if !n.Fixed() {
			list = append(list, k)
		}
	}
	return list
}

// with returns the edges with one width known.
func (e edges) with(k int, width float64) edges {
	e.known = slices.Clone(e.known)
	e.known[k] = study.Nuisance{Value: width}
	return e
}
