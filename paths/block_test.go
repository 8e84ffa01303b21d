package paths

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"math/rand/v2"
	"runtime"
	"slices"
	"testing"
)

// blockOf is a block of made-up members of which those are kept.
func blockOf(seed uint64, n int, keep Keep) *Block {
	members := madeUp(rand.New(rand.NewPCG(seed, 0)), n)
	b := &Block{Number: 7, Family: 2, Rows: rowsOf(keep.of(nil, members)), Tally: tallied(members)}
	for i := range b.Rows {
		b.Rows[i].Index += 3 * BlockSize
	}
	b.From = 3 * BlockSize
	return b
}

// bytesOf are the block's, which it must be read from again.
func bytesOf(t testing.TB, b *Block) []byte {
	t.Helper()
	data, err := b.AppendBinary([]byte("before"))
	if err != nil || !bytes.HasPrefix(data, []byte("before")) {
		t.Fatalf("%q, %v", data[:6], err)
	}
	return data[len("before"):]
}

func TestBlockSurvives(t *testing.T) {
	for seed, n := range []int{0, 1, 50, BlockSize} {
		for _, keep := range []Keep{{}, {All: true}, {Lowest: 5}} {
			b := blockOf(uint64(seed), n, keep)
			data := bytesOf(t, b)
			var got Block
			if err := got.UnmarshalBinary(data); err != nil {
				t.Fatalf("%d members: %v", n, err)
			}
			if fmt.Sprint(got.Rows) != fmt.Sprint(b.Rows) || got.Number != 7 || got.Family != 2 || got.From != b.From {
				t.Errorf("%d members: other rows", n)
			}
			if !bytes.Equal(bytesOf(t, &got), data) {
				t.Errorf("%d members: other bytes", n)
			}
			for cut := range min(len(data), 500) {
				if err := got.UnmarshalBinary(data[:cut]); err == nil || got.Rows != nil {
					t.Fatalf("%d members: the first %d bytes of %d are a block", n, cut, len(data))
				}
			}
			if err := got.UnmarshalBinary(append(data, 0)); err == nil {
				t.Errorf("%d members: a byte too many is taken", n)
			}
		}
	}
}

// TestHostileLengths: bytes that claim more than they hold cost no memory.
func TestHostileLengths(t *testing.T) {
	sound := bytesOf(t, blockOf(1, 200, Keep{}))
	for at := range len(sound) {
		hostile := binary.AppendUvarint(slices.Clone(sound[:at]), 1<<40)
		hostile = append(hostile, sound[at:]...)
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		var b Block
		_ = b.UnmarshalBinary(hostile) // within a number it may be sound
		runtime.ReadMemStats(&after)
		if grown := after.TotalAlloc - before.TotalAlloc; grown > 1<<20 {
			t.Fatalf("a hostile length at byte %d costs %d bytes", at, grown)
		}
	}
}

func FuzzBlock(f *testing.F) {
	for seed, n := range []int{0, 1, 30, 300} {
		f.Add(bytesOf(f, blockOf(uint64(seed), n, Keep{All: n < 100})))
	}
	f.Add([]byte{})
	f.Fuzz(func(t *testing.T, data []byte) {
		var b Block
		if err := b.UnmarshalBinary(data); err != nil {
			return
		}
		if got := bytesOf(t, &b); !bytes.Equal(got, data) {
			t.Errorf("read and written again, %x is %x", data, got)
		}
		var sum Tally
		sum.Add(&b.Tally)
		sum.Add(&b.Tally)
		for _, p := range []float64{0.05, 0.5, 1} {
			sum.Life.Quantile(p)
		}
		sum.Sample()
	})
}

// TestKeep counts and orders by hand.
func TestKeep(t *testing.T) {
	members := madeUp(rand.New(rand.NewPCG(9, 9)), 1000)
	want := map[bool][]int64{}
	var misfits []float64
	for i := range members {
		if m := &members[i]; m.Verdict != Barred {
			misfits = append(misfits, m.Misfit)
			if m.Verdict == Reproduces {
				want[true] = append(want[true], m.Index)
			}
		}
	}
	indexes := func(rows []Row) (out []int64) {
		for _, r := range rows {
			out = append(out, r.Index)
		}
		return out
	}
	if got := indexes(rowsOf(Keep{}.of(nil, members))); !slices.Equal(got, want[true]) {
		t.Errorf("%d rows of those that reproduce, want %d", len(got), len(want[true]))
	}
	if got := rowsOf(Keep{All: true}.of(nil, members)); len(got) != 1000 {
		t.Errorf("%d rows of 1000", len(got))
	}
	slices.Sort(misfits)
	lowest := rowsOf(Keep{Lowest: 100}.of(nil, members))
	var got []float64
	for _, r := range lowest {
		got = append(got, r.Misfit)
	}
	if !slices.IsSorted(indexes(lowest)) {
		t.Error("rows are not by their index")
	}
	slices.Sort(got)
	if !slices.Equal(got, misfits[:100]) {
		t.Errorf("the lowest have chi-squares %v, want %v", got, misfits[:100])
	}
	if got := rowsOf(Keep{Lowest: 5000}.of(nil, members)); len(got) != len(misfits) {
		t.Errorf("%d rows, want all %d that are not barred", len(got), len(misfits))
	}
}
