package diffusion

import (
	"fmt"
	"math"
	"sort"

	"bankfire/thermal/numeric"
)

const (
	defaultCells = 200
	// minSegment is the least number of cells between two neighbouring
	// boundaries, and steepest the largest ratio of neighbouring cells: at 1.2
	// the leading error of the flux on a graded grid stays that of an even one.
	minSegment = 8
	steepest   = 1.2
	// cellsOfLayer is the least number in a layer over which the outer face moves.
	cellsOfLayer = 2
	// perFinest is how many widths w of the grading go into the smallest length
	// that matters.
	perFinest = 4
	// evenShare is the part of the cells spread evenly, for what has diffused
	// far from every boundary.
	evenShare = 0.3
	// rootResolution is how finely a face is placed, as part of the crystal.
	rootResolution = 1e-14
)

// grid is a set of cells, from the inside outwards.
type grid struct {
	faces   []float64 // len n+1, m
	centres []float64 // len n, m
	volumes []float64 // len n: integral of r^n dr over the cell
}

// boundaries returns the radii around which cells are refined: every zone
// boundary, where a crystal that grows ended before, and the ends that are not sealed
// for good.
func (p *Problem) boundaries() []float64 {
	var at []float64
	if open(p.Inner) {
		at = append(at, p.R0)
	}
	for _, z := range p.Zones[:len(p.Zones)-1] {
		at = append(at, z.Outer)
	}
	if len(p.Moves) > 0 && p.before() < p.size() {
		at = append(at, p.before())
	}
	if open(p.Outer) {
		at = append(at, p.size())
	}
	return at
}

// open reports whether anything ever passes this end.
func open(rims []Rim) bool {
	for _, r := range rims {
		if r.Kind != Sealed {
			return true
		}
	}
	return false
}

// grading is the cell density
//
//	F'(r) = even + sum over boundaries b of 1/sqrt((r-b)^2 + w^2),
//
// whose integral is closed: F(r) = even r + sum asinh((r-b)/w).
type grading struct {
	at      []float64
	w, even float64 // m, 1/m
}

func (g grading) integral(r float64) float64 {
	sum := g.even * r
	for _, b := range g.at {
		sum += math.Asinh((r - b) / g.w)
	}
	return sum
}

// layFaces spreads about the wanted number of cells over the crystal: an even
// number in each segment between boundaries, so that pairs of cells make the
// coarser grid from which the error is measured.
func layFaces(p *Problem, cells int, finest float64) []float64 {
	g := grading{at: p.boundaries(), w: finest / perFinest}
	marks := segments(p)
	for i := 1; i < len(marks)-max(0, len(p.layers())-1); i++ {
		g.w = math.Min(g.w, (marks[i]-marks[i-1])/perFinest)
	}
	layers := max(0, len(p.layers())-1) // the last of the segments
	last := len(marks) - 1
	g.even = 1
	if len(g.at) > 0 {
		around := g.integral(marks[last]) - g.integral(marks[0]) - (marks[last] - marks[0])
		g.even = around * evenShare / (1 - evenShare) / (marks[last] - marks[0])
	}
	for {
		faces := spread(g, marks, layers, cells)
		if len(p.Moves) > 0 || steepness(faces) <= steepest {
			return faces
		}
		cells += cells/8 + 2
	}
}

// segments returns the ends of the crystal, the zone boundaries between and the bounds
// of layers, if the outer face moves.
func segments(p *Problem) []float64 {
	marks := []float64{p.R0}
	for _, z := range p.Zones[:len(p.Zones)-1] {
		marks = append(marks, z.Outer)
	}
	if layers := p.layers(); layers != nil {
		return append(marks, layers...)
	}
	return append(marks, p.size())
}

func spread(g grading, marks []float64, layers, cells int) []float64 {
	first, last := marks[0], marks[len(marks)-1]
	total := g.integral(last) - g.integral(first)
	faces := []float64{first}
	for i := 1; i < len(marks); i++ {
		a, b := marks[i-1], marks[i]
		share := (g.integral(b) - g.integral(a)) / total
		least := minSegment
		if i >= len(marks)-layers {
			least = cellsOfLayer
		}
		n := max(least, 2*int(math.Round(share*float64(cells)/2)))
		faces = g.divide(faces, a, b, n)
	}
	return faces
}

