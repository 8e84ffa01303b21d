package paths

import (
	"fmt"
	"math"
	"slices"

	"bankfire/paths/least"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
)

// lens is how a traverse looks at a profile: through its spot, at positions
// that may be off by an origin and slanted by a tilt, on a start whose edges may
// have any of several widths. What is not known exactly is a bent value of the
// fit: edges, tilt and origin, in this order, those that are fixed left out.
type lens struct {
	t            *traverse.Traverse
	edges        edges
	tilt, origin study.Nuisance
	mirrored     bool
	curve        int                 // of the cells, see traverse.NewWeights
	faces, at    []float64           // of the cells; where blurred profiles are known: both ends and the centres
	cosines      []float64           // nodes between which cos tilt is interpolated
	weights      []*traverse.Weights // one a cosine: at the points if these are fixed, else at `at`
	places       []float64           // scratch: positions of the points
}

// The nodes of interpolation. Between six Chebyshev nodes a profile seen
// through its spot is right to a few 1e-4 of its range where the free width of
// an edge goes to six times the spot's standard deviation; wider ranges and
// points take more, see layEdges. The spot's width, which a tilt shrinks, bends
// it far less.
const (
	edgeNodes     = 6
	mostEdgeNodes = 24
	cosineNodes   = 3
	gaussianFar   = 4   // standard deviations of a known value that are looked at
	fewStarts     = 3   // values with which a fit begins
	startStep     = 0.5 // of the least spacing of points, by which these move from one to the next
	mostStarts    = 40
	steepest      = 1.45 // rad, beyond which a tilt makes no sense
)

func newLens(c *study.Crystal, e *study.Element, faces []float64, edges edges) (*lens, error) {
	l := &lens{
		t: e.Traverse, edges: edges, tilt: e.Tilt, origin: e.Origin,
		mirrored: c.Mirrored(e), curve: int(c.Shape), faces: faces, places: make([]float64, len(e.Traverse.Position)),
	}
	for _, tilt := range nodes(l.tilt, 0, steepest, cosineNodes) {
		l.cosines = append(l.cosines, math.Cos(tilt))
	}
	if l.placed() {
		l.at = l.places
		l.weights = []*traverse.Weights{l.t.WeightsAt(faces, l.mirrored, l.curve, l.origin.Value, l.tilt.Value)}
		return l, nil
	}
	l.at = append(append([]float64{faces[0]}, middles(faces)...), faces[len(faces)-1])
	for _, cosine := range l.cosines {
		spot := l.t.Spot
		spot.Width *= cosine
		w, err := traverse.NewWeights(faces, l.mirrored, l.curve, spot, l.at)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", l.t.Name, err)
		}
		l.weights = append(l.weights, w)
	}
	return l, nil
}

// placed reports whether the points have known positions.
func (l *lens) placed() bool { return l.tilt.Fixed() && l.origin.Fixed() }

func middles(faces []float64) []float64 {
	m := make([]float64, len(faces)-1)
	for i := range m {
		m[i] = faces[i] + (faces[i+1]-faces[i])/2
	}
	return m
}

// nodes returns the values of a nuisance between which to interpolate: its one
// value if it is fixed, else n Chebyshev nodes over where it may lie.
func nodes(n study.Nuisance, least, most float64, count int) []float64 {
	if n.Fixed() {
		return []float64{n.Value}
	}
	lo, hi := span(n, least, most)
	xs := make([]float64, count)
	for i := range xs {
		xs[i] = lo + (hi-lo)*(1-math.Cos(math.Pi*(float64(i)+0.5)/float64(count)))/2
	}
	return xs
}

// span returns where a nuisance that is not fixed may lie.
func span(n study.Nuisance, least, most float64) (lo, hi float64) {
	if n.Ranged() {
		return math.Max(n.Lo, least), math.Min(n.Hi, most)
	}
	return math.Max(n.Value-gaussianFar*n.Sigma, least), math.Min(n.Value+gaussianFar*n.Sigma, most)
}

// bent returns the nuisances that are not fixed as values of the fit.
func (l *lens) bent() []least.Bent {
	var bent []least.Bent
	tilts, origins := l.starts()
	add := func(n study.Nuisance, lowest, most float64, starts int, turn func(k int) int) {
		if n.Fixed() {
			return
		}
		lo, hi := span(n, lowest, most)
		v := least.Bent{Prior: least.None, Lo: lo, Hi: hi}
		if !n.Ranged() {
			v.Prior = least.Prior{Mean: n.Value, Sigma: n.Sigma}
		}
		for k := range max(fewStarts, tilts*origins) {
			v.Starts = append(v.Starts, lo+(hi-lo)*(float64(turn(k))+0.5)/float64(starts))
		}
		bent = append(bent, v)
	}
	for _, n := range l.edges.known {
		add(n, 0, math.Inf(1), fewStarts, func(k int) int { return k % fewStarts })
	}
	add(l.tilt, 0, steepest, tilts, func(k int) int { return k / origins % tilts })
	add(l.origin, math.Inf(-1), math.Inf(1), origins, func(k int) int { return k % origins })
	return bent
}

