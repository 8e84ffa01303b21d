package paths

import (
	"cmp"
	"math"
	"slices"
	"strings"

	"bankfire/paths/draw"
	"bankfire/paths/study"
)

// Tally is what is known of all members of a family that were screened, in memory that
// does not grow with their number. Tallies of different members add up, in any order
// and to the last bit, to the one of all. The zero value is that of no members.
type Tally struct {
	Counts   [Barred + 1]int64
	Bars     []FamilyBar  // why members are ruled out, by their words
	Best     int64        // the member with the lowest chi-square, the first of several; -1 if there is none or Misfit is NaN
	Misfit   float64      // its chi-square; NaN if there is none
	NumErr   float64      // the largest numerical error that was audited for a member, in sigma
	NumErrOf int64        // that member, the first of several; -1 if none was audited
	Drawn    [][2]float64 // lowest and highest of each value, members that are barred too
	Values   []Histogram  // of each value of the members that reproduce, SI
	Life     Histogram    // their start to eruption, s
	Above    []Histogram  // their time above each of the study's thresholds before eruption, s
	StandIn  []Histogram  // their stand-in temperature of each measured element, K; 0 where nothing diffuses
	More     Histogram    // the shift factors of those that are too sharp
	Less     Histogram    // and of those that are too smooth

	// sample is the up to mostSampled members that reproduce of which the hash of the
	// index is lowest, by the hash: a fair sample, whatever the order.
	sample []int64
}

// mostSampled is how many members a tally remembers.
const mostSampled = 2048

// FamilyBar is one reason for which members are ruled out.
type FamilyBar struct {
	Words string // the same for all
	Count int64
	First int64  // the first of them
	Why   string // what is wrong with that
}

// newTally is of no members of a family with so many values, thresholds and elements.
func newTally(values, above, elements int) Tally {
	t := Tally{Best: -1, Misfit: math.NaN(), NumErrOf: -1, Drawn: make([][2]float64, values),
		Values: make([]Histogram, values), Above: make([]Histogram, above), StandIn: make([]Histogram, elements)}
	for k := range t.Drawn {
		t.Drawn[k] = noRange()
	}
	return t
}

func noRange() [2]float64 { return [2]float64{math.Inf(1), math.Inf(-1)} }

// Count is how many members were screened.
func (t *Tally) Count() int64 {
	var n int64
	for _, c := range t.Counts {
		n += c
	}
	return n
}

// Sample is a fair sample of the members that reproduce, by their index: all of them if
// there are no more than mostSampled.
func (t *Tally) Sample() []int64 {
	out := slices.Clone(t.sample)
	slices.Sort(out)
	return out
}

// Add adds the members of o, which must be others than those of t.
func (t *Tally) Add(o *Tally) {
	if t.Count() == 0 && len(t.Drawn)+len(t.Above)+len(t.StandIn) == 0 {
		*t = newTally(len(o.Drawn), len(o.Above), len(o.StandIn))
	}
	for v, n := range o.Counts {
		t.Counts[v] += n
	}
	t.bar(o.Bars)
	if o.Count() > 0 {
		t.best(o.Best, o.Misfit)
		t.erred(o.NumErrOf, o.NumErr)
	}
	for len(t.Drawn) < len(o.Drawn) {
		t.Drawn = append(t.Drawn, noRange())
	}
	for k, r := range o.Drawn {
		t.Drawn[k] = [2]float64{math.Min(t.Drawn[k][0], r[0]), math.Max(t.Drawn[k][1], r[1])}
	}
	addAll(&t.Values, o.Values)
	addAll(&t.Above, o.Above)
	addAll(&t.StandIn, o.StandIn)
	t.Life.add(&o.Life)
	t.More.add(&o.More)
	t.Less.add(&o.Less)
	t.sample = joinSamples(t.sample, o.sample)
}

func addAll(dst *[]Histogram, from []Histogram) {
	if more := len(from) - len(*dst); more > 0 {
		*dst = append(*dst, make([]Histogram, more)...)
	}
	for k := range from {
		(*dst)[k].add(&from[k])
	}
}

// best takes member i with the chi-square for the best if it is.
func (t *Tally) best(i int64, misfit float64) {
	if i >= 0 && (t.Best < 0 || misfit < t.Misfit || misfit == t.Misfit && i < t.Best) {
		t.Best, t.Misfit = i, misfit
	}
}

// erred takes the audited error of member i for the largest if it is.
func (t *Tally) erred(i int64, numErr float64) {
	if i >= 0 && (t.NumErrOf < 0 || numErr > t.NumErr || numErr == t.NumErr && i < t.NumErrOf) {
		t.NumErrOf, t.NumErr = i, numErr
	}
}

// bar adds reasons.
func (t *Tally) bar(bars []FamilyBar) {
	for _, b := range bars {
		i, found := slices.BinarySearchFunc(t.Bars, b.Words, func(b FamilyBar, words string) int { return strings.Compare(b.Words, words) })
		if !found {
			t.Bars = slices.Insert(t.Bars, i, b)
			continue
		}
		of := &t.Bars[i]
		of.Count += b.Count
		if b.First < of.First {
			of.First, of.Why = b.First, b.Why
		}
	}
}

// hashOf decides which members are in a sample.
func hashOf(i int64) uint64 { return draw.SplitMix(0, uint64(i)) }

func byHash(a, b int64) int { return cmp.Compare(hashOf(a), hashOf(b)) }

// joinSamples is the sample of those of two.
func joinSamples(a, b []int64) []int64 {
	if len(b) == 0 || len(a) == mostSampled && byHash(a[len(a)-1], b[0]) < 0 {
		return a
	}
	out := make([]int64, 0, min(len(a)+len(b), mostSampled))
	for len(out) < cap(out) {
		if len(b) == 0 || len(a) > 0 && byHash(a[0], b[0]) <= 0 {
			out, a = append(out, a[0]), a[1:]
		} else {
			out, b = append(out, b[0]), b[1:]
		}
	}
	return out
}

// fits reports whether the tally can be one of the family, weighed with so many
// thresholds and elements.
func (t *Tally) fits(f *study.Family, above, elements int) bool {
	n := t.Count()
	if n == 0 && len(t.Drawn)+len(t.Above)+len(t.StandIn) == 0 {
		return true
	}
	return n <= f.Count() && len(t.Drawn) == len(f.Values) && len(t.Values) == len(f.Values) &&
		len(t.Above) == above && len(t.StandIn) == elements && t.Best < f.Count() && t.NumErrOf < f.Count() &&
		(len(t.sample) == 0 || slices.Min(t.sample) >= 0 && slices.Max(t.sample) < f.Count())
}
