package paths

import (
	"bytes"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// encoded are the bytes of a tally.
func encoded(t testing.TB, of *Tally) []byte {
	t.Helper()
	data, err := of.AppendBinary(nil)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

// madeUp are members with random numbers, some of them equal, zero or below.
func madeUp(r *rand.Rand, n int) []member {
	number := func() float64 {
		switch r.IntN(8) {
		case 0:
			return 0
		case 1:
			return -float64(r.IntN(5))
		}
		return math.Exp(20 * r.NormFloat64())
	}
	out := make([]member, n)
	for i := range out {
		m := &out[i]
		m.Index, m.numErr = int64(i), math.NaN()
		m.values = []float64{number(), number()}
		if m.Verdict = Verdict(r.IntN(int(Barred) + 1)); m.Verdict == Barred {
			m.bar()
			m.barred, m.why = []string{"cold", "long"}[r.IntN(2)], []string{"very", "rather"}[r.IntN(2)]
			continue
		}
		m.Shift, m.Misfit, m.Tail, m.life = math.Abs(number()), float64(r.IntN(40)), r.Float64(), number()
		m.above = []float64{number()}
		if r.IntN(3) == 0 {
			m.numErr = float64(r.IntN(9))
		}
		if m.Verdict == Reproduces {
			m.StandIn = []float64{number()}
		}
	}
	return out
}

// tallied is the tally of made-up members.
func tallied(members []member) Tally {
	var c counter
	t := newTally(2, 1, 1)
	c.count(&t, members)
	return t
}

// TestTallyAddsInAnyOrder splits members anyhow and adds their tallies in any order and
// grouping: the bytes are those of the tally of all at once.
func TestTallyAddsInAnyOrder(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 20 {
		members := madeUp(r, 1+r.IntN(3*mostSampled*7)) // up to three times as many that reproduce as a sample holds
		all := tallied(members)
		want := encoded(t, &all)
		parts := make([][]member, 1+r.IntN(6)) // some of them empty
		for i := range members {
			k := r.IntN(len(parts))
			parts[k] = append(parts[k], members[i])
		}
		sums := make([]Tally, 1, len(parts)+1) // the first is the zero value
		for _, part := range parts {
			sums = append(sums, tallied(part))
		}
		for len(sums) > 1 {
			i, j := r.IntN(len(sums)), r.IntN(len(sums)-1)
			if j >= i {
				j++
			}
			sums[i].Add(&sums[j])
			sums = slices.Delete(sums, j, j+1)
		}
		if !bytes.Equal(encoded(t, &sums[0]), want) {
			t.Fatalf("%d members in %d parts add up to another tally", len(members), len(parts))
		}
	}
}

// TestTallyCounts compares with counts by hand.
func TestTallyCounts(t *testing.T) {
	members := madeUp(rand.New(rand.NewPCG(3, 4)), 5000)
	all := tallied(members)
	best, worst := -1, -1
	var cold FamilyBar
	for i := range members {
		m := &members[i]
		if m.Verdict != Barred && (best < 0 || m.Misfit < members[best].Misfit) {
			best = i
		}
		if m.numErr > -1 && (worst < 0 || m.numErr > members[worst].numErr) {
			worst = i
		}
		if m.barred == "cold" {
			if cold.Count++; cold.Count == 1 {
				cold = FamilyBar{"cold", 1, m.Index, m.why}
			}
		}
	}
	if all.Best != int64(best) || all.Misfit != members[best].Misfit || all.NumErrOf != int64(worst) || all.NumErr != members[worst].numErr {
		t.Errorf("best %d, worst error %d; want %d and %d", all.Best, all.NumErrOf, best, worst)
	}
	if len(all.Bars) != 2 || all.Bars[0] != cold || all.Count() != 5000 || all.Counts[Barred] != all.Bars[0].Count+all.Bars[1].Count {
		t.Errorf("bars %v, want first %v", all.Bars, cold)
	}
}

// TestSampleIsFair: members of each tenth of the family are sampled as often as the
// binomial distribution has it, to five of its standard deviations, and the sample is
// as large as may be.
func TestSampleIsFair(t *testing.T) {
	const n = 100_000
	var sum Tally
	for from := int64(0); from < n; from += BlockSize {
		var members []member
		for i := from; i < min(n, from+BlockSize); i++ {
			members = append(members, member{Row: Row{Index: i, Verdict: Reproduces, StandIn: []float64{1}}, values: []float64{1, 1}, above: []float64{1}})
		}
		part := tallied(members)
		sum.Add(&part)
	}
	tenths := make([]float64, 10)
	for _, i := range sum.Sample() {
		tenths[i*10/n]++
	}
	if len(sum.Sample()) != mostSampled {
		t.Errorf("a sample of %d", len(sum.Sample()))
	}
	for k, got := range tenths {
		if sigma := math.Sqrt(mostSampled * 0.1 * 0.9); math.Abs(got-mostSampled/10.) > 5*sigma {
			t.Errorf("tenth %d: %v of %d", k, got, mostSampled)
		}
	}
}

// TestBins: keys rise with numbers, and the middle of a bin is within half its width.
func TestBins(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	x := []float64{0, math.Copysign(0, -1), 5e-324, -5e-324, 0x1p-1022, -0x1p-1022, math.MaxFloat64, -math.MaxFloat64, 1, -1}
	for range 10000 {
		x = append(x, math.Copysign(math.Exp(300*r.NormFloat64()), r.NormFloat64()))
	}
	slices.Sort(x)
	for i, v := range x {
		if i > 0 && binOf(v) < binOf(x[i-1]) {
			t.Fatalf("%v has a key above that of %v", x[i-1], v)
		}
		if got := middle(binOf(v)); !(math.Abs(got-v) <= binWidth/2*math.Abs(v)) && math.Abs(v) >= 0x1p-1022 || got != 0 && math.Abs(v) < 0x1p-1022 {
			t.Fatalf("%v is in a bin about %v", v, got)
		}
	}
}

// TestQuantiles compares with those of the sorted numbers.
func TestQuantiles(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	for _, n := range []int{1, 2, 19, 20, 21, 1000} {
		var k keys
		var x []float64
		for range n {
			x = append(x, 1000*r.NormFloat64())
			k.put(x[len(x)-1])
		}
		h := k.histogram()
		for _, p := range []float64{0.001, 0.05, 0.5, 0.95, 1} {
			if got, want := h.Quantile(p), exactly(x, p); !(math.Abs(got-want) <= binWidth/2*math.Abs(want)) {
				t.Errorf("%v of %d: %v, want %v", p, n, got, want)
			}
		}
	}
	if q := new(Histogram).Quantile(0.5); !math.IsNaN(q) {
		t.Errorf("the median of nothing is %v", q)
	}
}
