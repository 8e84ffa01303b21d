package traverse

import (
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"bankfire/thermal"
)

// Column names a column to be read and what it holds.
type Column struct {
	// Header is the header of the column, "t [yr]". The unit in brackets may
	// stand in the file, here, or in both if they agree; it must stand
	// somewhere. Round brackets serve where they hold a unit of Dim: "t (yr)".
	// Blanks count as one. Concentrations named Fo, An, XFo or XAn in % or
	// mol% are in the units Fo and An.
	Header string
	Dim    thermal.Dimension
}

// Table is a set of columns read from a text table.
type Table struct {
	Columns [][]float64 // as asked for, all of one length, at least 1; SI, but concentrations stay in their unit
	Units   []string    // of each column in the file, in their usual spelling
	Line    []int       // of each row in the file, from 1
	Notes   []string    // what was not taken exactly as typed
}

// ReadColumns reads the wanted columns of a text table with a header. name
// stands for the file in errors and notes.
//
// Cells are separated by tabs, semicolons or commas: by the one under which
// the header holds all wanted columns. Blank lines, rows without any content
// and lines that begin with # are skipped. Read and noted are UTF-8 with a
// byte-order mark, UTF-16 with one, Windows-1252, line ends of Windows, and
// decimal commas between semicolons or tabs. Everything else that is no finite
// decimal number is refused, as are ragged rows, decimal commas that may mean
// thousands, temperatures not above absolute zero, concentrations beyond the
// whole, and files of more than [MaxBytes].
//
// The error is a *thermal.InputError with the place, or up to 20 of them
// joined; the table is then nil. ReadColumns panics if no column is wanted.
func ReadColumns(name string, r io.Reader, columns []Column) (*Table, error) {
	if len(columns) == 0 {
		panic("traverse: no column to read")
	}
	s, err := openSheet(name, r, columns)
	if err != nil {
		return nil, err
	}
	t := &Table{Columns: make([][]float64, len(columns))}
	for s.next() {
		for k := range columns {
			if v, ok := s.quantity(k); ok {
				t.Columns[k] = append(t.Columns[k], v)
			}
		}
		t.Line = append(t.Line, s.line)
	}
	if err := s.finish(); err != nil {
		return nil, err
	}
	if len(t.Line) == 0 {
		return nil, s.noRows()
	}
	for _, b := range s.columns {
		t.Units = append(t.Units, b.unit)
	}
	t.Notes = s.notes
	return t, nil
}

// quantity reads the current row's cell of the k-th wanted column in SI, and
// refuses what cannot be.
func (s *sheet) quantity(k int) (float64, bool) {
	v, ok := s.number(k)
	if !ok {
		return 0, false
	}
	b := s.columns[k]
	v = float64(v*b.scale) + b.offset
	switch {
	case !finite(v):
		s.refuse(k, "too large for a number", "check the exponent and the unit")
	case b.dim == thermal.Temperature && v < coldest:
		s.refuse(k, "not above absolute zero", "check the sign and the unit")
	case b.dim == thermal.Concentration && b.unit != ofValue && math.Abs(v) > tooMuch*Whole(b.unit):
		s.refuse(k, fmt.Sprintf("more than the whole, which is %g %s", Whole(b.unit), b.unit), "check the number and the unit")
	default:
		return v, true
	}
	return 0, false
}

// coldest is above what rounding leaves of absolute zero in another unit, K.
const coldest = 1e-9

// tooMuch times the whole is more than an analysis can come to by its own
// error, so the number or its unit is wrong.
const tooMuch = 1.5

// Whole returns how much of a unit of concentration, in its usual spelling, is
// everything: 100 of wt%, and of grey levels more than any detector counts.
func Whole(unit string) float64 {
	if ppm, ok := thermal.ConcentrationFactor("ppm", unit); ok {
		return 1e6 * ppm
	}
	switch unit {
	case "%", "mol%", "Fo", "An":
		return 100
	case Grey:
		return 1e9
	}
	return 1
}

// Grey is the usual spelling of the unit of relative values: grey levels, counts.
const Grey = "grey"

func finite(x float64) bool { return x-x == 0 }

func (s *sheet) noRows() error {
	return &thermal.InputError{File: s.name, Problem: "no rows below the header", Remedy: "want at least one"}
}

// Dim of columns that are no quantities.
const (
	flagColumn  thermal.Dimension = -1 - iota // words
	countColumn                               // numbers without a unit
	errorColumn                               // a concentration, or per cent of another
)

// bound is a wanted column found in the header.
type bound struct {
	index         int    // of its cells
	title         string // as the file has it
	dim           thermal.Dimension
	unit          string  // in its usual spelling
	scale, offset float64 // SI = scale x + offset
}

// find looks for a wanted column in the header: by its full text, else by its
// name without the unit.
func (s *sheet) find(w Column) (bound, *thermal.InputError) {
	same := func(c cell) bool { return squeeze(c.text) == squeeze(w.Header) }
	name, _ := SplitHeader(w.Header, w.Dim)
	sameName := func(c cell) bool { n, _ := SplitHeader(c.text, w.Dim); return n == name }
	for _, match := range []func(cell) bool{same, sameName} {
		var found []int
		for i, c := range s.header {
			if match(c) {
				found = append(found, i)
			}
		}
		if len(found) > 1 {
			return bound{}, s.errorAt(s.header[found[1]].at, "column", w.Header, "there are two of this name",
				"name it with its unit, or rename one of them")
		}
		if len(found) == 1 {
			return s.bind(w, found[0])
		}
	}
	return bound{}, s.errorAt(0, "column", w.Header, "not in the header", s.missingRemedy())
}

