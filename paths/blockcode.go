package paths

import (
	"encoding/binary"
	"fmt"
	"math"
	"slices"
)

// blockForm is the number of the form in which blocks are written.
const blockForm = 1

// AppendBinary appends the block in a form that UnmarshalBinary reads: equal blocks
// give equal bytes, on any machine. It never fails.
func (b *Block) AppendBinary(dst []byte) ([]byte, error) {
	dst = append(dst, blockForm)
	dst = appendCount(dst, b.Number)
	dst = appendCount(dst, int64(b.Family))
	dst = appendCount(dst, b.From)
	dst = appendCount(dst, int64(len(b.Rows)))
	next := b.From
	for i := range b.Rows {
		r := &b.Rows[i]
		dst = appendCount(dst, r.Index-next)
		next = r.Index + 1
		dst = r.append(dst)
	}
	return b.Tally.AppendBinary(dst)
}

// UnmarshalBinary reads what AppendBinary wrote. Other bytes are an error, after which
// the block is empty.
func (b *Block) UnmarshalBinary(data []byte) error {
	r := &byteReader{left: data}
	if form := r.count(); form != blockForm {
		r.fail("a block of form %d, not %d", form, blockForm)
	}
	*b = Block{Number: r.count(), Family: r.place(), From: r.count()}
	if n := r.length(2); n > 0 {
		b.Rows = make([]Row, 0, min(n, BlockSize))
		for next := b.From; len(b.Rows) < n && r.err == nil; {
			row := Row{Index: next + r.count()}
			if row.Index < next || row.Index-b.From >= BlockSize {
				r.fail("member %d in the block from %d on", row.Index, b.From)
			}
			next = row.Index + 1
			row.read(r)
			b.Rows = append(b.Rows, row)
		}
	}
	b.Tally.read(r)
	return r.end(func() { *b = Block{} })
}

// append appends all of the row but its index.
func (r *Row) append(dst []byte) []byte {
	if dst = append(dst, byte(r.Verdict)); r.Verdict == Barred {
		return dst
	}
	dst = appendNumbers(dst, r.Shift, r.Shift95[0], r.Shift95[1], r.Tail, r.Misfit)
	return appendNumbers(appendCount(dst, int64(len(r.StandIn))), r.StandIn...)
}

func (r *Row) read(from *byteReader) {
	if r.Verdict = Verdict(from.count()); r.Verdict >= Barred || r.Verdict < 0 {
		if r.Verdict > Barred {
			from.fail("no verdict has the number %d", r.Verdict)
		}
		r.bar()
		return
	}
	r.Shift, r.Shift95[0], r.Shift95[1] = from.number(), from.number(), from.number()
	r.Tail, r.Misfit = from.number(), from.number()
	r.StandIn = from.numbers(from.length(8))
}

// AppendBinary appends the tally in a form that UnmarshalBinary reads: equal tallies
// give equal bytes, on any machine. It never fails.
func (t *Tally) AppendBinary(dst []byte) ([]byte, error) {
	for _, n := range [...]int{len(t.Drawn), len(t.Values), len(t.Above), len(t.StandIn), len(t.Bars)} {
		dst = appendCount(dst, int64(n))
	}
	for _, n := range t.Counts {
		dst = appendCount(dst, n)
	}
	for _, b := range t.Bars {
		dst = appendText(appendText(dst, b.Words), b.Why)
		dst = appendCount(appendCount(dst, b.Count), b.First)
	}
	dst = appendNumbers(appendCount(dst, t.Best+1), t.Misfit)
	dst = appendNumbers(appendCount(dst, t.NumErrOf+1), t.NumErr)
	for _, r := range t.Drawn {
		dst = appendNumbers(dst, r[:]...)
	}
	t.histograms(func(h *Histogram) { dst = h.append(dst) })
	sample := t.Sample()
	dst = appendCount(dst, int64(len(sample)))
	next := int64(0)
	for _, i := range sample {
		dst = appendCount(dst, i-next)
		next = i + 1
	}
	return dst, nil
}

// UnmarshalBinary reads what AppendBinary wrote. Other bytes are an error, after which
// the tally is empty.
func (t *Tally) UnmarshalBinary(data []byte) error {
	r := &byteReader{left: data}
	t.read(r)
	return r.end(func() { *t = Tally{} })
}

// histograms calls f with every histogram of the tally, always in one order.
func (t *Tally) histograms(f func(*Histogram)) {
	for _, list := range [...][]Histogram{t.Values, t.Above, t.StandIn} {
		for k := range list {
			f(&list[k])
		}
	}
	f(&t.Life)
	f(&t.More)
	f(&t.Less)
}

