package main

import (
	"fmt"
	"io"
	"math"
	"strconv"

	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// usualUnit is the unit of a value in tables, with what a value in SI is divided by
// after the zero of the unit is taken away.
func usualUnit(v *study.Value) (unit string, zero, size float64) {
	switch {
	case v.Plain():
		return "", 0, 1
	case v.Dim() == thermal.Temperature && v.Level():
		return "C", thermal.ZeroCelsius, 1
	case v.Dim() == thermal.Duration:
		return "yr", 0, thermal.Year
	}
	return siUnit(v), 0, 1
}

// membersTable returns what writes a row for each member of family i.
func membersTable(i int) func(w io.Writer, r *paths.Result) error {
	return func(w io.Writer, r *paths.Result) error {
		f := &r.Families[i]
		table := newCSV(w)
		table.row(membersHead(r, f)...)
		var row []string
		for k := range f.Members {
			row = memberCells(row[:0], r, f, int64(k))
			table.row(row...)
		}
		return table.end()
	}
}

func membersHead(r *paths.Result, f *paths.FamilyResult) []string {
	head := []string{"member"}
	for k := range f.Family.Values {
		v := &f.Family.Values[k]
		unit, _, _ := usualUnit(v)
		if unit != "" {
			unit = " [" + unit + "]"
		}
		head = append(head, v.Name+unit)
	}
	head = append(head, "verdict", "tail", "misfit", "shift_factor", "shift_95_low", "shift_95_high", "life [yr]")
	for _, t := range r.Study.Thresholds {
		head = append(head, "above "+t.Name+" [yr]")
	}
	for _, e := range f.Elements {
		head = append(head, e.Element.Name+" in "+e.Crystal.Name+": stand-in temperature [C]")
	}
	return head
}

// memberCells appends the cells of a member. Stand-in temperatures are those of members
// that reproduce.
func memberCells(row []string, r *paths.Result, f *paths.FamilyResult, k int64) []string {
	m := &f.Members[k]
	row = append(row, strconv.FormatInt(k, 10))
	for i, x := range m.Values {
		_, zero, size := usualUnit(&f.Family.Values[i])
		row = append(row, cell((x-zero)/size))
	}
	row = append(row, m.Verdict.String(), cell(m.Tail), cell(m.Misfit), cell(m.Shift), openEnd(m.Shift95[0]), openEnd(m.Shift95[1]), cell(m.Life/thermal.Year))
	for i := range r.Study.Thresholds {
		above := math.NaN()
		if i < len(m.Above) {
			above = m.Above[i] / thermal.Year
		}
		row = append(row, cell(above))
	}
	for i := range f.Elements {
		standIn := math.NaN()
		if i < len(m.StandIn) && m.StandIn[i] > 0 {
			standIn = m.StandIn[i] - thermal.ZeroCelsius
		}
		row = append(row, cell(standIn))
	}
	return row
}

// memberFiles are the names of the tables of members, one a family.
func memberFiles(r *paths.Result) []string {
	if len(r.Families) == 1 {
		return []string{"members.csv"}
	}
	names := make([]string, len(r.Families))
	for i := range names {
		names[i] = fmt.Sprintf("members-%d.csv", i+1)
	}
	return names
}
