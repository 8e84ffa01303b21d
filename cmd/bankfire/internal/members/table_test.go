package members_test

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/parquet-go/parquet-go"

	"bankfire/cmd/bankfire/internal/members"
)

// columns are in no order of the alphabet, and have names as tables of members do.
var columns = []members.Column{
	{Name: "member", Kind: members.Count},
	{Name: "wait, in all [yr]", Kind: members.Number},
	{Name: "verdict", Kind: members.Text},
	{Name: "Ti in Q: stand-in temperature [C]", Kind: members.Number},
	{Name: "above 1.5 \"hot\"", Kind: members.Number},
}

// row makes row i of the trial table: numbers of all sizes, the odd ones among them.
func row(dst []members.Cell, i int64) []members.Cell {
	r := rand.New(rand.NewPCG(1, uint64(i)))
	odd := []float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, math.MaxFloat64, math.SmallestNonzeroFloat64, -1.5}
	x := math.Exp(20 * r.NormFloat64())
	return append(dst[:0],
		members.Cell{Count: i*1_000_003 - 7},
		members.Cell{Number: x},
		members.Cell{Text: []string{"reproduces", "too sharp", "barred", "at \"odds\", é"}[r.IntN(4)]},
		members.Cell{Number: odd[r.IntN(len(odd))]},
		members.Cell{Number: math.NaN()})
}

func write(t testing.TB, w io.Writer, format members.Format, rows int64) {
	t.Helper()
	table := format(w, columns)
	var cells []members.Cell
	for i := range rows {
		cells = row(cells, i)
		if err := table.Row(cells); err != nil {
			t.Fatal(err)
		}
	}
	if err := table.End(); err != nil {
		t.Fatal(err)
	}
}

// manyRows are more than a group and a batch of Parquet, and no multiple of either.
const manyRows = 1<<16 + 1000

// TestTogether reads both forms of one table with other programs' readers and compares
// them with each other and with what was written.
func TestTogether(t *testing.T) {
	for _, rows := range []int64{0, 1, manyRows} {
		t.Run(strconv.FormatInt(rows, 10), func(t *testing.T) {
			var text, binary bytes.Buffer
			write(t, &text, members.CSV, rows)
			write(t, &binary, members.Parquet, rows)
			lines, err := csv.NewReader(&text).ReadAll()
			if err != nil {
				t.Fatal(err)
			}
			table := readParquet(t, binary.Bytes())
			if len(table) != len(lines) || int64(len(table)) != rows+1 {
				t.Fatalf("%d lines of CSV, %d of Parquet, want %d", len(lines), len(table), rows+1)
			}
			var cells []members.Cell
			for i, line := range lines {
				if i == 0 {
					if !slices.Equal(line, table[0]) || line[1] != "wait, in all [yr]" {
						t.Fatalf("heads %q and %q", line, table[0])
					}
					continue
				}
				cells = row(cells, int64(i-1))
				checkLine(t, i, line, table[i], cells)
			}
		})
	}
}

// checkLine compares one row of both forms with what was written, Parquet to the bit and
// CSV to its six digits.
func checkLine(t *testing.T, i int, line, parquet []string, cells []members.Cell) {
	t.Helper()
	for k, c := range columns {
		want := map[members.Kind]string{members.Count: strconv.FormatInt(cells[k].Count, 10), members.Text: cells[k].Text}[c.Kind]
		short := want
		if x := cells[k].Number; c.Kind == members.Number && !math.IsNaN(x) && !math.IsInf(x, 0) {
			want, short = strconv.FormatFloat(x, 'g', -1, 64), fmt.Sprintf("%.6g", x)
		}
		if parquet[k] != want || line[k] != short {
			t.Fatalf("row %d, %s: CSV %q, Parquet %q; want %q and %q", i, c.Name, line[k], parquet[k], short, want)
		}
	}
}

