package main

import (
	"context"
	"fmt"
	"io"
	"math"
	"slices"

	"bankfire/cmd/bankfire/internal/members"
	"bankfire/cmd/bankfire/internal/results"
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
	case inCrystals(v):
		return "um", 0, 1e-6
	}
	return siUnit(v), 0, 1
}

// inCrystals reports whether the value is a length such as crystals have.
func inCrystals(v *study.Value) bool {
	_, most, ok := v.Ends()
	if v.Kind == study.Normal {
		most, ok = v.Mean, true
	}
	return ok && !v.Plain() && v.Dim() == thermal.Length && most < oneMillimetre
}

// memberFiles are the tables of the members of each family whose rows the parts keep.
func memberFiles(ctx context.Context, r *paths.Result, from *parts) []results.File {
	var files []results.File
	for i := range r.Families {
		name := "members"
		if len(r.Families) > 1 {
			name = fmt.Sprintf("members-%d", i+1)
		}
		for _, form := range []struct {
			suffix string
			format members.Format
		}{{".csv", members.CSV}, {".parquet", members.Parquet}} {
			files = append(files, results.File{Name: name + form.suffix, Write: func(w io.Writer) error {
				return writeMembers(ctx, form.format(w, memberColumns(r, &r.Families[i])), r, i, from)
			}})
		}
	}
	return files
}

// writeMembers writes the rows of family i.
func writeMembers(ctx context.Context, table members.Table, r *paths.Result, i int, from *parts) error {
	f := &r.Families[i]
	var c study.Candidate
	var cells []members.Cell
	err := from.rows(ctx, i, func(row *paths.Row) error {
		f.Family.At(&c, row.Index)
		cells = memberCells(cells[:0], r, f, &c, row)
		return table.Row(cells)
	})
	if err != nil {
		return err
	}
	return table.End()
}

// memberColumns are the columns of the tables of members of a family. A value that has the
// name of another column is called "value NAME".
func memberColumns(r *paths.Result, f *paths.FamilyResult) []members.Column {
	after := []members.Column{{Name: "verdict", Kind: members.Text}, {Name: "tail"}, {Name: "misfit"}, {Name: "shift_factor"},
		{Name: "shift_95_low"}, {Name: "shift_95_high"}, {Name: "life [yr]"}}
	for _, t := range r.Study.Thresholds {
		after = append(after, members.Column{Name: "above " + t.Name + " [yr]"})
	}
	for _, e := range f.Elements {
		after = append(after, members.Column{Name: e.Element.Name + " in " + e.Crystal.Name + ": stand-in temperature [C]"})
	}
	columns := []members.Column{{Name: "member", Kind: members.Count}}
	for k := range f.Family.Values {
		v := &f.Family.Values[k]
		name := v.Name
		if unit, _, _ := usualUnit(v); unit != "" {
			name += " [" + unit + "]"
		}
		if name == columns[0].Name || slices.ContainsFunc(after, func(c members.Column) bool { return c.Name == name }) {
			name = "value " + name
		}
		columns = append(columns, members.Column{Name: name})
	}
	return append(columns, after...)
}

// memberCells appends the cells of a member. Stand-in temperatures are those of members
// that reproduce.
func memberCells(cells []members.Cell, r *paths.Result, f *paths.FamilyResult, c *study.Candidate, m *paths.Row) []members.Cell {
	number := func(x float64) { cells = append(cells, members.Cell{Number: x}) }
	cells = append(cells, members.Cell{Count: m.Index})
	for i, x := range c.Values {
		_, zero, size := usualUnit(&f.Family.Values[i])
		number((x - zero) / size)
	}
	cells = append(cells, members.Cell{Text: m.Verdict.String()})
	number(m.Tail)
	number(m.Misfit)
	number(m.Shift)
	number(aboveZero(m.Shift95[0]))
	number(aboveZero(m.Shift95[1]))
	life := math.NaN()
	if m.Verdict != paths.Barred {
		life = c.History.Eruption()
	}
	number(life / thermal.Year)
	for _, t := range r.Study.Thresholds {
		above := math.NaN()
		if m.Verdict != paths.Barred {
			above = c.History.TimeAbove(t.Temp)
		}
		number(above / thermal.Year)
	}
	for i := range f.Elements {
		standIn := math.NaN()
		if i < len(m.StandIn) {
			standIn = aboveZero(m.StandIn[i]) - thermal.ZeroCelsius
		}
		number(standIn)
	}
	return cells
}

// aboveZero is x, NaN if it is not above 0.
func aboveZero(x float64) float64 {
	if x > 0 {
		return x
	}
	return math.NaN()
}
