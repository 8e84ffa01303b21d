package paths

import (
	"crypto/sha256"
	"encoding/binary"
	"os"
	"strconv"
	"testing"
)

// The cases that the record must hold.
var recorded = []string{
	"plain errors", "Gaussian priors", "free plateaux", "overlapping spots", "overlapping spots with counting errors",
	"tilt range", "free edges", "below detection", "core at the limit of detection", "upper limit", "lower limit",
	"errors halved", "errors doubled", "one outlier", "wrong plateau", "wrong rim",
}

// The record keeps the judge's promise in every case, over all its rows.
func TestRecordKeepsThePromise(t *testing.T) {
	right, of := map[string]int{}, map[string]int{}
	for _, row := range oldRows() {
		n, err := strconv.Atoi(row[4])
		if err != nil {
			t.Fatal(err)
		}
		k, err := strconv.Atoi(row[5])
		if err != nil {
			t.Fatal(err)
		}
		right[row[1]] += k
		of[row[1]] += n
	}
	for _, name := range recorded {
		if of[name] != blocks*blockSize {
			t.Errorf("%s: %d simulations recorded, want %d", name, of[name], blocks*blockSize)
		}
	}
	for _, c := range allCases() {
		if of[c.name] > 0 {
			t.Run(c.name, func(t *testing.T) { c.check(t, right[c.name], of[c.name]) })
		}
	}
}

// replayed is how many rows of the record are run again.
const replayed = 3

// Rows of the record that its own content chooses come out again.
func TestRecordReplays(t *testing.T) {
	if underRace {
		t.Skip("simulates for a minute")
	}
	content, err := os.ReadFile(record)
	if err != nil {
		t.Fatal(err)
	}
	rows := oldRows()
	if len(rows) < replayed {
		t.Fatalf("%d rows in %s", len(rows), record)
	}
	hash := sha256.Sum256(content)
	for k := range replayed {
		row := rows[binary.BigEndian.Uint64(hash[8*k:])%uint64(len(rows))]
		t.Run(row[1]+" "+row[3], func(t *testing.T) {
			index, err := strconv.Atoi(row[3])
			if err != nil {
				t.Fatal(err)
			}
			for _, c := range allCases() {
				if c.name != row[1] {
					continue
				}
				got := c.run(t, index)
				got.commit = row[0]
				for i, cell := range got.row() {
					if cell != row[i] {
						t.Errorf("%s: got %s, the record says %s", columns[i], cell, row[i])
					}
				}
				return
			}
			t.Errorf("no case of this name")
		})
	}
}
