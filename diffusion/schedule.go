package diffusion

import (
	"fmt"
	"math"
)

// The default plan. Steps are fractions of the diffusion integral G between
// two events, so that a crystal sees the same plan whatever its history. The
// first ones are tiny beside the time in which a cell exchanges its content,
// and damped. Then each is larger than the one before by a tenth, so that
// every wavelength has died away before the steps are long for it (growth of
// 0.15 overshoots by 1e-11 of the range, 0.1 by less than 1e-12); the last are
// equal, because what is seen at the end was made by them. Under a rim that moves
// the last ones shrink again and are damped too, or waves that the rim has made
// between cells while the steps were long would still be seen.
const (
	firstFraction  = 1e-7 // of G, each of the damped steps
	defaultDamped  = 8    // steps replaced by two backward-Euler half steps each
	defaultGrowth  = 0.1  // of a step over the one before
	longestStep    = 0.01 // of G, at the default growth
	lastFraction   = 5e-7 // of G, about the last step under a rim that changes with time
	lastDamped     = 4    // of these, how many are damped too
	fractionsSlack = 1e-12
)

// step is one solve: an advance by df of the segment's G, by Crank-Nicolson or
// backward Euler.
type step struct {
	df    float64
	euler bool
}

// schedule is the list of solves between two events.
type schedule []step

// newSchedule turns cumulative fractions of G, rising to 1, into solves, the
// first damp and the last end of them as two backward-Euler half steps each
// (Rannacher 1984, Numer. Math. 43, 309-327).
func newSchedule(fractions []float64, damp, end int) schedule {
	var s schedule
	from := 0.0
	for i, f := range fractions {
		df := f - from
		if i < damp || i >= len(fractions)-end {
			s = append(s, step{df / 2, true}, step{df / 2, true})
		} else {
			s = append(s, step{df, false})
		}
		from = f
	}
	return s
}

// longest returns the part of G in the longest step.
func (s schedule) longest() float64 {
	longest := 0.0
	for _, st := range s {
		longest = math.Max(longest, st.df)
	}
	return longest
}

// merged returns the schedule of half as many solves: each pair of one kind
// becomes one. A step without a partner stays alone.
func (s schedule) merged() schedule {
	var half schedule
	for i := 0; i < len(s); i += s.pair(i) {
		df := s[i].df
		if s.pair(i) == 2 {
			df += s[i+1].df
		}
		half = append(half, step{df, s[i].euler})
	}
	return half
}

// mergedMeans appends to half the means over the steps of s.merged() of a value
// whose means over the steps of s are given.
func (s schedule) mergedMeans(half, means []float64) []float64 {
	for i := 0; i < len(s); i += s.pair(i) {
		mean := means[i]
		if s.pair(i) == 2 {
			mean += (means[i+1] - means[i]) * s[i+1].df / (s[i].df + s[i+1].df)
		}
		half = append(half, mean)
	}
	return half
}

// leadEnd turns the means over the damped steps at the end into values at the
// ends of these steps, from the means of each and the one before. Backward Euler
// looks at the end of its step: with the mean, what follows a rim closely would
// lag half of the last step behind it.
func (s schedule) leadEnd(means []float64) {
	for i := len(s) - 1; i > 0 && s[i].euler; i-- {
		means[i] += (means[i] - means[i-1]) * s[i].df / (s[i].df + s[i-1].df)
	}
}

// pair returns how many steps merge into one at i: two, or one where the next
// is of another kind or missing.
func (s schedule) pair(i int) int {
	if i+1 < len(s) && s[i].euler == s[i+1].euler {
		return 2
	}
	return 1
}

// defaultFractions returns the cumulative fractions of the default plan. Under
// a rim that moves with time the steps shrink again towards the end, because
// the rim follows the last cooling.
func defaultFractions(damped int, growth float64, moving bool) []float64 {
	var fractions []float64
	longest := longestStep * growth / defaultGrowth
	at, df := 0.0, firstFraction
	for i := range math.MaxInt {
		if i >= damped {
			df = math.Min(df*(1+growth), longest)
		}
		left, take := 1-at, df
		if moving {
			take = math.Min(take, lastFraction+growth*left)
		}
		if take >= left*(1-fractionsSlack) {
			break
		}
		at += take
		fractions = append(fractions, at)
	}
	return append(fractions, 1)
}

// checkFractions refuses fractions that do not rise from above 0 to 1.
func checkFractions(fractions []float64) error {
	from := 0.0
	for i, f := range fractions {
		if !(f > from) {
			return fmt.Errorf("diffusion: fraction %d is %g, not above %g", i, f, from)
		}
		from = f
	}
	if from != 1 {
		return fmt.Errorf("diffusion: the fractions end at %g, not at 1", from)
	}
	return nil
}