func (t *Tally) read(r *byteReader) {
	drawn, values, above, elements, bars := r.length(16), r.length(1), r.length(1), r.length(1), r.length(4)
	if values+above+elements > len(r.left) {
		r.fail("too short for its histograms")
		return
	}
	*t = Tally{Values: make([]Histogram, values), Above: make([]Histogram, above), StandIn: make([]Histogram, elements)}
	for v := range t.Counts {
		t.Counts[v] = r.count()
	}
	for range bars {
		b := FamilyBar{Words: r.text(), Why: r.text()}
		b.Count, b.First = r.count(), r.count()
		if n := len(t.Bars); n > 0 && b.Words <= t.Bars[n-1].Words {
			r.fail("reasons out of order")
		}
		if r.err != nil {
			return
		}
		t.Bars = append(t.Bars, b)
	}
	t.Best, t.Misfit = r.count()-1, r.number()
	t.NumErrOf, t.NumErr = r.count()-1, r.number()
	for range drawn {
		if r.err == nil {
			t.Drawn = append(t.Drawn, [2]float64{r.number(), r.number()})
		}
	}
	t.histograms(func(h *Histogram) { h.read(r) })
	t.readSample(r)
}

func (t *Tally) readSample(r *byteReader) {
	n := r.length(1)
	if most := min(t.Counts[Reproduces], mostSampled); r.err == nil && int64(n) != most {
		r.fail("a sample of %d, not %d", n, most)
	}
	next := int64(0)
	for range n {
		i := next + r.count()
		if i < next || i == math.MaxInt64 {
			r.fail("a sample out of range")
		}
		if r.err != nil {
			return
		}
		t.sample, next = append(t.sample, i), i+1
	}
	slices.SortFunc(t.sample, byHash)
}

func (h *Histogram) append(dst []byte) []byte {
	if dst = appendCount(dst, int64(len(h.bins))); len(h.bins) == 0 {
		return dst
	}
	dst = appendNumbers(dst, h.Min, h.Max)
	next := uint32(0)
	for _, b := range h.bins {
		dst = appendCount(appendCount(dst, int64(b.key-next)), b.count-1)
		next = b.key + 1
	}
	return dst
}

func (h *Histogram) read(r *byteReader) {
	n := r.length(2)
	if n == 0 || r.err != nil {
		return
	}
	h.Min, h.Max = r.number(), r.number()
	h.bins = make([]bin, 0, n)
	next := int64(0)
	for range n {
		key, count := next+r.count(), r.count()+1
		if key < next || key >= endKey || count < 1 {
			r.fail("a bin out of range")
		}
		if r.err != nil {
			return
		}
		h.bins, next = append(h.bins, bin{uint32(key), count}), key+1
	}
}

func appendCount(dst []byte, n int64) []byte { return binary.AppendUvarint(dst, uint64(n)) }

func appendText(dst []byte, s string) []byte { return append(appendCount(dst, int64(len(s))), s...) }

func appendNumbers(dst []byte, x ...float64) []byte {
	for _, v := range x {
		dst = binary.LittleEndian.AppendUint64(dst, math.Float64bits(v))
	}
	return dst
}

// byteReader reads numbers and texts from bytes. After the first fault, which it keeps,
// all is 0.
type byteReader struct {
	left []byte
	err  error
}

func (r *byteReader) fail(format string, args ...any) {
	if r.err == nil {
		r.err = fmt.Errorf("paths: no block: "+format, args...)
	}
	r.left = nil
}

// end is the fault, after clear, if there was one.
func (r *byteReader) end(clear func()) error {
	if r.err == nil && len(r.left) > 0 {
		r.fail("%d bytes too many", len(r.left))
	}
	if r.err != nil {
		clear()
	}
	return r.err
}

// count is a whole number from 0, in its shortest form.
func (r *byteReader) count() int64 {
	u, n := binary.Uvarint(r.left)
	if r.err != nil || n <= 0 || u > math.MaxInt64 || n > 1 && r.left[n-1] == 0 {
		r.fail("a number cut short or too large")
		return 0
	}
	r.left = r.left[n:]
	return int64(u)
}

// place is a count that an int holds everywhere.
func (r *byteReader) place() int {
	n := r.count()
	if n > math.MaxInt32 {
		r.fail("the number %d is too large", n)
		return 0
	}
	return int(n)
}

// length is how many of something follow, each of at least so many bytes.
func (r *byteReader) length(bytes int) int {
	n := r.count()
	if n > int64(len(r.left)/bytes) {
		r.fail("%d more entries in %d bytes", n, len(r.left))
		return 0
	}
	return int(n)
}

func (r *byteReader) text() string {
	n := r.length(1)
	s := string(r.left[:n])
	r.left = r.left[n:]
	return s
}

func (r *byteReader) number() float64 {
	if len(r.left) < 8 {
		r.fail("a number cut short")
		return 0
	}
	x := math.Float64frombits(binary.LittleEndian.Uint64(r.left))
	r.left = r.left[8:]
	return x
}

func (r *byteReader) numbers(n int) []float64 {
	if n == 0 {
		return nil
	}
	out := make([]float64, n)
	for i := range out {
		out[i] = r.number()
	}
	return out
}