// divide appends to faces the n outer faces of n cells between a and b that
// hold equal parts of the density.
func (g grading) divide(faces []float64, a, b float64, n int) []float64 {
	fa, fb := g.integral(a), g.integral(b)
	for i := 1; i < n; i++ {
		target := fa + float64(i)/float64(n)*(fb-fa)
		r, err := numeric.Root(func(r float64) float64 { return g.integral(r) - target }, a, b, rootResolution*b)
		if err != nil {
			panic(fmt.Sprintf("diffusion: no face between %g and %g m: %v", a, b, err)) // F is monotone: cannot happen
		}
		faces = append(faces, r)
	}
	return append(faces, b)
}

// steepness returns the largest ratio of two neighbouring cell widths.
func steepness(faces []float64) float64 {
	worst := 1.0
	for i := 2; i < len(faces); i++ {
		ratio := (faces[i] - faces[i-1]) / (faces[i-1] - faces[i-2])
		worst = max(worst, ratio, 1/ratio)
	}
	return worst
}

// newGrid measures the cells between the faces.
func newGrid(shape Shape, faces []float64) *grid {
	n := len(faces) - 1
	g := &grid{faces: faces, centres: make([]float64, n), volumes: make([]float64, n)}
	for i := range n {
		a, b := faces[i], faces[i+1]
		g.volumes[i] = volume(shape, a, b)
		g.centres[i] = centroid(shape, a, b)
	}
	return g
}

// volume returns the integral of r^n dr from a to b, written so that thin
// cells far from the centre lose nothing.
func volume(shape Shape, a, b float64) float64 {
	switch shape {
	case Slab:
		return b - a
	case Cylinder:
		return (b - a) * (b + a) / 2
	default:
		return (b - a) * (b*b + b*a + a*a) / 3
	}
}

// centroid returns the volume mean of r over [a, b]: the radius at which a
// cell's mean equals the profile to second order.
func centroid(shape Shape, a, b float64) float64 {
	h := b - a
	switch shape {
	case Slab:
		return a + h/2
	case Cylinder:
		return a + h*(a+2*b)/(3*(a+b))
	default:
		return a + h*(a*a+2*a*b+3*b*b)/(4*(a*a+a*b+b*b))
	}
}

// resistance returns the integral of dr/r^n between a face and the point that
// the mean of the cell from the face to far stands for. For the curved shapes
// it is the one with which a profile parabolic in r has its exact flux,
//
//	|mean of r^2 - face^2| / (2 face^(n+1)),
//
// right even beside the centre, where no point stands for a cell.
func resistance(shape Shape, face, far float64) float64 {
	h := math.Abs(far - face)
	switch shape {
	case Slab:
		return h / 2
	case Cylinder:
		return h * (face + far) / (4 * face * face)
	default:
		f, r := face, far
		parabola := h * (2*f*f*f + 4*f*f*r + 6*f*r*r + 3*r*r*r) / (5 * (f*f + f*r + r*r))
		return parabola / (2 * f * f * f)
	}
}

// conductances returns, for the n+1 faces, the conductance 1/R of
//
//	R = integral of dr/(r^n D) over the two half cells at the face,
//
// with D at reference temperature 1 (Times times Spread). The two ends hold
// the half cell between the rim and the first cell; at the centre of a
// cylinder or ball, where no area is left, the conductance is 0.
func (p *Problem) conductances(g *grid) []float64 {
	n := len(g.centres)
	k := make([]float64, n+1)
	for i := range k {
		if i == 0 && p.R0 == 0 && p.Shape != Slab {
			continue
		}
		r := 0.0
		if i > 0 {
			r += p.halfCell(g.faces[i], g.faces[i-1])
		}
		if i < n {
			r += p.halfCell(g.faces[i], g.faces[i+1])
		}
		k[i] = 1 / r
	}
	return k
}

// halfCell returns the integral of dr/(r^n D) over the half of a cell that
// lies at the face; far is the cell's other face.
func (p *Problem) halfCell(face, far float64) float64 {
	return resistance(p.Shape, face, far) / p.factor(face+(far-face)/4)
}

// factor returns D at r divided by the law's.
func (p *Problem) factor(r float64) float64 {
	d := 1.0
	if z := p.Zones[p.zone(r)]; z.Times != 0 {
		d = z.Times
	}
	if p.Spread != nil {
		d *= p.Spread(r)
	}
	return d
}

// zone returns the zone that r lies in.
func (p *Problem) zone(r float64) int {
	return sort.Search(len(p.Zones)-1, func(i int) bool { return r < p.Zones[i].Outer })
}
