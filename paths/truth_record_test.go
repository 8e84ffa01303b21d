package paths

import (
	"crypto/sha256"
	"encoding/binary"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// The record holds every case in full, with the seed that it has here and what
// was simulated, and the judge keeps its promise over all rows of each.
func TestRecordKeepsThePromise(t *testing.T) {
	rows := readRecord(t)
	for _, row := range rows {
		if !slices.ContainsFunc(allCases(), func(c truthCase) bool { return c.name == row[1] }) {
			t.Errorf("row %v is of no case", row)
		}
	}
	for _, c := range allCases() {
		t.Run(c.name, func(t *testing.T) {
			var seen [blocks]bool
			all := 0
			for _, row := range rows {
				if row[1] != c.name {
					continue
				}
				index, right := number(t, row[3]), number(t, row[5])
				if row[2] != strconv.FormatUint(c.seed, 10) || row[4] != strconv.Itoa(blockSize) || index >= blocks || seen[index] || right > blockSize {
					t.Fatalf("row %v is not one of this case, or there twice", row)
				}
				seen[index] = true
				all += right
			}
			if slices.Contains(seen[:], false) {
				t.Fatal("blocks are missing")
			}
			c.check(t, all, blocks*blockSize)
		})
	}
}

// replayed is how many rows of the record are run again.
const replayed = 3

// Rows of the record that its own content chooses come out again.
func TestRecordReplays(t *testing.T) {
	if underRace {
		t.Skip("a long simulation; TestWeighSameBitsWhateverTheJobs runs the same side by side")
	}
	rows := readRecord(t)
	content, err := os.ReadFile(record)
	if err != nil {
		t.Fatal(err)
	}
	for _, k := range chosen(content, len(rows)) {
		row := rows[k]
		t.Run(row[1]+" "+row[3], func(t *testing.T) {
			cases := allCases()
			i := slices.IndexFunc(cases, func(c truthCase) bool { return c.name == row[1] })
			if i < 0 {
				t.Fatal("no such case")
			}
			got := cases[i].run(t, number(t, row[3]))
			got.commit = row[0]
			if !slices.Equal(got.row(), row) {
				t.Errorf("got %v, the record says %v; if results were meant to change, run this case in full again with -long", got.row(), row)
			}
		})
	}
}

// chosen picks different rows by a hash of the record.
func chosen(content []byte, rows int) []int {
	var list []int
	for hash := sha256.Sum256(content); len(list) < replayed; hash = sha256.Sum256(hash[:]) {
		if k := int(binary.BigEndian.Uint64(hash[:]) % uint64(rows)); !slices.Contains(list, k) {
			list = append(list, k)
		}
	}
	return list
}

// readRecord returns the rows, whose comments and columns must be those that
// -long writes.
func readRecord(t *testing.T) [][]string {
	t.Helper()
	content, err := os.ReadFile(record)
	if err != nil {
		t.Fatal(err)
	}
	if head := preamble() + strings.Join(columns, ",") + "\n"; !strings.HasPrefix(string(content), head) {
		t.Errorf("%s does not begin with what its cases are, want\n%s", record, head)
	}
	rows := oldRows()
	if len(rows) < replayed {
		t.Fatalf("%d rows in %s", len(rows), record)
	}
	return rows
}

func number(t *testing.T, cell string) int {
	t.Helper()
	n, err := strconv.Atoi(cell)
	if err != nil || n < 0 {
		t.Fatalf("%q is no count", cell)
	}
	return n
}
