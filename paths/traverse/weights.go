package traverse

import (
	"errors"
	"fmt"
	"math"
	"strconv"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// Sparse is one row of weights: the cells that a point sees, ascending, and
// the weight of each.
type Sparse struct {
	Cell   []int
	Weight []float64
}

// Weights turn the cells of a solver into what the instrument would have
// shown, one Row a measured point.
type Weights struct {
	Row []Sparse
}

// NewWeights returns the weights of a spot at the positions at, m, over the
// cells between the given faces, m, ascending:
//
//	seen(x) = integral of K(y - x) c(y) dy / integral of K(y - x) dy,
//
// K the spot and c the profile, which in each cell is the parabola that has
// the means of this cell and its two neighbours (at an end: of the last three
// cells), taken over r^curve dr: curve is 0 in a slab, 1 in a cylinder and 2 in a
// ball, whose faces count from the centre. So a parabola is seen exactly, the mean of every cell is kept, and
// the error of a smooth profile is of third order in the cells, wide or not; a
// jump on a face between cells of width h looks blurred by another h/sqrt(6). A
// Point sees the two parabolas of the cells around it, mixed linearly between
// the centres of these cells, which makes it continuous in its position.
//
// mirrored says that the first face is a centre of symmetry: there the profile
// goes on as its own mirror image and positions may be negative, on the far
// side. Where a spot hangs over any other end, the part outside is left out
// and the rest carries the whole weight: an analysis that also hit glass or
// epoxy is assumed to have been normalised by what it hit of the crystal.
// Weights of a row add up to 1.
//
// A position that is outside the crystal, by more than round-off, or not
// finite gives a *thermal.InputError with Field "position" and no place; of
// several, the first 20 are joined. NewWeights panics on fewer than three
// cells, on faces that do not ascend, on a curve that is none of these and on a
// Spot without a width.
func NewWeights(faces []float64, mirrored bool, curve int, s Spot, at []float64) (*Weights, error) {
	s.check()
	g := newGrid(faces, mirrored, curve)
	var problems []error
	w := &Weights{Row: make([]Sparse, len(at))}
	for i, x := range at {
		inside, ok := g.clamp(x)
		if !ok {
			problems = append(problems, g.outside(x))
			continue
		}
		w.Row[i] = g.row(s, inside)
	}
	if len(problems) > 0 {
		return nil, errors.Join(problems[:min(len(problems), maxProblems)]...)
	}
	return w, nil
}

// Apply sets dst to what the instrument would have shown of the cell means
// cells, one value a row. It does not allocate. It panics if the lengths do
// not belong to the weights.
func (w *Weights) Apply(dst, cells []float64) {
	if len(dst) != len(w.Row) {
		panic(fmt.Sprintf("traverse: len(dst) %d != rows of weights %d", len(dst), len(w.Row)))
	}
	for i, row := range w.Row {
		sum := 0.0
		for k, c := range row.Cell {
			sum += float64(row.Weight[k] * cells[c])
		}
		dst[i] = sum
	}
}

// WeightsAt returns the weights of the traverse's spot over the cells between
// faces, see [NewWeights], at the positions that [Traverse.Place] gives for an
// origin, m, and a tilt, rad; the spot lies along the same line and shrinks with
// it. A position that these move out of the crystal is taken at the end that it
// left by: it was measured in the crystal.
func (t *Traverse) WeightsAt(faces []float64, mirrored bool, curve int, origin, tilt float64) *Weights {
	t.Spot.check()
	g := newGrid(faces, mirrored, curve)
	at := make([]float64, len(t.Position))
	t.Place(at, origin, tilt)
	spot := Spot{t.Spot.Kind, t.Spot.Width * math.Cos(tilt)}
	w := &Weights{Row: make([]Sparse, len(at))}
	for i, x := range at {
		w.Row[i] = g.row(spot, math.Min(math.Max(x, g.faces[0]), g.faces[len(g.faces)-1]))
	}
	return w
}

// grid is the cells of a crystal; of a mirrored one, those of both halves.
type grid struct {
	faces  []float64 // ascending, m
	folded int       // mirrored: cells in the far half, else 0
	curve  int       // the mean of a cell is over r^curve dr
	sum    []float64 // weights of one row while it is being made, by cell
}

func newGrid(faces []float64, mirrored bool, curve int) *grid {
	n := len(faces) - 1
	if curve < 0 || curve > 2 {
		panic(fmt.Sprintf("traverse: curve %d, want 0, 1 or 2", curve))
	}
	if n < 3 {
		panic(fmt.Sprintf("traverse: %d cells, want at least 3", n))
	}
	for i := range n {
		if !(faces[i] < faces[i+1]) {
			panic(fmt.Sprintf("traverse: face %d at %g m, the next at %g m", i, faces[i], faces[i+1]))
		}
	}
	g := &grid{faces: faces, curve: curve, sum: make([]float64, n)}
	if mirrored {
		g.folded = n
		g.faces = make([]float64, 0, 2*n+1)
		for i := n; i > 0; i-- {
			g.faces = append(g.faces, 2*faces[0]-faces[i])
		}
		g.faces = append(g.faces, faces...)
	}
	return g
}

// roundOff is what a position may lie beyond an end of the crystal, as a part of
// it: far below any cell, far above the noise of unit conversion.
const roundOff = 1e-9

// clamp returns x, moved onto the end of the crystal where it is beyond it by
// no more than round-off, and whether it is inside.
func (g *grid) clamp(x float64) (float64, bool) {
	first, last := g.faces[0], g.faces[len(g.faces)-1]
	slack := roundOff * (last - first)
	if !(x >= first-slack && x <= last+slack) {
		return 0, false
	}
	return math.Min(math.Max(x, first), last), true
}

func (g *grid) outside(x float64) *thermal.InputError {
	return &thermal.InputError{Field: "position", Value: micrometres(x),
		Problem: fmt.Sprintf("outside the crystal, which runs from %s to %s",
			micrometres(g.faces[0]), micrometres(g.faces[len(g.faces)-1])),
		Remedy: "check the unit, the zero and the widths of the zones, or set a window"}
}

func micrometres(x float64) string {
	return strconv.FormatFloat(x*1e6, 'g', 9, 64) + " um"
}

// row returns the weights of one point at x, inside the crystal.
func (g *grid) row(s Spot, x float64) Sparse {
	clear(g.sum)
	if s.Kind == Point {
		g.addPoint(x)
	} else {
		g.addSpot(s, x)
	}
	var row Sparse
	total := 0.0
	for _, w := range g.sum {
		total += w
	}
	for i, w := range g.sum {
		if w != 0 {
			row.Cell = append(row.Cell, i)
			row.Weight = append(row.Weight, w/total)
		}
	}
	return row
}

// addPoint adds what a point at x sees.
func (g *grid) addPoint(x float64) {
	n := len(g.faces) - 1
	i := g.find(x)
	if x < g.centre(i) {
		i--
	}
	// x now lies between the centres of cells i and i+1.
	if i < 0 || i == n-1 {
		i = max(i, 0)
		g.add(i, moments{1, x - g.centre(i), square(x - g.centre(i))})
		return
	}
	a, b := g.centre(i), g.centre(i+1)
	t := (x - a) / (b - a)
	g.add(i, moments{1, x - a, square(x - a)}.times(1-t))
	g.add(i+1, moments{1, x - b, square(x - b)}.times(t))
}

// addSpot adds what a spot with its middle at x sees.
func (g *grid) addSpot(s Spot, x float64) {
	from, to := x-s.reach(), x+s.reach()
	for i := g.find(from); i < len(g.faces)-1 && g.faces[i] < to; i++ {
		a, b := math.Max(g.faces[i], from), math.Min(g.faces[i+1], to)
		if a < b {
			g.add(i, s.moments(x, g.centre(i), a, b))
		}
	}
}

// find returns the cell that holds x; an end cell if none does.
func (g *grid) find(x float64) int {
	lo, hi := 0, len(g.faces)-1
	for hi-lo > 1 {
		if mid := (lo + hi) / 2; g.faces[mid] <= x {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo
}

func (g *grid) centre(i int) float64 { return g.faces[i] + (g.faces[i+1]-g.faces[i])/2 }

// add adds weights m of 1, u and u^2, u counted from the centre of cell i, to
// the three cells that fix the parabola of cell i.
func (g *grid) add(i int, m moments) {
	first := min(max(i-1, 0), len(g.faces)-4)
	for j, q := range g.parabolas(first, g.centre(i)) {
		g.sum[g.fold(first+j)] += q[0]*m[0] + q[1]*m[1] + q[2]*m[2]
	}
}

// fold returns the cell of the crystal that cell i of both halves stands for.
func (g *grid) fold(i int) int {
	if i < g.folded {
		return g.folded - 1 - i
	}
	return i - g.folded
}

// parabolas returns, for each of the three cells from first on, the parabola
// whose mean is 1 in this cell and 0 in the other two, as coefficients of 1, u
// and u^2, u counted from origin. In a slab the integral of the profile from the first
// face, known at all four, is the cubic through these four points; the
// parabola is its derivative. Else it is a column of the inverse of the means of 1, u
// and u^2 in the three cells.
func (g *grid) parabolas(first int, origin float64) (q [3]moments) {
	if g.curve > 0 {
		a, b, c := g.means(first, origin), g.means(first+1, origin), g.means(first+2, origin)
		volume := a.dot(b.cross(c))
		return [3]moments{b.cross(c).times(1 / volume), c.cross(a).times(1 / volume), a.cross(b).times(1 / volume)}
	}
	var f [4]float64
	for k := range f {
		f[k] = g.faces[first+k] - origin
	}
	for k := 1; k < 4; k++ {
		l := slope(f, k)
		for j := range k { // faces beyond cell j know its content
			q[j] = q[j].plus(l.times(f[j+1] - f[j]))
		}
	}
	return q
}

// means returns the means of 1, u and u^2 over |r|^curve dr of cell i, curve being 1
// or 2, u counted from origin. About its middle m, with half its width e, that of r - m
// is in a cylinder e^2/(3 m) and in a ball 2 m e^2/(3 v), and that of its square e^2/3
// and e^2 (m^2/3 + e^2/5)/v, with v = m^2 + e^2/3.
func (g *grid) means(i int, origin float64) moments {
	m, e := g.centre(i), (g.faces[i+1]-g.faces[i])/2
	shift, variance := e*e/(3*m), e*e/3
	if g.curve == 2 {
		v := m*m + e*e/3
		shift, variance = 2*m*e*e/(3*v), e*e*(m*m/3+e*e/5)/v
	}
	d := m - origin
	return moments{1, d + shift, d*d + 2*d*shift + variance}
}

// slope returns the derivative of the cubic that is 1 at f[k] and 0 at the
// other three.
func slope(f [4]float64, k int) moments {
	a, b, c := f[(k+1)%4], f[(k+2)%4], f[(k+3)%4]
	d := (f[k] - a) * (f[k] - b) * (f[k] - c)
	return moments{(float64(a*b) + float64(b*c) + float64(a*c)) / d, -2 * (a + b + c) / d, 3 / d}
}

// moments are three numbers that go with 1, u and u^2: coefficients of a
// parabola, or integrals over one.
type moments [3]float64

func (m moments) times(x float64) moments { return moments{m[0] * x, m[1] * x, m[2] * x} }

func (m moments) plus(n moments) moments { return moments{m[0] + n[0], m[1] + n[1], m[2] + n[2]} }

func (m moments) dot(n moments) float64 {
	return float64(m[0]*n[0]) + float64(m[1]*n[1]) + float64(m[2]*n[2])
}

func (m moments) cross(n moments) moments {
	return moments{
		float64(m[1]*n[2]) - float64(m[2]*n[1]),
		float64(m[2]*n[0]) - float64(m[0]*n[2]),
		float64(m[0]*n[1]) - float64(m[1]*n[0]),
	}
}

func square(x float64) float64 { return x * x }

// moments returns the integrals of K(y-x) u^p dy from a to b, p = 0, 1, 2 and
// u = y - origin, up to the constant factor of the spot's density. They are
// sums over panels of no more than half a standard deviation by the rule of
// Gauss and Legendre with five points, which leaves 1e-13 of the integral.
// Differences of erf give the same where a cell is wide, but cancel where it is
// thousands of times narrower than the spot.
func (s Spot) moments(x, origin, a, b float64) (m moments) {
	panels := 1
	if s.Kind == Gaussian {
		panels = 1 + int((b-a)/(s.Width/2))
	}
	h := (b - a) / float64(panels)
	for p := range panels {
		for _, n := range numeric.Gauss5() {
			y := a + (float64(p)+n.X)*h
			w := n.W * h * s.density(y-x)
			u := y - origin
			m = m.plus(moments{w, w * u, w * u * u})
		}
	}
	return m
}
