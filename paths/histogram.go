package paths

import (
	"math"
	"slices"
)

// Histogram counts numbers in bins that are the same for all histograms: a bin holds
// the numbers with one sign, one exponent and the same binBits leading bits of the
// mantissa, so that it is narrower than 2^-binBits of what it holds. Numbers too small
// to be normal are 0; all are finite. The zero value is empty.
type Histogram struct {
	Min, Max float64 // exactly; 0 of nothing
	bins     []bin   // ascending
}

// bin is one that holds something.
type bin struct {
	key   uint32
	count int64
}

// The keys of bins.
const (
	binBits = 11
	binTail = 52 - binBits        // bits that a bin does not look at
	endKey  = 1 << (64 - binTail) // above all keys
)

// binOf is the key of the bin of a number: keys rise as numbers do.
func binOf(x float64) uint32 {
	if math.Abs(x) < 0x1p-1022 {
		x = 0 // -0 too
	}
	b := math.Float64bits(x)
	if b>>63 != 0 {
		b = ^b
	} else {
		b |= 1 << 63
	}
	return uint32(b >> binTail)
}

// middle is the middle of a bin.
func middle(key uint32) float64 {
	b := uint64(key)<<binTail | 1<<(binTail-1)
	if b>>63 != 0 {
		b &^= 1 << 63
	} else {
		b = ^b
	}
	if x := math.Float64frombits(b); math.Abs(x) >= 0x1p-1022 {
		return x
	}
	return 0
}

// histogramOf counts numbers by their keys, which it sorts. Of no keys it is empty,
// whatever the ends.
func histogramOf(keys []uint32, lo, hi float64) Histogram {
	if len(keys) == 0 {
		return Histogram{}
	}
	slices.Sort(keys)
	n := 1
	for i := 1; i < len(keys); i++ {
		if keys[i] != keys[i-1] {
			n++
		}
	}
	h := Histogram{lo, hi, make([]bin, 0, n)}
	for from := 0; from < len(keys); {
		to := from + 1
		for to < len(keys) && keys[to] == keys[from] {
			to++
		}
		h.bins = append(h.bins, bin{keys[from], int64(to - from)})
		from = to
	}
	return h
}

// Count is how many numbers were counted.
func (h *Histogram) Count() int64 {
	var n int64
	for _, b := range h.bins {
		n += b.count
	}
	return n
}

// Quantile is the least number that at least the part p of all is not above, 0 < p <= 1,
// to half the width of its bin; NaN of nothing.
func (h *Histogram) Quantile(p float64) float64 {
	if len(h.bins) == 0 {
		return math.NaN()
	}
	left := int64(math.Ceil(p * float64(h.Count())))
	for _, b := range h.bins {
		if left -= b.count; left <= 0 {
			return math.Max(h.Min, math.Min(middle(b.key), h.Max))
		}
	}
	return h.Max
}

// add counts what o has counted.
func (h *Histogram) add(o *Histogram) {
	if len(o.bins) == 0 {
		return
	}
	if len(h.bins) == 0 {
		*h = Histogram{o.Min, o.Max, slices.Clone(o.bins)}
		return
	}
	h.Min, h.Max = math.Min(h.Min, o.Min), math.Max(h.Max, o.Max)
	added := 0
	for i, j := 0, 0; j < len(o.bins); {
		switch {
		case i == len(h.bins) || o.bins[j].key < h.bins[i].key:
			added++
			j++
		case o.bins[j].key == h.bins[i].key:
			h.bins[i].count += o.bins[j].count
			i++
			j++
		default:
			i++
		}
	}
	if added > 0 {
		h.insert(o.bins, added)
	}
}

// insert puts in those of the bins, so many, that h does not have.
func (h *Histogram) insert(bins []bin, added int) {
	i, j := len(h.bins)-1, len(bins)-1
	h.bins = slices.Grow(h.bins, added)[:len(h.bins)+added]
	for k := len(h.bins) - 1; added > 0; k-- {
		switch {
		case i < 0 || bins[j].key > h.bins[i].key:
			h.bins[k] = bins[j]
			j--
			added--
		case bins[j].key == h.bins[i].key:
			h.bins[k] = h.bins[i]
			i--
			j--
		default:
			h.bins[k] = h.bins[i]
			i--
		}
	}
}
