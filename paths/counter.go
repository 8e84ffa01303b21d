package paths

import (
	"math"
	"slices"
)

// counter counts the members of blocks, one after the other, in memory that is used
// again.
type counter struct {
	values, above, standIn []keys
	life, more, less       keys
	sample                 []int64
}

// keys are numbers to be counted, by their bins.
type keys struct {
	list   []uint32
	lo, hi float64
}

// put takes a number; one that is not finite is left out.
func (k *keys) put(x float64) {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return
	}
	if x == 0 {
		x = 0 // not -0
	}
	if len(k.list) == 0 {
		k.lo, k.hi = x, x
	}
	k.list, k.lo, k.hi = append(k.list, binOf(x)), math.Min(k.lo, x), math.Max(k.hi, x)
}

// histogram counts the numbers and forgets them.
func (k *keys) histogram() Histogram {
	h := histogramOf(k.list, k.lo, k.hi)
	k.list = k.list[:0]
	return h
}

// count makes t, which is of no members, the tally of these.
func (c *counter) count(t *Tally, members []member) {
	c.values, c.above, c.standIn = keysFor(c.values, t.Values), keysFor(c.above, t.Above), keysFor(c.standIn, t.StandIn)
	c.sample = c.sample[:0]
	for i := range members {
		c.member(t, &members[i])
	}
	histograms(t.Values, c.values)
	histograms(t.Above, c.above)
	histograms(t.StandIn, c.standIn)
	t.Life, t.More, t.Less = c.life.histogram(), c.more.histogram(), c.less.histogram()
	slices.SortFunc(c.sample, byHash)
	t.sample = slices.Clone(c.sample[:min(len(c.sample), mostSampled)])
}

// member counts one.
func (c *counter) member(t *Tally, m *member) {
	t.Counts[m.Verdict]++
	for k, x := range m.values {
		if !math.IsNaN(x) {
			t.Drawn[k] = [2]float64{math.Min(t.Drawn[k][0], x), math.Max(t.Drawn[k][1], x)}
		}
	}
	if !math.IsNaN(m.numErr) {
		t.erred(m.Index, m.numErr)
	}
	if !math.IsNaN(m.Misfit) {
		t.best(m.Index, m.Misfit)
	}
	switch m.Verdict {
	case Barred:
		t.bar([]FamilyBar{{m.barred, 1, m.Index, m.why}})
	case TooSharp:
		c.more.put(m.Shift)
	case TooSmooth:
		c.less.put(m.Shift)
	case Reproduces:
		putAll(c.values, m.values)
		putAll(c.above, m.above)
		putAll(c.standIn, m.StandIn)
		c.life.put(m.life)
		c.sample = append(c.sample, m.Index)
	}
}

func putAll(dst []keys, x []float64) {
	for k := range dst {
		dst[k].put(x[k])
	}
}

// keysFor are keys for the histograms, with the memory of those given.
func keysFor(old []keys, of []Histogram) []keys {
	if more := len(of) - len(old); more > 0 {
		old = append(old, make([]keys, more)...)
	}
	return old[:len(of)]
}

func histograms(dst []Histogram, of []keys) {
	for k := range dst {
		dst[k] = of[k].histogram()
	}
}
