package members

import (
	"fmt"
	"io"
	"math"
)

// Kind says what the cells of a column hold.
type Kind int

// The kinds of column. A Number that is infinite or NaN is an empty cell.
const (
	Number Kind = iota
	Count
	Text
)

// Column is a column of a table. Names must differ.
type Column struct {
	Name string
	Kind Kind
}

// Cell is what stands in one row of a column; only the field of the column's kind counts.
type Cell struct {
	Number float64
	Count  int64
	Text   string
}

// Format is how a table is written.
type Format func(w io.Writer, columns []Column) Table

// Table is a table that is being written.
type Table interface {
	// Row writes a row, of which it keeps nothing. It panics if the row does not have a
	// cell for each column. Errors may come with a later row, or from End.
	Row(cells []Cell) error
	End() error // after the last row
}

// empty reports whether a number stands for none.
func empty(x float64) bool { return math.IsInf(x, 0) || math.IsNaN(x) }

func checkRow(cells []Cell, columns []Column) {
	if len(cells) != len(columns) {
		panic(fmt.Sprintf("members: a row of %d cells in a table of %d columns", len(cells), len(columns)))
	}
}
