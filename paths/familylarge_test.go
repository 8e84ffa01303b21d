package paths

import (
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"testing"

	"gonum.org/v1/gonum/stat"

	"bankfire/paths/study"
)

// TestTradeOffs finds a planted pair among values that have nothing to do with each
// other, whatever makes it: only the order counts.
func TestTradeOffs(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 1))
	values := make([][]float64, 4)
	for range 2000 {
		x := r.NormFloat64()
		for k, v := range []float64{r.Float64(), x, float64(r.IntN(3)), -math.Exp(3*x) * (1 + 0.1*r.Float64())} {
			values[k] = append(values[k], v)
		}
	}
	drawn := slices.Clone(values)
	drawn[3] = values[0] // falls with nothing
	got := tradeOffs(values, drawn)
	if len(got) != 1 || got[0].A != 1 || got[0].B != 3 || !(got[0].Rank < -0.99) || !(math.Abs(got[0].Drawn) < 0.1) {
		t.Errorf("planted that value 3 falls as value 1 rises, found %v", got)
	}
	if got := tradeOffs(values, values); got != nil {
		t.Errorf("what was drawn so is no trade-off, found %v", got)
	}
}

// TestLargeFamily reads all of 200,000 members again: quantiles by bins lie within half
// a bin of those of all members, rank correlations of the sample within five of its
// standard errors of those of all; and memory does not grow with their number.
func TestLargeFamily(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	s, err := study.Read("../examples/cooler-but-longer/study.toml")
	if err != nil {
		t.Fatal(err)
	}
	sc := prepared(t, s, ScreenOptions{Jobs: 2})
	f := &s.Families[0]
	tallies := make([]Tally, 1)
	values := make([][]float64, len(f.Values))
	var lives []float64
	var c study.Candidate
	heap := map[int64]uint64{}
	if err := sc.Screen(t.Context(), 0, sc.Blocks(), func(b *Block) error {
		tallies[0].Add(&b.Tally)
		if b.Number == 8 || b.Number == 40 {
			var m runtime.MemStats
			runtime.GC()
			runtime.ReadMemStats(&m)
			heap[b.Number] = m.HeapAlloc - uint64(cap(lives)*8*(1+len(values)))
		}
		for _, row := range b.Rows {
			f.At(&c, row.Index)
			for k, x := range c.Values {
				values[k] = append(values[k], x)
			}
			lives = append(lives, c.History.Life())
		}
		return nil
	}); err != nil {
		t.Fatal(err)
	}
	// kept, they would take 19 MB; of the blocks in work, half a megabyte each, sometimes one more is counted
	if grown := int64(heap[40]) - int64(heap[8]); grown > 4<<20 {
		t.Errorf("32 blocks more take %d bytes", grown)
	}
	r, err := sc.Finish(t.Context(), tallies)
	if err != nil {
		t.Fatal(err)
	}
	got := &r.Families[0]
	if got.Tally.Count() != 200_000 || int64(len(lives)) != got.Tally.Counts[Reproduces] || got.Summary.Sampled != mostSampled {
		t.Fatalf("%d members, %d rows, counts %v", got.Tally.Count(), len(lives), got.Tally.Counts)
	}
	ranks := [][]float64{ranksOf(values[0]), ranksOf(values[1])} // before they are sorted
	want := stat.Correlation(ranks[0], ranks[1], nil)
	if x := got.Summary.TradeOffs; len(x) != 1 || x[0].A != 0 || x[0].B != 1 || !(math.Abs(x[0].Rank-want) <= 5/math.Sqrt(mostSampled)) {
		t.Errorf("trade-offs %v, of all members %v", x, want)
	}
	for _, test := range []struct {
		name string
		got  Quantiles
		all  []float64
	}{{"life", got.Summary.Life, lives}, {"store", got.Summary.Values[0].Kept90, values[0]}, {"wait", got.Summary.Values[1].Kept90, values[1]}} {
		for k, p := range quantileParts {
			if want := exactly(test.all, p); !(math.Abs(test.got[k]-want) <= binWidth/2*want) {
				t.Errorf("%s: %v at %v, of all members %v", test.name, test.got[k], p, want)
			}
		}
	}
}
