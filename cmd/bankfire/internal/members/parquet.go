package members

import (
	"io"

	"github.com/parquet-go/parquet-go"
	"github.com/parquet-go/parquet-go/compress/zstd"
)

// parquetTable writes Parquet.
type parquetTable struct {
	columns []Column
	out     *parquet.GenericWriter[any]
	rows    []parquet.Row // that wait to be written
}

// How many rows stand together, how many are handed over at a time, and how many bytes of
// a column are compressed at once. All show in the bytes, and more of the last in the memory.
const (
	groupRows = 1 << 16
	batchRows = 1 << 9
	pageBytes = 1 << 16
)

// Parquet is one table of optional columns, in groups of 65536 rows, with numbers in
// full and compressed with Zstandard.
func Parquet(w io.Writer, columns []Column) Table {
	return &parquetTable{columns: columns, out: parquet.NewGenericWriter[any](w,
		parquet.NewSchema("members", newSchema(columns)),
		parquet.Compression(&zstd.Codec{Level: zstd.SpeedFastest}),
		parquet.MaxRowsPerRowGroup(groupRows),
		parquet.PageBufferSize(pageBytes),
		parquet.CreatedBy("bankfire", "1", "1"),
	)}
}

// schema is a group whose columns stand in their own order, not in that of the alphabet.
type schema struct {
	parquet.Group
	order []parquet.Field
}

func (s schema) Fields() []parquet.Field { return s.order }

func newSchema(columns []Column) schema {
	s := schema{Group: parquet.Group{}}
	for _, c := range columns {
		s.Group[c.Name] = parquet.Optional(node(c.Kind))
	}
	byName := map[string]parquet.Field{}
	for _, f := range s.Group.Fields() {
		byName[f.Name()] = f
	}
	for _, c := range columns {
		s.order = append(s.order, byName[c.Name])
	}
	return s
}

func node(kind Kind) parquet.Node {
	switch kind {
	case Text:
		return parquet.Encoded(parquet.String(), &parquet.RLEDictionary)
	case Count:
		return parquet.Int(64)
	}
	return parquet.Leaf(parquet.DoubleType)
}

func (t *parquetTable) Row(cells []Cell) error {
	checkRow(cells, t.columns)
	n := len(t.rows)
	if n < cap(t.rows) {
		t.rows = t.rows[:n+1]
	} else {
		t.rows = append(t.rows, nil)
	}
	row := t.rows[n][:0]
	for i, c := range t.columns {
		row = append(row, value(c.Kind, &cells[i], i))
	}
	t.rows[n] = row
	if len(t.rows) < batchRows {
		return nil
	}
	return t.flush()
}

func value(kind Kind, c *Cell, column int) parquet.Value {
	switch {
	case kind == Text:
		return parquet.ByteArrayValue([]byte(c.Text)).Level(0, 1, column)
	case kind == Count:
		return parquet.Int64Value(c.Count).Level(0, 1, column)
	case empty(c.Number):
		return parquet.NullValue().Level(0, 0, column)
	}
	return parquet.DoubleValue(c.Number).Level(0, 1, column)
}

func (t *parquetTable) flush() error {
	_, err := t.out.WriteRows(t.rows)
	t.rows = t.rows[:0]
	return err
}

func (t *parquetTable) End() error {
	if err := t.flush(); err != nil {
		return err
	}
	return t.out.Close()
}
