package traverse

import (
	"cmp"
	"errors"
	"fmt"
	"slices"

	"bankfire/thermal"
)

// maxProblems is how many problems of one file are reported.
const maxProblems = 20

// oneByOne is in how many rows a problem is reported row by row. In more, it is
// a matter of the whole column and reported once.
const oneByOne = 4

// list gathers the problems of a file.
type list struct{ kinds []kind }

// kind is what is wrong in the same way in one or more rows.
type kind struct {
	first []*thermal.InputError // of the rows, oneByOne at most
	rows  int
	last  int // line of the last row
}

func (l *list) add(e *thermal.InputError) {
	for i := range l.kinds {
		if k := &l.kinds[i]; k.holds(e) {
			if k.rows++; k.rows <= oneByOne {
				k.first = append(k.first, e)
			}
			k.last = e.Line
			return
		}
	}
	if len(l.kinds) < maxProblems {
		l.kinds = append(l.kinds, kind{[]*thermal.InputError{e}, 1, e.Line})
	}
}

// holds reports whether the problem is of the kind, whatever its row and value.
func (k *kind) holds(e *thermal.InputError) bool {
	of := k.first[0]
	return of.Field == e.Field && of.Problem == e.Problem && of.Remedy == e.Remedy && of.Line > 0 && of.Line != e.Line
}

// told returns the problems of the kind one by one, or the first of them, which
// says how many there are and where.
func (k *kind) told() []*thermal.InputError {
	if k.rows <= oneByOne {
		return k.first
	}
	one := *k.first[0]
	one.Problem += fmt.Sprintf(", in %d rows of lines %d to %d", k.rows, one.Line, k.last)
	return []*thermal.InputError{&one}
}

// err returns nil, the only problem, or up to maxProblems of them joined, in the
// order of the lines.
func (l *list) err() error {
	var all []*thermal.InputError
	for i := range l.kinds {
		all = append(all, l.kinds[i].told()...)
	}
	slices.SortStableFunc(all, func(a, b *thermal.InputError) int { return cmp.Compare(a.Line, b.Line) })
	if len(all) == 1 {
		return all[0]
	}
	var errs []error
	for _, e := range all[:min(len(all), maxProblems)] {
		errs = append(errs, e)
	}
	return errors.Join(errs...)
}
