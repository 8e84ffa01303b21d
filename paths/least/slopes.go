package least

import "math"

// Which slopes are found how, and which are round-off.
const (
	firstNudge = 1e-4  // of its scale, by which a bent value is first moved to find a slope
	nudge      = 1e-2  // change of the residuals by which it is moved once a slope is known
	rankCut    = 1e-10 // part of the largest below which a column, or a singular value, is round-off
	bentCut    = 1e-14 // part of the model below which a change of it is round-off
)

// slopes are the linear equations that stand for data and priors near a point,
//
//	a dx = b,
//
// with a column for each value, the linear ones first, and a row for each datum
// and each prior.
type slopes struct {
	p         *Problem
	model     Model
	a         [][]float64 // by columns
	b         []float64
	slope     []float64 // of each datum's row by the model value
	rotations rotations

	// Of bent values alone.
	reach    []float64   // by which each is moved
	moved    [][]float64 // the model at moved values
	bent     []float64
	up, down []float64
	lo, hi   []float64 // how far each value may go
	bounded  bounded
}

func newSlopes(p *Problem, model Model) *slopes {
	n, k, b := len(p.Obs), len(p.Linear), len(p.Bent)
	rows, cols := n+k+b, k+b
	s := &slopes{
		p: p, model: model, a: columns(cols, rows), b: make([]float64, rows), slope: make([]float64, n),
		rotations: newRotations(cols, rows),
	}
	if b > 0 {
		s.reach, s.bent = make([]float64, b), make([]float64, b)
		s.moved, s.up, s.down = columns(1+k, n), make([]float64, n), make([]float64, n)
		s.lo, s.hi = make([]float64, cols), make([]float64, cols)
		s.bounded = newBounded(&s.rotations, cols, rows)
	}
	return s
}

// reset forgets what earlier fits found.
func (s *slopes) reset() {
	for i, b := range s.p.Bent {
		s.reach[i] = firstNudge * b.scale()
	}
}

// linear finds the step in the linear values alone, their standard deviations
// and how many combinations of them are seen.
func (s *slopes) linear(step, sigma []float64, at *point) (rank int) {
	s.rows(at)
	s.linearColumns(at)
	return s.rotations.solve(step, sigma, s.a[:len(step)], s.b)
}

// aim finds the step in all values that keeps the bent ones in their ranges, and
// the fall of chi-square that it promises.
func (s *slopes) aim(step []float64, at *point) (promised float64) {
	s.rows(at)
	s.linearColumns(at)
	k := len(at.Linear)
	for j := range k {
		s.lo[j], s.hi[j] = math.Inf(-1), math.Inf(1)
	}
	for i, b := range s.p.Bent {
		s.bentColumn(i, at)
		s.lo[k+i], s.hi[k+i] = b.Lo-at.Bent[i], b.Hi-at.Bent[i]
	}
	return s.bounded.solve(step, s.a, s.b, s.lo, s.hi)
}

// rows fills the right sides of the data and what their slopes have in common.
func (s *slopes) rows(at *point) {
	n := len(at.Model)
	for i, y := range at.Model {
		s.slope[i], s.b[i] = s.p.row(i, y)
	}
	s.p.whiten(s.b[:n])
}

// linearColumns fills the columns of the linear values. One that is nothing but
// round-off beside the others, and has no prior, becomes zero.
func (s *slopes) linearColumns(at *point) {
	longest := 0.0
	for j, v := range s.p.Linear {
		s.setColumn(j, at.columns[1+j], v, at.Linear[j])
		longest = math.Max(longest, s.length(j))
	}
	for j, v := range s.p.Linear {
		if math.IsInf(v.Sigma, 1) && s.length(j) <= rankCut*longest {
			clear(s.a[j])
		}
	}
}

// length is the length of the part of a column that the data fill.
func (s *slopes) length(j int) float64 {
	seen := s.a[j][:len(s.slope)]
	return math.Sqrt(dot(seen, seen))
}

// bentColumn fills the column of bent value i by differences on both sides, and
// settles how far it is moved the next time.
func (s *slopes) bentColumn(i int, at *point) {
	v := &s.p.Bent[i]
	lo, hi := math.Max(at.Bent[i]-s.reach[i], v.Lo), math.Min(at.Bent[i]+s.reach[i], v.Hi)
	s.shifted(s.up, at, i, hi)
	s.shifted(s.down, at, i, lo)
	change, size := 0.0, 0.0
	for n, up := range s.up {
		change += square(s.slope[n] * (up - s.down[n]))
		size += square(s.slope[n] * up)
		s.up[n] = (up - s.down[n]) / (hi - lo)
	}
	if change <= bentCut*bentCut*size || lo == hi {
		clear(s.up)
	}
	j := len(at.Linear) + i
	s.setColumn(j, s.up, v.Prior, at.Bent[i])
	s.reach[i] = math.Min(firstNudge*v.scale(), nudge/math.Sqrt(dot(s.a[j], s.a[j])))
}

func square(x float64) float64 { return float64(x * x) }

// setColumn fills column j from the change of the model by its value, and the
// row of its prior.
func (s *slopes) setColumn(j int, change []float64, prior Prior, value float64) {
	a, n := s.a[j], len(change)
	for i, v := range change {
		a[i] = s.slope[i] * v
	}
	s.p.whiten(a[:n])
	clear(a[n:])
	a[n+j] = 1 / prior.Sigma
	s.b[n+j] = (prior.Mean - value) / prior.Sigma
}

// shifted fills dst with the model where bent value i is x and all others stay.
func (s *slopes) shifted(dst []float64, at *point, i int, x float64) {
	copy(s.bent, at.Bent)
	s.bent[i] = x
	s.model(s.moved, s.bent)
	combine(dst, s.moved, at.Linear)
}
