package paths

import (
	"cmp"
	"math"
	"slices"

	"bankfire/paths/study"
)

// BlockSize is how many members a block has, but for the last of a family.
const BlockSize = 4096

// Blocks is how many blocks the families of a study have together, those of each in turn.
func Blocks(s *study.Study) int64 {
	var n int64
	for i := range s.Families {
		n += blocksOf(s.Families[i].Count())
	}
	return n
}

// blocksOf is how many blocks so many members are.
func blocksOf(members int64) int64 { return (members + BlockSize - 1) / BlockSize }

// MembersOf says which members a block has: those of the family from the first to the one
// before the last. A block beyond all has none, of no family.
func MembersOf(s *study.Study, block int64) (family int, from, to int64) {
	for i := range s.Families {
		n := s.Families[i].Count()
		if blocks := blocksOf(n); block >= blocks {
			block -= blocks
			continue
		}
		return i, block * BlockSize, min((block+1)*BlockSize, n)
	}
	return -1, 0, 0
}

// MembersIn is how many members the blocks from ... to-1 have.
func MembersIn(s *study.Study, from, to int64) int64 {
	all := int64(0)
	for i := range s.Families {
		n := s.Families[i].Count()
		until := func(block int64) int64 { return min(max(block, 0)*BlockSize, n) }
		all += until(to) - until(from)
		from, to = from-blocksOf(n), to-blocksOf(n)
	}
	return all
}

// Block is the members of a family from one number on, screened: the tally of all, and
// the rows of those that are kept, by their index.
type Block struct {
	Number int64 // counted from 0 through all families
	Family int   // its place in the study
	From   int64 // the first member
	Rows   []Row
	Tally  Tally
}

// Row is what became of a member. Its values, and what follows from its path alone, are
// drawn again when they are needed.
type Row struct {
	Index   int64
	Verdict Verdict
	Shift   float64 // NaN, as the rest, if it is barred
	Shift95 [2]float64
	Tail    float64
	Misfit  float64
	StandIn []float64 // of each measured element, K, if the member reproduces, else nil; 0 where nothing diffuses
}

// Keep says of which members the rows are kept: by default of those that reproduce.
type Keep struct {
	All    bool  // of all
	Lowest int64 // if above 0, of as many as this, those with the lowest chi-square; a block has so many of its own
}

// bar makes it the row of a member that is barred.
func (r *Row) bar() {
	nan := math.NaN()
	*r = Row{Index: r.Index, Verdict: Barred, Shift: nan, Shift95: [2]float64{nan, nan}, Tail: nan, Misfit: nan}
}

// find takes what was found.
func (r *Row) find(f *Finding) {
	r.Verdict, r.Shift, r.Shift95, r.Tail, r.Misfit = f.Verdict, f.Shift, f.Shift95, f.Tail, f.Misfit
}

// verdict reports whether the row of a member with the verdict may be kept.
func (k Keep) verdict(v Verdict) bool { return k.All || k.Lowest > 0 || v == Reproduces }

// of appends the members whose rows are to be kept to dst.
func (k Keep) of(dst []*member, all []member) []*member {
	for i := range all {
		m := &all[i]
		if k.All || k.Lowest > 0 && m.Verdict != Barred || k.Lowest == 0 && m.Verdict == Reproduces {
			dst = append(dst, m)
		}
	}
	if !k.All && k.Lowest > 0 && k.Lowest < int64(len(dst)) {
		slices.SortFunc(dst, func(a, b *member) int {
			return cmp.Or(cmp.Compare(a.Misfit, b.Misfit), cmp.Compare(a.Index, b.Index))
		})
		dst = dst[:k.Lowest]
		slices.SortFunc(dst, func(a, b *member) int { return cmp.Compare(a.Index, b.Index) })
	}
	return dst
}

// rowsOf copies the rows of members, with stand-in temperatures of their own.
func rowsOf(members []*member) []Row {
	if len(members) == 0 {
		return nil
	}
	n := 0
	for _, m := range members {
		n += len(m.StandIn)
	}
	rows, temps := make([]Row, len(members)), make([]float64, 0, n)
	for i, m := range members {
		rows[i], rows[i].StandIn = m.Row, nil
		if len(m.StandIn) > 0 {
			at := len(temps)
			temps = append(temps, m.StandIn...)
			rows[i].StandIn = temps[at:len(temps):len(temps)]
		}
	}
	return rows
}
