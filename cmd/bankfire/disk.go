package main

import (
	"context"
	"fmt"

	"bankfire/paths"
	"bankfire/paths/study"
)

// disk is how much of it a run will need, bytes.
type disk struct {
	parts  float64 // until the run ends
	tables float64 // of members
}

// What a run may need without saying so, bytes, the blocks of a family from which on it is
// worth to look at one of them, and what a cell takes in the two tables of members together.
const (
	mostUnsaid = 100e6
	worthwhile = 64
	cellSize   = 17
)

// expectDisk guesses from a block in the middle of each large family what the blocks
// from ... to-1 will need.
func expectDisk(ctx context.Context, st *study.Study, s *paths.Screening, from, to int64) (disk, error) {
	var need disk
	first := int64(0)
	for i := range st.Families {
		next := first + (st.Families[i].Count()+paths.BlockSize-1)/paths.BlockSize
		lo, hi := max(from, first), min(to, next)
		first = next
		if hi-lo < worthwhile {
			continue
		}
		middle := lo + (hi-lo)/2
		err := s.Screen(ctx, middle, middle+1, func(b *paths.Block) error {
			data, err := b.AppendBinary(nil)
			need.parts += float64(len(data)) * float64(hi-lo)
			need.tables += tableBytes(st, b) * float64(hi-lo)
			return err
		})
		if err != nil {
			return disk{}, err
		}
	}
	return need, nil
}

// tableBytes is what the rows of a block will take in the tables of members.
func tableBytes(st *study.Study, b *paths.Block) float64 {
	const always = 8 // columns of every table
	columns := always + len(st.Families[b.Family].Values) + len(st.Thresholds)
	cells := 0
	for i := range b.Rows {
		cells += columns + len(b.Rows[i].StandIn)
	}
	return float64(cells) * cellSize
}

// text says what is needed, "" if that is not much.
func (d disk) text(dir string, divided bool) string {
	switch {
	case d.parts > mostUnsaid && divided:
		return fmt.Sprintf("about %s of disk will be needed in %s", sizeText(d.parts), dir)
	case d.parts+d.tables > mostUnsaid && !divided:
		return fmt.Sprintf("about %s of disk will be needed: %s in %s, until all is done, and %s for the tables of members",
			sizeText(d.parts+d.tables), sizeText(d.parts), dir, sizeText(d.tables))
	}
	return ""
}

func sizeText(bytes float64) string {
	for _, unit := range []string{"bytes", "kB", "MB", "GB"} {
		if bytes < 999.5 {
			return number(bytes) + " " + unit
		}
		bytes /= 1000
	}
	return number(bytes) + " TB"
}
