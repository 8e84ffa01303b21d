package paths

import (
	"math"
	"slices"

	"bankfire/paths/least"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// scores look for points that a fit leaves off. With r the residuals and P the
// inverse of the correlation of their errors, the score of a set w of points is
//
//	w' P r / sqrt(w' P w),
//
// by how many standard errors they lie to one side together, given all others;
// its square is by how much chi-square would fall if they were let go by a
// common offset. Without correlations it is their sum over the root of their
// number.
type scores struct {
	residuals, pulls []float64     // r and P r
	independent      []float64     // the residuals of the data that are no limits, made independent of each other
	limit            []bool        // residuals of limits are never positive
	white            *mat.TriDense // P is its square; nil is one
}

func newScores(p *least.Problem, at least.Solution) *scores {
	s := &scores{residuals: at.Residuals, independent: independent(p, at), limit: p.Limit, white: p.White}
	s.pulls = slices.Clone(at.Residuals)
	if s.white != nil {
		var v mat.VecDense
		v.MulVec(s.white, mat.NewVecDense(len(s.residuals), s.residuals))
		v.MulVec(s.white.T(), &v)
		copy(s.pulls, v.RawVector().Data)
	}
	return s
}

// independent returns the residuals of the data that are no limits, made
// independent of each other.
func independent(p *least.Problem, at least.Solution) []float64 {
	r := mat.NewVecDense(len(at.Residuals), slices.Clone(at.Residuals))
	if p.White != nil {
		r.MulVec(p.White, mat.NewVecDense(len(at.Residuals), slices.Clone(at.Residuals)))
	}
	var measured []float64
	for i, v := range r.RawVector().Data {
		if p.Limit == nil || !p.Limit[i] {
			measured = append(measured, v)
		}
	}
	return measured
}

func (s *scores) isLimit(i int) bool { return s.limit != nil && s.limit[i] }

// of returns the score of some points, ascending.
func (s *scores) of(points []int) float64 {
	sum, variance := 0.0, float64(len(points))
	for _, i := range points {
		sum += s.pulls[i]
	}
	if s.white != nil {
		variance = 0
		for k := points[0]; k < len(s.residuals); k++ {
			v := 0.0
			for _, i := range points {
				if i <= k {
					v += s.white.At(k, i)
				}
			}
			variance += v * v
		}
	}
	return sum / math.Sqrt(variance)
}

// outlier returns the point that lies farthest off and its score, if it stands
// out and alone: farther off than is likely even if all errors are as much
// larger than stated as the other points say, and not the peak of a group. It
// returns -1 if there is none.
func (s *scores) outlier(chiSq float64, degrees int, confidence float64) (point int, by float64) {
	for i := range s.residuals {
		if z := s.of([]int{i}); math.Abs(z) > math.Abs(by) {
			point, by = i, z
		}
	}
	scale := 1.0
	if rest, left := chiSq-by*by, max(degrees-1, 1); !(Tail(rest, left) >= 1-confidence) {
		scale = math.Sqrt(rest / float64(left))
	}
	if !(math.Abs(by) > farOut*scale) || s.inCompany(point, by) {
		return -1, 0
	}
	return point, math.Abs(by)
}

// inCompany reports whether the two points next to a point with a score lean to
// the same side.
func (s *scores) inCompany(point int, score float64) bool {
	n := len(s.residuals)
	if n < 3 {
		return false
	}
	a, b := point-1, point+1
	switch point {
	case 0:
		a = 2
	case n - 1:
		b = n - 3
	}
	return (s.residuals[a]+s.residuals[b])/2/score > company
}

// place returns the middle of the few points next to each other that lie
// farthest to one side together, and their score. Limits and the point skip do
// not count.
func (s *scores) place(skip int) (middle int, score float64) {
	for i := range s.residuals {
		var points []int
		for k := max(0, i-placeWindow/2); k <= min(len(s.residuals)-1, i+placeWindow/2); k++ {
			if k != skip && !s.isLimit(k) {
				points = append(points, k)
			}
		}
		if len(points) == 0 {
			continue
		}
		if z := s.of(points); math.Abs(z) > math.Abs(score) {
			middle, score = i, z
		}
	}
	return middle, score
}

// scale returns the standard deviation of the residuals by the mean size of
// their differences from one to the next,
//
//	sqrt(pi)/2 mean |r_{i+1} - r_i|,
//
// to which what leans to one side over several points adds little. It is 1
// where there are too few.
func (s *scores) scale() float64 {
	r := s.independent
	if len(r) < 2 {
		return 1
	}
	sum := 0.0
	for i := range len(r) - 1 {
		sum += math.Abs(r[i+1] - r[i])
	}
	return math.Sqrt(math.Pi) / 2 * sum / float64(len(r)-1)
}

// runsProbability returns the probability that as few runs of one sign as
// these, or fewer, come from random residuals (Wald and Wolfowitz 1940, Ann.
// Math. Stat. 11, 147-162, in its normal approximation with a continuity
// correction). It is 1 where there are too few of either sign to tell.
func runsProbability(residuals []float64) float64 {
	up, down, runs := 0.0, 0.0, 0.0
	last := 0.0
	for _, r := range residuals {
		sign := math.Copysign(1, r)
		if sign > 0 {
			up++
		} else {
			down++
		}
		if sign != last {
			runs++
		}
		last = sign
	}
	if up < fewSigns || down < fewSigns {
		return 1
	}
	n := up + down
	mean := 2*up*down/n + 1
	variance := (mean - 1) * (mean - 2) / (n - 1)
	return distuv.UnitNormal.CDF((runs + 0.5 - mean) / math.Sqrt(variance))
}

// fewSigns is how many residuals of each sign the normal approximation needs.
const fewSigns = 8
