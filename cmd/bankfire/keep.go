package main

import (
	"cmp"
	"container/heap"
	"strconv"

	"bankfire/paths"
	"bankfire/thermal"
)

// The words of --keep, which may be a number too, and of --method.
const (
	keepSurvivors = "survivors"
	keepAll       = "all"
	methodTable   = "table"
	methodSteps   = "steps"
	methodEither  = "either" // in headers of parts
)

// parseKeep reads which rows are kept.
func parseKeep(text string) (paths.Keep, error) {
	n, err := strconv.ParseInt(text, 10, 64)
	switch {
	case text == keepSurvivors:
		return paths.Keep{}, nil
	case text == keepAll:
		return paths.Keep{All: true}, nil
	case err == nil && n > 0:
		return paths.Keep{Lowest: n}, nil
	}
	return paths.Keep{}, &thermal.InputError{Field: "--keep", Value: text, Problem: "cannot be read",
		Remedy: "want survivors, all, or a number of members, those with the lowest chi-square"}
}

// parseMethod reads by which method members are run.
func parseMethod(text string) (paths.Method, error) {
	switch text {
	case methodEither:
		return paths.ByChoice, nil
	case methodTable:
		return paths.ByTable, nil
	case methodSteps:
		return paths.InSteps, nil
	}
	return 0, &thermal.InputError{Field: "--method", Value: text, Problem: "there is no such method", Remedy: "want table or steps"}
}

// mark is how a member stands among others by its chi-square.
type mark struct {
	misfit float64
	index  int64
}

func (m mark) compare(o mark) int {
	return cmp.Or(cmp.Compare(m.misfit, o.misfit), cmp.Compare(m.index, o.index))
}

// lowest finds the last of as many members as most, those that stand first.
type lowest struct {
	most  int64
	marks marks
}

// add takes one more member into account.
func (l *lowest) add(m mark) {
	switch {
	case int64(len(l.marks)) < l.most:
		heap.Push(&l.marks, m)
	case l.most > 0 && m.compare(l.marks[0]) < 0:
		l.marks[0] = m
		heap.Fix(&l.marks, 0)
	}
}

// last is the last of the members that stand first.
func (l *lowest) last() mark {
	if len(l.marks) == 0 {
		return mark{}
	}
	return l.marks[0]
}

// marks is a heap with the last of them first.
type marks []mark

func (m marks) Len() int           { return len(m) }
func (m marks) Less(i, j int) bool { return m[i].compare(m[j]) > 0 }
func (m marks) Swap(i, j int)      { m[i], m[j] = m[j], m[i] }
func (m *marks) Push(x any)        { *m = append(*m, x.(mark)) }

// Pop takes the last of the list.
func (m *marks) Pop() any {
	list := *m
	x := list[len(list)-1]
	*m = list[:len(list)-1]
	return x
}
