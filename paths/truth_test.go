package paths

import (
	"bytes"
	"context"
	"encoding/csv"
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
)

var long = flag.Bool("long", false, "run the simulations of TestTruth in full and write them to testdata/records")

// The record of the simulations: a row a block, so that a few rows can be run
// again in a moment.
const (
	record    = "../testdata/records/judge.csv"
	blocks    = 80 // a case
	blockSize = 25 // simulations
)

// block is one row of the record.
type block struct {
	commit, name string
	seed         uint64
	index        int
	right        int    // simulations in which the judge was right
	misfit       string // mean chi-square of the path, to three digits
}

var columns = []string{"commit", "case", "seed", "block", "simulations", "right", "mean_misfit"}

func (b *block) row() []string {
	return []string{b.commit, b.name, strconv.FormatUint(b.seed, 10), strconv.Itoa(b.index),
		strconv.Itoa(blockSize), strconv.Itoa(b.right), b.misfit}
}

// run simulates block index of a case.
func (c *truthCase) run(t *testing.T, index int) block {
	t.Helper()
	var right [blockSize]bool
	var misfit [blockSize]float64
	var errs [blockSize]error
	var team sync.WaitGroup
	next := make(chan int)
	for range 2 {
		team.Go(func() {
			for i := range next {
				sim := c.draw(rand.New(rand.NewPCG(c.seed, uint64(index*blockSize+i))))
				r, err := Weigh(context.Background(), sim.study, 1)
				if errs[i] = err; err == nil {
					right[i], misfit[i] = sim.right(r), r.Paths[0].Outcome.Misfit
				}
			}
		})
	}
	for i := range blockSize {
		next <- i
	}
	close(next)
	team.Wait()
	if err := firstErrors(errs[:]); err != nil {
		t.Fatal(err)
	}
	out := block{name: c.name, seed: c.seed, index: index}
	sum := 0.0
	for i := range blockSize {
		sum += misfit[i]
		if right[i] {
			out.right++
		}
	}
	out.misfit = fmt.Sprintf("%.3g", sum/blockSize)
	return out
}

func allCases() []truthCase { return slices.Concat(truthCases(), faultCases()) }

// The judge against truth, and against planted faults: see [truthCases] and
// [faultCases]. With -long all simulations are run and recorded, of one case or
// more if -run names them.
func TestTruth(t *testing.T) {
	if !*long {
		t.Skip("run in full with -long")
	}
	recordTruth(t)
}

// check holds the judge to its promise.
func (c *truthCase) check(t *testing.T, right, of int) {
	t.Helper()
	rate := float64(right) / float64(of)
	const deviations = 3.3
	slack := deviations * math.Sqrt(c.confidence()*(1-c.confidence())/float64(of))
	lo, hi := c.confidence()-slack, c.confidence()+slack
	switch c.promise {
	case atLeast:
		hi = 1
	case mostly:
		lo, hi = 0.9, 1
	}
	t.Logf("%d of %d, %.2f %%; wanted %.2f to %.2f %%", right, of, 100*rate, 100*lo, 100*hi)
	if !(rate >= lo && rate <= hi) {
		t.Errorf("right in %d of %d, %.2f %%, want %.2f to %.2f %%", right, of, 100*rate, 100*lo, 100*hi)
	}
}

// confidence is that of the studies of the case.
func (c *truthCase) confidence() float64 {
	return c.draw(rand.New(rand.NewPCG(c.seed, 0))).study.Confidence
}

// preamble are the comments at the head of the record.
func preamble() string {
	var s strings.Builder
	fmt.Fprintf(&s, "# How often the judge is right about simulated traverses. Written by go test ./paths -run TestTruth -long\n"+
		"# (-run 'TestTruth/^CASE$' for one). Simulation i of a case, %d a block, depends on seed and i alone.\n"+
		"# Right is the verdict reproduces, unless the case says otherwise; of a planted fault, its name.\n", blockSize)
	for _, c := range allCases() {
		fmt.Fprintf(&s, "# %s, %s: %s\n", c.name, c.promise, c.what)
	}
	return s.String()
}

// recordTruth runs cases in full and writes each, when it is done, into the
// record beside what is there of the others.
func recordTruth(t *testing.T) {
	commit := cleanCommit(t)
	kept := map[string][][]string{}
	for _, row := range oldRows() {
		kept[row[1]] = append(kept[row[1]], row)
	}
	for _, c := range allCases() {
		t.Run(c.name, func(t *testing.T) {
			var rows [][]string
			right := 0
			for i := range blocks {
				b := c.run(t, i)
				b.commit = commit
				right += b.right
				rows = append(rows, b.row())
			}
			c.check(t, right, blocks*blockSize)
			kept[c.name] = rows
			writeRecord(t, kept)
		})
	}
}

// writeRecord writes the rows of each case.
func writeRecord(t *testing.T, rows map[string][][]string) {
	t.Helper()
	out := bytes.NewBufferString(preamble())
	w := csv.NewWriter(out)
	w.Write(columns)
	for _, c := range allCases() {
		w.WriteAll(rows[c.name])
	}
	w.Flush()
	if err := os.WriteFile(record, out.Bytes(), 0o666); err != nil {
		t.Fatal(err)
	}
}

// oldRows returns the rows of the record, none if there is none yet.
func oldRows() [][]string {
	content, _ := os.ReadFile(record)
	r := csv.NewReader(bytes.NewReader(content))
	r.Comment = '#'
	rows, _ := r.ReadAll()
	return rows[min(1, len(rows)):]
}

// cleanCommit returns the commit that the record rests on. It fails the test
// where the code is not that of the commit.
func cleanCommit(t *testing.T) string {
	t.Helper()
	changed, err := exec.Command("git", "status", "--porcelain", "--", "..", ":!../testdata/records").Output()
	if err != nil || len(changed) > 0 {
		t.Fatalf("commit first, so that the record can say what it rests on: %v\n%s", err, changed)
	}
	hash, err := exec.Command("git", "rev-parse", "--short=12", "HEAD").Output()
	if err != nil {
		t.Fatal(err)
	}
	return strings.TrimSpace(string(hash))
}
