package least

import "math"

// inward is the part of a residual that must pull a value off its end to be
// more than round-off.
const inward = 1e-10

// bounded is the scratch of least squares with values kept in ranges.
type bounded struct {
	rotations *rotations
	free      [][]float64 // the columns of the values that may move
	none      []float64   // the column of one that is held
	held      []bool
	rest      []float64
	y, sigma  []float64
}

func newBounded(r *rotations, cols, rows int) bounded {
	return bounded{
		rotations: r, free: make([][]float64, cols), none: make([]float64, rows),
		held: make([]bool, cols), rest: make([]float64, rows), y: make([]float64, cols), sigma: make([]float64, cols),
	}
}

// solve fills the x that minimises |a x - b| with lo <= x <= hi, where
// lo <= 0 <= hi, and returns how far that lowers the square of |a x - b| from
// x = 0. It holds the values that would leave at their ends, as many as need
// be, and lets go those that turn back (Stark and Parker 1995, Comput. Stat.
// 10, 129-141).
func (s *bounded) solve(x []float64, a [][]float64, b, lo, hi []float64) (fall float64) {
	clear(x)
	clear(s.held)
	for range 8 * len(x) {
		s.solveFree(x, a, b)
		if s.advance(x, lo, hi) {
			continue
		}
		s.remainder(a, b, x, false)
		if !s.release(x, a, lo, hi) {
			break
		}
	}
	s.remainder(a, b, x, false)
	return dot(b, b) - dot(s.rest, s.rest)
}

// solveFree fills y with the values that are best where those held stay at x.
func (s *bounded) solveFree(x []float64, a [][]float64, b []float64) {
	s.remainder(a, b, x, true)
	for j := range a {
		s.free[j] = a[j]
		if s.held[j] {
			s.free[j] = s.none
		}
	}
	s.rotations.solve(s.y, s.sigma, s.free, s.rest)
}

// remainder fills rest with b - a x, of the values held alone if so told.
func (s *bounded) remainder(a [][]float64, b, x []float64, heldOnly bool) {
	copy(s.rest, b)
	for j, column := range a {
		if heldOnly && !s.held[j] {
			continue
		}
		for i, v := range column {
			s.rest[i] -= float64(v * x[j])
		}
	}
}

// advance moves the free x towards y, as far as the first end that one meets,
// and holds that one. It reports whether one did.
func (s *bounded) advance(x, lo, hi []float64) bool {
	part, first := 1.0, -1
	for j, y := range s.y {
		end := math.Min(math.Max(y, lo[j]), hi[j])
		if s.held[j] || end == y || math.IsNaN(y) {
			continue
		}
		if p := (end - x[j]) / (y - x[j]); first < 0 || p < part {
			part, first = p, j
		}
	}
	for j, y := range s.y {
		if !s.held[j] {
			x[j] += float64(part * (y - x[j]))
		}
	}
	if first < 0 {
		return false
	}
	s.held[first] = true
	x[first] = math.Min(math.Max(s.y[first], lo[first]), hi[first])
	return true
}

// release lets go the value held that the remainder pulls inward most. It
// reports whether there is one.
func (s *bounded) release(x []float64, a [][]float64, lo, hi []float64) bool {
	most, which := 0.0, -1
	size := math.Sqrt(dot(s.rest, s.rest))
	for j, held := range s.held {
		if !held || lo[j] == hi[j] {
			continue
		}
		length := math.Sqrt(dot(a[j], a[j]))
		pull := dot(a[j], s.rest)
		if x[j] == hi[j] {
			pull = -pull
		}
		if pull > inward*length*size && pull/length > most {
			most, which = pull/length, j
		}
	}
	if which < 0 {
		return false
	}
	s.held[which] = false
	return true
}