func (s *sheet) missingRemedy() string {
	const most = 12
	var titles []string
	for _, c := range s.header[:min(len(s.header), most)] {
		titles = append(titles, fmt.Sprintf("%q", thermal.Shorten(c.text)))
	}
	if len(s.header) > most {
		titles = append(titles, "...")
	}
	remedy := "the columns are " + strings.Join(titles, ", ")
	if len(s.comments) > 0 {
		remedy += "; lines that begin with # are comments, a header must not"
	}
	return remedy
}

// bind settles the unit of a wanted column found at an index of the header.
func (s *sheet) bind(w Column, index int) (bound, *thermal.InputError) {
	c := s.header[index]
	b := bound{index: index, title: c.text, dim: w.Dim}
	switch w.Dim {
	case flagColumn:
		return b, nil
	case countColumn:
		b.scale = 1
		return b, nil
	case errorColumn:
		b.dim = thermal.Concentration
	}
	refuse := func(problem, remedy string) (bound, *thermal.InputError) {
		return b, s.errorAt(c.at, "column", c.text, problem, remedy)
	}
	name, asked := SplitHeader(w.Header, w.Dim)
	_, typed := SplitHeader(c.text, w.Dim)
	if typed == "" {
		typed = asked
	}
	if typed == "" {
		return refuse("no unit", fmt.Sprintf("write, for example, %q", fmt.Sprintf("%s [%s]", c.text, thermal.UsualUnit(b.dim))))
	}
	if w.Dim == errorColumn && usualUnit(typed, w.Dim) == ofValue {
		b.unit, b.scale = ofValue, 1
	} else if problem, remedy := b.setUnit(typed); problem != "" {
		return refuse(problem, remedy)
	}
	if usual := usualUnit(asked, w.Dim); asked != "" && usual != b.unit {
		return refuse(fmt.Sprintf("its unit is %s, but the column asked for is in %s", b.unit, asked), "write the same unit in both places")
	}
	if of := component(name); of != "" && (b.unit == "%" || b.unit == "mol%") && w.Dim == thermal.Concentration {
		b.unit = of
	}
	return b, nil
}

// component is the unit of a column of that name in per cent: Fo or An, which
// count moles; "" for every other name.
func component(name string) string {
	switch name = strings.TrimPrefix(name, "X"); name {
	case "Fo", "An":
		return name
	}
	return ""
}

// ofValue is the unit of an error column in per cent of each value. Plain "%"
// says the same where nothing else can be meant.
const ofValue = "% of value"

// usualUnit is the usual spelling of a column's unit, "" if it has none.
func usualUnit(name string, dim thermal.Dimension) string {
	switch dim {
	case flagColumn, countColumn:
		return ""
	case errorColumn:
		switch name {
		case ofValue, "rel%", "rel %", "rel. %", "% rel", "% rel.", "%RSD", "% RSD":
			return ofValue
		}
		dim = thermal.Concentration
	}
	usual, _ := thermal.UnitName(name, dim)
	return usual
}

// setUnit looks a unit up, or says what is wrong with it. Concentrations stay
// in the unit in which they were measured.
func (b *bound) setUnit(typed string) (problem, remedy string) {
	var ok bool
	if b.scale, b.offset, ok = thermal.Unit(typed, b.dim); !ok {
		return unitProblem(typed, b.dim)
	}
	b.unit, _ = thermal.UnitName(typed, b.dim)
	if b.dim == thermal.Concentration {
		b.scale = 1
	}
	return "", ""
}

// unitProblem says why a text is no unit.
func unitProblem(typed string, dim thermal.Dimension) (problem, remedy string) {
	_, err := thermal.ParseQuantity("1 "+typed, dim)
	var input *thermal.InputError
	if errors.As(err, &input) {
		return input.Problem, input.Remedy
	}
	return "unknown unit " + strconv.Quote(typed), "want one of " + strings.Join(thermal.UnitNames(dim), ", ")
}

// SplitHeader splits a header "distance [um]" into name and unit. So it does
// "distance (um)" if the round brackets hold a unit of dim; else they belong to
// the name, as in "Ti (rim)".
func SplitHeader(header string, dim thermal.Dimension) (name, unit string) {
	header = squeeze(header)
	for _, brackets := range []string{"[]", "()"} {
		open := strings.LastIndexByte(header, brackets[0])
		if open < 0 || header[len(header)-1] != brackets[1] {
			continue
		}
		name, unit = strings.TrimSpace(header[:open]), strings.TrimSpace(header[open+1:len(header)-1])
		if brackets == "[]" || usualUnit(unit, dim) != "" {
			return name, unit
		}
	}
	return header, ""
}

// squeeze leaves single blanks between the words of a text.
func squeeze(text string) string { return strings.Join(strings.Fields(text), " ") }
