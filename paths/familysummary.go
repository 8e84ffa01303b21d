package paths

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"
)

// FamilySummary is what can be read from a family's members. Quantiles of counts are
// right to half the width of a bin, less than one part in 4000; see Histogram.
type FamilySummary struct {
	Values    []ValueSummary // in the order of the family's
	TradeOffs []TradeOff     // the closest first
	Life      Quantiles      // of the members that reproduce, s
	Above     []Quantiles    // of each of the study's thresholds, s
	StandIn   []Quantiles    // of each measured element, K
	More      Quantiles      // of the shift factors of those that are too sharp
	Less      Quantiles      // and of those that are too smooth

	// Of a fair sample of the members that reproduce, as TradeOffs:
	Duration []DurationQuantiles // before eruption, by rising temperature
	Shares   [][]DiffusionShare  // one list a measured element, the largest median first
	Sampled  int64               // how many the sample has
}

// ValueSummary sets what reproduces beside what was drawn.
type ValueSummary struct {
	Drawn  [2]float64 // lowest and highest of all members, those that are barred too
	Kept   [2]float64 // of those that reproduce; NaN where none does
	Kept90 Quantiles
	// Open says of each end of the drawn range that members reproduce up to it, so that
	// the data set no bound there. A value without ends is never open.
	Open [2]bool
}

// Quantiles are those that 5, 50 and 95 % lie below; NaN of nothing.
type Quantiles [3]float64

var quantileParts = [3]float64{0.05, 0.5, 0.95}

// TradeOff is two values, by their places, that go together among the members that
// reproduce, and more so than among all that were drawn, by Spearman's rank correlation.
type TradeOff struct {
	A, B  int
	Rank  float64
	Drawn float64 // that of all that were drawn
}

// What is said of members that reproduce.
const (
	fewest    = 20   // members, below which no correlation is looked at
	together  = 0.5  // the least correlation that is said, and the least by which it differs from that of what was drawn
	openPart  = 0.01 // of the range: members nearer to its end reach it
	openCount = 3    // or as near as the lowest of so many would be by chance
)

// result is the family with the tally of its members.
func (e *engine) result(t *Tally) (*FamilyResult, error) {
	if !t.fits(e.family, len(e.study.Thresholds), len(e.elements)) {
		return nil, fmt.Errorf("paths: the tally is not one of the family %q", e.family.Name)
	}
	f := &FamilyResult{Family: e.family, Methods: e.methods}
	f.Tally.Add(t)
	if len(f.Tally.Drawn) == 0 { // of no members
		f.Tally = e.tally()
	}
	f.Barred = slices.Clone(f.Tally.Bars)
	slices.SortStableFunc(f.Barred, func(a, b FamilyBar) int {
		return cmp.Or(cmp.Compare(b.Count, a.Count), cmp.Compare(a.First, b.First))
	})
	for _, of := range e.elements {
		f.Elements = append(f.Elements, FamilyElement{of.crystal, of.element})
	}
	f.Summary = e.summary(f)
	return f, nil
}

// tally is that of no members of the family.
func (e *engine) tally() Tally {
	return newTally(len(e.family.Values), len(e.study.Thresholds), len(e.elements))
}

// summary reads the tally, and the sample of members that reproduce.
func (e *engine) summary(f *FamilyResult) FamilySummary {
	t := &f.Tally
	s := FamilySummary{Life: quantiles(&t.Life), More: quantiles(&t.More), Less: quantiles(&t.Less)}
	for k := range f.Family.Values {
		s.Values = append(s.Values, f.value(k))
	}
	if t.Counts[Reproduces] == 0 {
		return s
	}
	for k := range t.Above {
		s.Above = append(s.Above, quantiles(&t.Above[k]))
	}
	for k := range t.StandIn {
		s.StandIn = append(s.StandIn, quantiles(&t.StandIn[k]))
	}
	sample := t.Sample()
	read := e.readSample(sample)
	s.Sampled, s.Shares, s.Duration = int64(len(sample)), read.legShares(), e.durations(sample, read.between)
	if len(sample) >= fewest {
		s.TradeOffs = tradeOffs(read.values, e.drawn())
	}
	return s
}

// quantiles are those of what was counted.
func quantiles(h *Histogram) Quantiles {
	var q Quantiles
	for i, p := range quantileParts {
		q[i] = h.Quantile(p)
	}
	return q
}

// value summarises value k.
func (f *FamilyResult) value(k int) ValueSummary {
	nan := math.NaN()
	h, v := &f.Tally.Values[k], &f.Family.Values[k]
	s := ValueSummary{Drawn: f.Tally.Drawn[k], Kept: [2]float64{nan, nan}, Kept90: quantiles(h)}
	if h.Count() == 0 {
		return s
	}
	s.Kept = [2]float64{h.Min, h.Max}
	lo, hi, ends := v.Ends()
	switch {
	case !ends:
	case v.Steps():
		s.Open = [2]bool{s.Kept[0] == lo, s.Kept[1] == hi}
		for i, x := range s.Kept90 {
			s.Kept90[i] = v.Step(x)
		}
	default:
		near := math.Max(openPart, openCount/float64(f.Tally.Count()))
		s.Open = [2]bool{v.Below(s.Kept[0]) <= near, v.Below(s.Kept[1]) >= 1-near}
	}
	return s
}

// tradeOffs are the pairs of values that go together among members that reproduce, if
// they do so less among those drawn: values that depend on each other by how they are
// drawn say nothing of the data. Correlations are compared by Fisher's transform.
func tradeOffs(kept, drawn [][]float64) []TradeOff {
	ofKept, ofDrawn := allRanks(kept), allRanks(drawn)
	var out []TradeOff
	for b := range kept {
		for a := range b {
			r, all := stat.Correlation(ofKept[a], ofKept[b], nil), stat.Correlation(ofDrawn[a], ofDrawn[b], nil)
			if math.IsNaN(all) { // one of them is always the same
				all = 0
			}
			if math.Abs(r) >= together && math.Abs(math.Atanh(r)-math.Atanh(all)) >= math.Atanh(together) {
				out = append(out, TradeOff{a, b, r, all})
			}
		}
	}
	slices.SortStableFunc(out, func(x, y TradeOff) int { return cmp.Compare(math.Abs(y.Rank), math.Abs(x.Rank)) })
	return out
}

func allRanks(values [][]float64) [][]float64 {
	ranks := make([][]float64, len(values))
	for k := range ranks {
		ranks[k] = ranksOf(values[k])
	}
	return ranks
}

// ranksOf are the ranks of numbers, equal ones sharing their mean.
func ranksOf(x []float64) []float64 {
	order := make([]int, len(x))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(a, b int) int { return cmp.Or(cmp.Compare(x[a], x[b]), a-b) })
	ranks := make([]float64, len(x))
	for from := 0; from < len(order); {
		to := from + 1
		for to < len(order) && x[order[to]] == x[order[from]] {
			to++
		}
		for _, i := range order[from:to] {
			ranks[i] = float64(from+to-1) / 2
		}
		from = to
	}
	return ranks
}
