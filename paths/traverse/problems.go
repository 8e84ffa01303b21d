package traverse

import (
	"errors"

	"bankfire/thermal"
)

// maxProblems is how many problems of one file are reported; a wrong file has
// the same one in every row.
const maxProblems = 20

// list gathers the problems of a file in the order found.
type list struct{ all []error }

func (l *list) add(e *thermal.InputError) {
	if !l.full() {
		l.all = append(l.all, e)
	}
}

func (l *list) full() bool { return len(l.all) >= maxProblems }

// err returns nil, the only problem, or all of them joined.
func (l *list) err() error {
	if len(l.all) == 1 {
		return l.all[0]
	}
	return errors.Join(l.all...)
}
