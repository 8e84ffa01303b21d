package least

import (
	"cmp"
	"math"
	"slices"
)

// How the fit goes on and when it stops. Falls of chi-square are parts of
// 1 + chi-square.
const (
	mostSteps  = 100
	mostHalves = 12
	mostFits   = 3
	tolerated  = 1e-6  // fall that a step in the bent values may promise in vain, by errors of the slopes
	settled    = 1e-12 // fall that may be left after the last step
	solved     = 1e-12 // fall by a step in the linear values that is the last
)

// Solve returns the values of least chi-square: the best of the fits that begin
// at the starts of the bent values, all first starts together, then all second
// ones, and so on, the last standing in where one has fewer; of more than
// mostFits of them at the mostFits where chi-square is least. It is a
// Gauss-Newton fit in the bent values, halving steps that do not improve, with
// the linear values solved anew at each (variable projection: Golub and Pereyra
// 1973, SIAM J. Numer. Anal. 10, 413-432; Kaufman 1975, BIT 15, 49-57).
//
// Linear values that the data do not see are left at their means. Solve panics
// if lengths differ, a standard deviation is not above 0, or a bent value has no
// start in its range.
func (p *Problem) Solve(model Model) Solution {
	p.check()
	s := newState(p, model)
	starts := s.likeliest(mostFits)
	best := s.fitFrom(starts[0])
	for _, k := range starts[1:] {
		if found := s.fitFrom(k); found.ChiSq < best.ChiSq || math.IsNaN(best.ChiSq) {
			best = found
		}
	}
	return best
}

// likeliest returns up to most starts, those of least chi-square, ascending.
func (s *state) likeliest(most int) []int {
	starts := make([]int, s.p.starts())
	for k := range starts {
		starts[k] = k
	}
	if len(starts) <= most {
		return starts
	}
	chiSq := make([]float64, len(starts))
	s.at = s.p.newPoint()
	for k := range starts {
		s.begin(k)
		if chiSq[k] = s.at.ChiSq; math.IsNaN(s.at.ChiSq) {
			chiSq[k] = math.Inf(1)
		}
	}
	slices.SortStableFunc(starts, func(a, b int) int { return cmp.Compare(chiSq[a], chiSq[b]) })
	starts = starts[:most]
	slices.Sort(starts)
	return starts
}

// begin puts the point at start k of the bent values.
func (s *state) begin(k int) {
	for i, b := range s.p.Bent {
		s.at.Bent[i] = b.Starts[min(k, len(b.Starts)-1)]
	}
	s.slopes.reset()
	s.promised = 0
	s.solveLinear(s.at)
}

// starts returns how many fits may begin.
func (p *Problem) starts() int {
	n := 1
	for _, b := range p.Bent {
		n = max(n, len(b.Starts))
	}
	return n
}

// point is a solution in the making.
type point struct {
	Solution
	columns [][]float64 // the model at its bent values
}

func (p *Problem) newPoint() *point {
	n, k, b := len(p.Obs), len(p.Linear), len(p.Bent)
	part := columns(2, n)
	return &point{columns: columns(1+k, n), Solution: Solution{
		Linear: make([]float64, k), Sigma: make([]float64, k), Bent: make([]float64, b),
		Model: part[0], Residuals: part[1],
	}}
}

// columns returns k columns of n zeros.
func columns(k, n int) [][]float64 {
	all, c := make([]float64, k*n), make([][]float64, k)
	for j := range c {
		c[j] = all[j*n : (j+1)*n : (j+1)*n]
	}
	return c
}

// state is the scratch of one Solve.
type state struct {
	p        *Problem
	model    Model
	at, next *point // the best so far and, if values are bent, one on trial
	slopes   *slopes
	step     []float64 // of all values, the linear ones first
	target   []float64 // of the bent values
	before   []float64 // linear values
	white    []float64
	promised float64 // fall of chi-square
}

func newState(p *Problem, model Model) *state {
	k, b := len(p.Linear), len(p.Bent)
	s := &state{
		p: p, model: model, slopes: newSlopes(p, model),
		step: make([]float64, k+b), target: make([]float64, b), before: make([]float64, k), white: make([]float64, len(p.Obs)),
	}
	if b > 0 {
		s.next = p.newPoint()
	}
	return s
}

