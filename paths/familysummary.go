package paths

import (
	"cmp"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"
)

// FamilySummary is what can be read from a family's members.
type FamilySummary struct {
	Values    []ValueSummary // in the order of the family's
	TradeOffs []TradeOff     // the closest first
	Life      Quantiles      // of the members that reproduce, s
	Above     []Quantiles    // of each of the study's thresholds, s
	StandIn   []Quantiles    // of each measured element, K
	More      Quantiles      // of the shift factors of those that are too sharp
	Less      Quantiles      // and of those that are too smooth
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

// TradeOff is two values, by their places, that go together among the members that
// reproduce, by Spearman's rank correlation.
type TradeOff struct {
	A, B int
	Rank float64
}

// What is said of members that reproduce.
const (
	fewest    = 20   // members, below which no correlation is looked at
	together  = 0.5  // the least correlation that is said
	openPart  = 0.01 // of the range: members nearer to its end reach it
	openCount = 3    // or as near as the lowest of so many would be by chance
)

// Reproducing are the members that reproduce.
func (f *FamilyResult) Reproducing() []*Member { return f.with(Reproduces) }

// with are the members with the verdict.
func (f *FamilyResult) with(v Verdict) []*Member {
	out := make([]*Member, 0, f.Counts[v])
	for i := range f.Members {
		if f.Members[i].Verdict == v {
			out = append(out, &f.Members[i])
		}
	}
	return out
}

// Summary reads the members.
func (f *FamilyResult) Summary() FamilySummary {
	kept := f.Reproducing()
	s := FamilySummary{Life: quantiles(kept, func(m *Member) float64 { return m.Life })}
	for k := range f.Family.Values {
		s.Values = append(s.Values, f.value(k, kept))
	}
	if len(kept) >= fewest {
		s.TradeOffs = f.tradeOffs(kept)
	}
	if len(kept) > 0 {
		for k := range kept[0].Above {
			s.Above = append(s.Above, quantiles(kept, func(m *Member) float64 { return m.Above[k] }))
		}
		for k := range kept[0].StandIn {
			s.StandIn = append(s.StandIn, quantiles(kept, func(m *Member) float64 { return m.StandIn[k] }))
		}
	}
	shift := func(m *Member) float64 { return m.Shift }
	s.More, s.Less = quantiles(f.with(TooSharp), shift), quantiles(f.with(TooSmooth), shift)
	return s
}

// quantiles are those of what is read of the members.
func quantiles(members []*Member, of func(*Member) float64) Quantiles {
	if len(members) == 0 {
		return Quantiles{math.NaN(), math.NaN(), math.NaN()}
	}
	x := make([]float64, len(members))
	for i, m := range members {
		x[i] = of(m)
	}
	slices.Sort(x)
	var q Quantiles
	for i, p := range [...]float64{0.05, 0.5, 0.95} {
		q[i] = stat.Quantile(p, stat.Empirical, x, nil)
	}
	return q
}

// value summarises value k.
func (f *FamilyResult) value(k int, kept []*Member) ValueSummary {
	nan := math.NaN()
	s := ValueSummary{Drawn: [2]float64{math.Inf(1), math.Inf(-1)}, Kept: [2]float64{nan, nan}}
	s.Kept90 = quantiles(kept, func(m *Member) float64 { return m.Values[k] })
	for i := range f.Members {
		x := f.Members[i].Values[k]
		s.Drawn = [2]float64{math.Min(s.Drawn[0], x), math.Max(s.Drawn[1], x)}
	}
	if len(kept) == 0 {
		return s
	}
	by := func(a, b *Member) int { return cmp.Compare(a.Values[k], b.Values[k]) }
	s.Kept = [2]float64{slices.MinFunc(kept, by).Values[k], slices.MaxFunc(kept, by).Values[k]}
	v := &f.Family.Values[k]
	lo, hi, ends := v.Ends()
	switch {
	case !ends:
	case v.Steps():
		s.Open = [2]bool{s.Kept[0] == lo, s.Kept[1] == hi}
	default:
		near := math.Max(openPart, openCount/float64(len(f.Members)))
		s.Open = [2]bool{v.Below(s.Kept[0]) <= near, v.Below(s.Kept[1]) >= 1-near}
	}
	return s
}

// tradeOffs are the pairs of values that go together.
func (f *FamilyResult) tradeOffs(kept []*Member) []TradeOff {
	ranks := make([][]float64, len(f.Family.Values))
	for k := range ranks {
		ranks[k] = ranksOf(kept, k)
	}
	var out []TradeOff
	for b := range ranks {
		for a := range b {
			if r := stat.Correlation(ranks[a], ranks[b], nil); math.Abs(r) >= together {
				out = append(out, TradeOff{a, b, r})
			}
		}
	}
	slices.SortStableFunc(out, func(x, y TradeOff) int { return cmp.Compare(math.Abs(y.Rank), math.Abs(x.Rank)) })
	return out
}

// ranksOf are the ranks of the members by value k, equal ones sharing their mean.
func ranksOf(members []*Member, k int) []float64 {
	order := make([]int, len(members))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(a, b int) int {
		return cmp.Or(cmp.Compare(members[a].Values[k], members[b].Values[k]), a-b)
	})
	ranks := make([]float64, len(members))
	for from := 0; from < len(order); {
		to := from + 1
		for to < len(order) && members[order[to]].Values[k] == members[order[from]].Values[k] {
			to++
		}
		for _, i := range order[from:to] {
			ranks[i] = float64(from+to-1) / 2
		}
		from = to
	}
	return ranks
}
