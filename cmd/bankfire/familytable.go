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

// membersTable returns what writes a row for each of the members of family i.
func membersTable(i int, rows []paths.Row) func(w io.Writer, r *paths.Result) error {
	return func(w io.Writer, r *paths.Result) error {
		f := &r.Families[i]
		table := newCSV(w)
		table.row(membersHead(r, f)...)
		var c study.Candidate
		var cells []string
		for k := range rows {
			f.Family.At(&c, rows[k].Index)
			cells = memberCells(cells[:0], r, f, &c, &rows[k])
			table.row(cells...)
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
func memberCells(cells []string, r *paths.Result, f *paths.FamilyResult, c *study.Candidate, m *paths.Row) []string {
	cells = append(cells, strconv.FormatInt(m.Index, 10))
	for i, x := range c.Values {
		_, zero, size := usualUnit(&f.Family.Values[i])
		cells = append(cells, cell((x-zero)/size))
	}
	life := math.NaN()
	if m.Verdict != paths.Barred {
		life = c.History.Eruption()
	}
	cells = append(cells, m.Verdict.String(), cell(m.Tail), cell(m.Misfit), cell(m.Shift), openEnd(m.Shift95[0]), openEnd(m.Shift95[1]), cell(life/thermal.Year))
	for _, t := range r.Study.Thresholds {
		above := math.NaN()
		if m.Verdict != paths.Barred {
			above = c.History.TimeAbove(t.Temp)
		}
		cells = append(cells, cell(above/thermal.Year))
	}
	for i := range f.Elements {
		standIn := math.NaN()
		if i < len(m.StandIn) && m.StandIn[i] > 0 {
			standIn = m.StandIn[i] - thermal.ZeroCelsius
		}
		cells = append(cells, cell(standIn))
	}
	return cells
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