// readParquet returns the names of the columns, then the rows; nulls are "".
func readParquet(t *testing.T, data []byte) [][]string {
	t.Helper()
	f, err := parquet.OpenFile(bytes.NewReader(data), int64(len(data)))
	if err != nil {
		t.Fatal(err)
	}
	var out [][]string
	out = append(out, nil)
	for _, path := range f.Schema().Columns() {
		out[0] = append(out[0], strings.Join(path, "/"))
	}
	for _, group := range f.RowGroups() {
		rows := group.Rows()
		defer rows.Close()
		for batch := make([]parquet.Row, 1000); ; {
			n, err := rows.ReadRows(batch)
			for _, r := range batch[:n] {
				out = append(out, words(r))
			}
			if err == io.EOF {
				break
			}
			if err != nil {
				t.Fatal(err)
			}
		}
	}
	return out
}

func words(r parquet.Row) []string {
	line := make([]string, len(r))
	for _, v := range r {
		switch {
		case v.IsNull():
		case v.Kind() == parquet.Double:
			line[v.Column()] = strconv.FormatFloat(v.Double(), 'g', -1, 64)
		case v.Kind() == parquet.Int64:
			line[v.Column()] = strconv.FormatInt(v.Int64(), 10)
		default:
			line[v.Column()] = string(v.ByteArray())
		}
	}
	return line
}

func TestSameBytes(t *testing.T) {
	for name, format := range formats {
		t.Run(name, func(t *testing.T) {
			var first, second bytes.Buffer
			write(t, &first, format, manyRows)
			runtime.GC() // which empties what the compressor keeps for the next table
			defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
			write(t, &second, format, manyRows)
			if !bytes.Equal(first.Bytes(), second.Bytes()) {
				t.Error("two tables of equal rows differ")
			}
		})
	}
}

var formats = map[string]members.Format{"csv": members.CSV, "parquet": members.Parquet}

// full is a writer that fails after some bytes.
type full struct{ left int }

var errFull = errors.New("trial disk full")

func (f *full) Write(data []byte) (int, error) {
	if f.left -= len(data); f.left < 0 {
		return 0, errFull
	}
	return len(data), nil
}

// TestDiskFull has the disk full at several places of the table.
func TestDiskFull(t *testing.T) {
	for name, format := range formats {
		t.Run(name, func(t *testing.T) {
			var whole bytes.Buffer
			write(t, &whole, format, manyRows)
			for _, left := range []int{0, 1, 100, whole.Len() / 3, whole.Len() / 2, whole.Len() - 1} {
				if err := writeUntil(format, &full{left}); !errors.Is(err, errFull) {
					t.Errorf("after %d of %d bytes: %v", left, whole.Len(), err)
				}
			}
			if err := writeUntil(format, &full{whole.Len()}); err != nil {
				t.Errorf("where there is room: %v", err)
			}
		})
	}
}

func writeUntil(format members.Format, w io.Writer) error {
	table := format(w, columns)
	var cells []members.Cell
	for i := range int64(manyRows) {
		cells = row(cells, i)
		if err := table.Row(cells); err != nil {
			return err
		}
	}
	return table.End()
}

func TestRowPanics(t *testing.T) {
	for name, format := range formats {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if r := recover(); r != "members: a row of 1 cells in a table of 5 columns" {
					t.Errorf("got %v", r)
				}
			}()
			format(io.Discard, columns).Row(make([]members.Cell, 1))
		})
	}
}

func BenchmarkRow(b *testing.B) {
	for name, format := range formats {
		b.Run("format="+name, func(b *testing.B) {
			table := format(io.Discard, columns)
			cells := row(nil, 5)
			b.ReportAllocs()
			for b.Loop() {
				cells[0].Count++
				cells[1].Number *= 1.0000001
				if err := table.Row(cells); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func ExampleCSV() {
	var text strings.Builder
	table := members.CSV(&text, []members.Column{{Name: "member", Kind: members.Count}, {Name: "wait [yr]"}})
	err := table.Row([]members.Cell{{Count: 17}, {Number: 12.5}})
	fmt.Printf("%v %q", errors.Join(err, table.End()), text.String())
	// Output: <nil> "member,wait [yr]\r\n17,12.5\r\n"
}
