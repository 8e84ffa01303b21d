package study

import (
	"errors"
	"fmt"
	"slices"

	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// rows reads the file of a table leg: temperature against time.
func (d *decoder) rows(n *node) *thermal.Rows {
	time, ok1 := d.text(n.get("time"), `name the column of times, such as "t [yr]"`)
	temp, ok2 := d.text(n.get("temperature"), `name the column of temperatures, such as "T [C]"`)
	before, ok3 := d.counts(n.get("counts"))
	if !ok1 || !ok2 || !ok3 {
		return nil
	}
	file := n.get("table")
	t, label := d.columns(file, traverse.Column{Header: time, Dim: thermal.Duration}, traverse.Column{Header: temp, Dim: thermal.Temperature})
	if t == nil {
		return nil
	}
	for i, x := range t.Columns[1] {
		if !(x > 0 && x <= temperature.top) {
			d.row(label, t.Line[i], temp, fmt.Sprintf("%.6g C is no temperature of a rock", x-thermal.ZeroCelsius), "check the unit")
			return nil
		}
	}
	rows, err := thermal.TableFrom(t.Columns[0], t.Columns[1], before)
	var in *thermal.InputError
	switch {
	case errors.As(err, &in):
		at := thermal.Place{File: label, Field: time}
		if in.Line > 0 {
			at.Line = t.Line[in.Line-1]
		}
		d.add(in.At(at))
	case err != nil:
		d.reportError(file, err)
	}
	return rows
}

// columns reads two columns of the file named at n, nil if that fails.
func (d *decoder) columns(n *node, want ...traverse.Column) (*traverse.Table, string) {
	label, r, ok := d.dataFile(n)
	if !ok {
		return nil, ""
	}
	t, err := traverse.ReadColumns(label, r, want)
	if err != nil {
		d.reportError(n, err)
		return nil, ""
	}
	d.notes = append(d.notes, d.named(n, label, t.Notes)...)
	return t, label
}

// row reports a problem on a line of a data file.
func (d *decoder) row(label string, line int, field, problem, remedy string) {
	d.add(thermal.Place{File: label, Line: line, Field: field}.Error("", problem, remedy))
}

// counts reads how the times of a file count.
func (d *decoder) counts(n *node) (beforeEruption, ok bool) {
	const remedy = `write "after start" (the default) or "before eruption"`
	if n == nil {
		return false, true
	}
	text, ok := d.text(n, remedy)
	switch {
	case !ok:
	case text == "before eruption":
		return true, true
	case text == "after start":
		return false, true
	default:
		d.reportWord(n, "no way to count times", []string{"after start", "before eruption"}, remedy)
	}
	return false, false
}

// series reads the file of a rim that is given: value against time.
func (d *decoder) series(n *node, u *units) *Series {
	const remedyTime, remedyValue = `name the column of times, such as time = "t [yr]"`, `name the column of values, such as value = "Ti [ppm]"`
	time, ok1 := d.text(d.need(n, "time", remedyTime), remedyTime)
	value := d.valueColumn(n, remedyValue)
	before, ok2 := d.counts(n.get("counts"))
	if !ok1 || !ok2 || value == "" {
		return nil
	}
	file := n.get("given")
	t, label := d.columns(file, traverse.Column{Header: time, Dim: thermal.Duration}, traverse.Column{Header: value, Dim: thermal.Concentration})
	if t == nil {
		return nil
	}
	s := &Series{Time: t.Columns[0], Value: t.Columns[1], BeforeEruption: before, Place: d.place(file)}
	if d.checkSeries(s, t, label) {
		unit, _ := d.moles(n.get("value"), u, value, t.Units[1], s.Value, nil)
		d.seriesUnit(file, s.Value, u, unit)
	}
	return s
}

// byTemperature reads the file named at file: value against temperature.
func (d *decoder) byTemperature(n, file *node, u *units) *ByTemperature {
	const remedyTemp, remedyValue = `name the column of temperatures, such as temperature = "T [C]"`, `name the column of values, such as value = "Sr [ppm]"`
	temp, ok := d.text(d.need(n, "temperature", remedyTemp), remedyTemp)
	value := d.valueColumn(n, remedyValue)
	if !ok || value == "" {
		return nil
	}
	t, label := d.columns(file, traverse.Column{Header: temp, Dim: thermal.Temperature}, traverse.Column{Header: value, Dim: thermal.Concentration})
	if t == nil || !d.checkTemperatures(t, label) {
		return nil
	}
	b := &ByTemperature{Temp: t.Columns[0], Value: t.Columns[1], Place: d.place(file)}
	unit, _ := d.moles(n.get("value"), u, value, t.Units[1], b.Value, nil)
	d.seriesUnit(file, b.Value, u, unit)
	if b.Temp[0] > b.Temp[len(b.Temp)-1] {
		slices.Reverse(b.Temp)
		slices.Reverse(b.Value)
	}
	return b
}

// checkTemperatures checks the rows of a value against temperature, which may rise
// or fall.
func (d *decoder) checkTemperatures(t *traverse.Table, label string) bool {
	temp, value := t.Columns[0], t.Columns[1]
	for i, x := range temp {
		switch {
		case !(x > 0 && x <= temperature.top):
			d.row(label, t.Line[i], "temperature", fmt.Sprintf("%.6g C is no temperature of a rock", x-thermal.ZeroCelsius), "check the unit")
		case i > 0 && x == temp[i-1]:
			d.row(label, t.Line[i], "temperature", "the same temperature as in the row above", "keep one of them: a value cannot jump there")
		case i > 1 && (x > temp[i-1]) != (temp[1] > temp[0]):
			d.row(label, t.Line[i], "temperature", "not in order", "list rows in the order of temperature, rising or falling")
		case value[i] < 0:
			d.row(label, t.Line[i], "value", "below zero", "a value is zero or more")
		default:
			continue
		}
		return false
	}
	return true
}

// checkSeries turns the times of a series forward and checks its rows.
func (d *decoder) checkSeries(s *Series, t *traverse.Table, label string) bool {
	for i := range s.Time {
		if s.BeforeEruption {
			s.Time[i] = -s.Time[i]
		}
	}
	for i := range s.Time {
		switch {
		case i > 0 && s.Time[i] < s.Time[i-1]:
			d.row(label, t.Line[i], "time", "before the row above", "list rows in the order of time")
		case i > 1 && s.Time[i] == s.Time[i-2]:
			d.row(label, t.Line[i], "time", "the same time for the third time", "two rows of one time are a jump; keep two")
		case s.Value[i] < 0:
			d.row(label, t.Line[i], "value", "below zero", "a value is zero or more")
		default:
			continue
		}
		return false
	}
	return true
}

// seriesUnit converts the values of a file to the unit of the element.
func (d *decoder) seriesUnit(file *node, values []float64, u *units, unit string) {
	for i := range values {
		before := d.faults
		values[i] = d.inUnit(file, u, thermal.Uncertain{Value: values[i]}, unit).Value
		if d.faults > before {
			return // one report is enough
		}
	}
}
