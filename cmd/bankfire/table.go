package main

import (
	"bytes"
	"fmt"
	"io"
	"strings"
	"text/tabwriter"
)

// table aligns columns of text for people.
type table struct {
	text    bytes.Buffer
	aligned *tabwriter.Writer
}

func newTable() *table { return spacedTable(3) }

// spacedTable is newTable with so many blanks between columns.
func spacedTable(blanks int) *table {
	t := new(table)
	t.aligned = tabwriter.NewWriter(&t.text, 0, 0, blanks, ' ', 0)
	return t
}

func (t *table) row(cells ...string) { fmt.Fprintln(t.aligned, strings.Join(cells, "\t")) }

// writeTo writes the table, without blanks at the ends of its lines.
func (t *table) writeTo(w io.Writer) {
	t.aligned.Flush()
	for line := range strings.Lines(t.text.String()) {
		fmt.Fprintln(w, strings.TrimRight(line, " \n"))
	}
}
