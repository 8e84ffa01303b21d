package members

import (
	"encoding/csv"
	"io"
	"strconv"
)

// csvTable writes CSV as in RFC 4180.
type csvTable struct {
	columns []Column
	out     *csv.Writer
	words   []string
	digits  []byte
}

// CSV is UTF-8 in lines that end in CR LF, the first of them the columns' names. Numbers
// have six digits: fewer than two machines can disagree on.
func CSV(w io.Writer, columns []Column) Table {
	t := &csvTable{columns: columns, out: csv.NewWriter(w)}
	t.out.UseCRLF = true
	for _, c := range columns {
		t.words = append(t.words, c.Name)
	}
	t.out.Write(t.words) // End returns its error
	return t
}

func (t *csvTable) Row(cells []Cell) error {
	checkRow(cells, t.columns)
	t.words = t.words[:0]
	for i, c := range t.columns {
		t.words = append(t.words, t.word(c.Kind, &cells[i]))
	}
	return t.out.Write(t.words)
}

func (t *csvTable) word(kind Kind, c *Cell) string {
	switch {
	case kind == Text:
		return c.Text
	case kind == Count:
		return strconv.FormatInt(c.Count, 10)
	case empty(c.Number):
		return ""
	}
	t.digits = strconv.AppendFloat(t.digits[:0], c.Number, 'g', 6, 64)
	return string(t.digits)
}

func (t *csvTable) End() error {
	t.out.Flush()
	return t.out.Error()
}
