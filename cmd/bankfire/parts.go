package main

import (
	"context"
	"errors"
	"fmt"
	"io"

	"bankfire/cmd/bankfire/internal/journal"
	"bankfire/cmd/bankfire/internal/results"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// parts are the journals of a run, read in order.
type parts struct {
	disk    results.Disk
	study   *study.Study
	keep    paths.Keep
	files   []string // by their blocks
	partial bool     // what is missing or torn ends a file without an error
	highest []mark   // of each family, the last of the rows that --keep N keeps; nil if it keeps others
}

// each calls f with every block of a family, or of all if family is below 0, in order. A
// block is overwritten by the next.
func (p *parts) each(ctx context.Context, family int, f func(*paths.Block) error) error {
	for _, name := range p.files {
		if err := p.read(ctx, name, family, f); err != nil {
			return err
		}
	}
	return nil
}

// read calls f with the blocks of one file.
func (p *parts) read(ctx context.Context, name string, family int, f func(*paths.Block) error) error {
	file, err := p.disk.Open(name)
	if err != nil {
		return err
	}
	defer file.Close() // it was only read
	in, err := journal.Read(file)
	if err != nil {
		return partError(name, err)
	}
	var b paths.Block
	for {
		if err := ctx.Err(); err != nil {
			return err
		}
		number := in.Number()
		data, err := in.Next()
		switch {
		case err == io.EOF && (number == in.Header.To || p.partial), errors.Is(err, journal.ErrTorn) && p.partial:
			return nil
		case err == io.EOF:
			return unfinished(name, &in.Header, number)
		case err != nil:
			return partError(name, err)
		}
		if err := p.check(&b, data, number); err != nil {
			return partError(name, err)
		}
		if family >= 0 && b.Family != family {
			continue
		}
		if err := f(&b); err != nil {
			return err
		}
	}
}

// check reads block number from the data of its record.
func (p *parts) check(b *paths.Block, data []byte, number int64) error {
	if err := b.UnmarshalBinary(data); err != nil {
		return fmt.Errorf("%w: %w", journal.ErrForeign, err)
	}
	family, from, to := paths.MembersOf(p.study, number)
	last := from - 1
	if n := len(b.Rows); n > 0 {
		last = b.Rows[n-1].Index
	}
	if b.Number != number || b.Family != family || b.From != from || last >= to || b.Tally.Count() != to-from {
		return fmt.Errorf("%w: block %d is another one", journal.ErrForeign, number)
	}
	return nil
}

// tallies adds up the tallies of each family, and finds the last rows to be kept.
func (p *parts) tallies(ctx context.Context) ([]paths.Tally, error) {
	out := make([]paths.Tally, len(p.study.Families))
	lowest := make([]lowest, len(out))
	for i := range lowest {
		lowest[i].most = p.keep.Lowest
	}
	err := p.each(ctx, -1, func(b *paths.Block) error {
		out[b.Family].Add(&b.Tally)
		for i := range b.Rows {
			lowest[b.Family].add(mark{b.Rows[i].Misfit, b.Rows[i].Index})
		}
		return nil
	})
	if p.highest = nil; p.keep.Lowest > 0 && !p.keep.All {
		for i := range lowest {
			p.highest = append(p.highest, lowest[i].last())
		}
	}
	return out, err
}

// rows calls f with the rows of a family that are kept, by their index.
func (p *parts) rows(ctx context.Context, family int, f func(*paths.Row) error) error {
	return p.each(ctx, family, func(b *paths.Block) error {
		for i := range b.Rows {
			row := &b.Rows[i]
			if p.highest != nil && p.highest[family].compare(mark{row.Misfit, row.Index}) < 0 {
				continue
			}
			if err := f(row); err != nil {
				return err
			}
		}
		return nil
	})
}

// partError says what is wrong with a file that should be a part.
func partError(name string, err error) error {
	in := &thermal.InputError{File: name, Problem: err.Error()}
	switch {
	case errors.Is(err, io.ErrUnexpectedEOF):
		in.Problem, in.Remedy = "ends within its header", "make it again"
	case errors.Is(err, journal.ErrForeign):
		in.Remedy = "move it away, or make the part again"
	case errors.Is(err, journal.ErrVersion):
		in.Remedy = "use the program that made it"
	case errors.Is(err, journal.ErrTorn):
		in.Remedy = "mend it by the command that made it with --resume, or add --partial"
	default:
		return fmt.Errorf("%s: %w", name, err)
	}
	return in
}

// unfinished is the error about a part whose blocks end before that number.
func unfinished(name string, h *journal.Header, number int64) error {
	return &thermal.InputError{File: name, Problem: fmt.Sprintf("is not finished: %d of its %d blocks are there", number-h.From, h.To-h.From),
		Remedy: "finish it by the command that made it with --resume, or add --partial"}
}