// starts returns with how many tilts and origins a fit begins: with so many of
// what moves the points that from one of them a sharp step lies between the
// right two points.
func (l *lens) starts() (tilts, origins int) {
	count := func(shift float64) int {
		return int(math.Min(math.Max(math.Ceil(shift/(startStep*leastSpacingOf(l.t.Position))), fewStarts), mostStarts))
	}
	tilts, origins = 1, 1
	if !l.origin.Fixed() {
		lo, hi := span(l.origin, math.Inf(-1), math.Inf(1))
		origins = count(hi - lo)
	}
	switch {
	case l.tilt.Fixed():
	case l.origin.Fixed():
		lo, hi := span(l.tilt, 0, steepest)
		tilts = count(l.farthest() * (math.Cos(lo) - math.Cos(hi)))
	default:
		tilts = fewStarts
	}
	return tilts, origins
}

// farthest returns the largest distance of a point from where positions count
// from.
func (l *lens) farthest() float64 {
	zero := 0.0
	if l.t.Zero == traverse.Rim {
		zero = l.t.Size
	}
	far := 0.0
	for _, x := range l.t.Position {
		far = math.Max(far, math.Abs(x-zero))
	}
	return far
}

// values splits the bent values of a fit again.
func (l *lens) values(bent []float64) (widths []float64, tilt, origin float64) {
	next := func(n study.Nuisance) float64 {
		if n.Fixed() {
			return n.Value
		}
		v := bent[0]
		bent = bent[1:]
		return v
	}
	for _, n := range l.edges.known {
		widths = append(widths, next(n))
	}
	tilt = next(l.tilt)
	return widths, tilt, next(l.origin)
}

// view is a set of columns of cell means seen through the lens: for each run
// and each cosine, what each column looks like at the lens's places.
type view struct {
	l       *lens
	blurred [][][][]float64 // run, cosine, column
	mixed   []float64       // scratch
	slopes  []float64
}

// look blurs the columns: cols holds, for each run, the answer and the
// derivatives by the free values.
func (l *lens) look(cols [][][]float64) *view {
	v := &view{l: l, mixed: make([]float64, len(l.at)), slopes: make([]float64, len(l.at))}
	for _, set := range cols {
		var atCosines [][][]float64
		for _, w := range l.weights {
			seen := make([][]float64, len(set))
			for j, c := range set {
				seen[j] = make([]float64, len(l.at))
				w.Apply(seen[j], c)
			}
			atCosines = append(atCosines, seen)
		}
		v.blurred = append(v.blurred, atCosines)
	}
	return v
}

// columns fills dst with what the columns look like at the points for the
// given bent values.
func (v *view) columns(dst [][]float64, bent []float64) {
	widths, tilt, origin := v.l.values(bent)
	byRun := v.l.edges.weights(widths)
	for j := range dst {
		v.show(dst[j], j, byRun, tilt, origin)
	}
}

// show fills dst with what column j looks like at the points; byRun are the
// weights of the runs.
func (v *view) show(dst []float64, j int, byRun []float64, tilt, origin float64) {
	clear(v.mixed)
	byTilt := lagrange(v.l.cosines, math.Cos(tilt))
	for a, we := range byRun {
		for b, wt := range byTilt {
			w := we * wt
			for i, y := range v.blurred[a][b][j] {
				v.mixed[i] += w * y
			}
		}
	}
	if v.l.placed() {
		copy(dst, v.mixed)
		return
	}
	v.l.t.Place(v.l.places, origin, tilt)
	v.sample(dst)
}

// through returns what one profile of cell means looks like at the points.
func (l *lens) through(cells []float64, tilt, origin float64) []float64 {
	v := l.look([][][]float64{{cells}})
	dst := make([]float64, len(l.places))
	v.show(dst, 0, []float64{1}, tilt, origin)
	return dst
}

// lagrange returns the weights with which the values at the nodes make the
// interpolating polynomial at x.
func lagrange(nodes []float64, x float64) []float64 {
	w := make([]float64, len(nodes))
	for i := range nodes {
		w[i] = 1
		for j := range nodes {
			if j != i {
				w[i] *= (x - nodes[j]) / (nodes[i] - nodes[j])
			}
		}
	}
	return w
}

// sample fills dst with the mixed profile at the points' places, a cubic
// Hermite between the places where it is known. Beyond a centre of symmetry it
// goes on as its mirror image, beyond any other end as it is there.
func (v *view) sample(dst []float64) {
	at := v.l.at
	parabolaSlopes(v.slopes, at, v.mixed)
	for i, x := range v.l.places {
		if v.l.mirrored {
			x = math.Abs(x)
		}
		x = math.Min(math.Max(x, at[0]), at[len(at)-1])
		k, _ := slices.BinarySearch(at, x)
		k = min(max(k-1, 0), len(at)-2)
		dst[i], _ = cubic{at[k], at[k+1], v.mixed[k], v.mixed[k+1], v.slopes[k], v.slopes[k+1]}.at(x)
	}
}