// fitFrom fits from start k of the bent values.
func (s *state) fitFrom(k int) Solution {
	s.at = s.p.newPoint()
	s.begin(k)
	s.at.Settled = len(s.p.Bent) == 0
	for range mostSteps {
		if s.at.Settled || math.IsNaN(s.at.ChiSq) || !s.improve() {
			break
		}
	}
	return s.at.Solution
}

// improve takes one Gauss-Newton step in the bent values, to where chi-square
// would be least in their ranges if the model were linear. It returns false if
// it finds nothing better.
func (s *state) improve() bool {
	promised := s.slopes.aim(s.step, s.at)
	if math.IsNaN(promised) {
		s.at.ChiSq = math.NaN()
		return false
	}
	for i, b := range s.p.Bent {
		s.target[i] = math.Min(math.Max(s.at.Bent[i]+s.step[len(s.p.Linear)+i], b.Lo), b.Hi)
	}
	left := promised // after the step, going by the step before
	if promised < s.promised {
		left *= promised / s.promised
	}
	s.promised = promised
	tries, small := mostHalves, promised <= tolerated*(1+s.at.ChiSq)
	if small {
		tries = 1
	}
	found := s.descend(tries)
	s.at.Settled = small && (!found || left <= settled*(1+s.at.ChiSq))
	return found
}

// descend walks towards the target, half as far each time, until chi-square
// falls.
func (s *state) descend(tries int) bool {
	for range tries {
		copy(s.next.Bent, s.target)
		s.solveLinear(s.next)
		if s.next.ChiSq < s.at.ChiSq {
			s.at, s.next = s.next, s.at
			return true
		}
		for i, x := range s.at.Bent {
			s.target[i] = x + (s.target[i]-x)/2
		}
	}
	return false
}

// solveLinear fits the linear values with the bent ones held, from their means.
// Without limits one step is exact.
func (s *state) solveLinear(at *point) {
	s.model(at.columns, at.Bent)
	for j, v := range s.p.Linear {
		at.Linear[j] = v.Mean
	}
	s.evaluate(at)
	for range mostSteps {
		if len(at.Linear) == 0 || math.IsNaN(at.ChiSq) {
			return
		}
		before := at.ChiSq
		s.linearStep(at)
		if s.p.Limit == nil || !(before-at.ChiSq > solved*(1+at.ChiSq)) {
			return
		}
	}
}

// linearStep takes one Newton step in the linear values, halving it until
// chi-square does not rise. Without limits there is nothing to halve: a rise is
// round-off.
func (s *state) linearStep(at *point) {
	step := s.step[:len(at.Linear)]
	at.Rank = s.slopes.linear(step, at.Sigma, at)
	copy(s.before, at.Linear)
	before := at.ChiSq
	for range mostHalves {
		for j, x := range s.before {
			at.Linear[j] = x + step[j]
			step[j] /= 2
		}
		s.evaluate(at)
		if s.p.Limit == nil || !(at.ChiSq > before) {
			return
		}
	}
	copy(at.Linear, s.before)
	s.evaluate(at)
}

// evaluate fills model, residuals and chi-square for the values at hand.
func (s *state) evaluate(at *point) {
	combine(at.Model, at.columns, at.Linear)
	for i, y := range at.Model {
		at.Residuals[i], _ = s.p.residual(i, y)
	}
	copy(s.white, at.Residuals)
	s.p.whiten(s.white)
	at.ChiSq = dot(s.white, s.white)
	for j, v := range s.p.Linear {
		at.ChiSq += v.chiSq(at.Linear[j])
	}
	for j, v := range s.p.Bent {
		at.ChiSq += v.chiSq(at.Bent[j])
	}
}

// combine fills dst with the model for the linear values.
func combine(dst []float64, columns [][]float64, linear []float64) {
	copy(dst, columns[0])
	for j, v := range linear {
		for i, c := range columns[1+j] {
			dst[i] += float64(v * c)
		}
	}
}

// dot is the sum of products, each rounded, so that every processor finds the
// same bits.
func dot(a, b []float64) float64 {
	sum := 0.0
	for i, v := range a {
		sum += float64(v * b[i])
	}
	return sum
}
