package main

import (
	"fmt"
	"path/filepath"
	"testing"
)

// By how much a run over many members may need more memory than one over few. All that grows
// is the list of pages at the end of a Parquet file, some hundred bytes for 8192 rows; the
// rest is when the garbage collector happens to run, which shows more in short runs. Eight
// bytes a member would be 24 % of the short runs' memory and more than all of the long ones'.
const (
	moreMemory     = 1.2
	moreMemoryLong = 1.1
)

// TestMemory weighs families of few and of many members: what a run holds at its most
// does not depend on their number.
func TestMemory(t *testing.T) {
	few, many, more := 500_000, 2_000_000, moreMemory // the rows of the few are more than one group in Parquet
	if *long {
		few, many, more = 1_000_000, 10_000_000, moreMemoryLong
	}
	held := map[int]int64{}
	for _, count := range []int{few, many} {
		dir := t.TempDir()
		plantStudy(t, filepath.Join(dir, "study.toml"), familyStudy(count), familyTraverse)
		c := inFolder(dir, "weigh", "study.toml", "--out", "r", "--jobs", "2", "--quiet")
		if text, err := c.CombinedOutput(); err != nil {
			t.Fatalf("%v\n%s", err, text)
		}
		if held[count] = peakMemory(c.ProcessState); held[count] == 0 {
			t.Skip("the system does not say what memory a process held")
		}
	}
	text := fmt.Sprintf("%d members: %d kB, %d members: %d kB", few, held[few]>>10, many, held[many]>>10)
	t.Log(text)
	if !(float64(held[many]) <= more*float64(held[few])) {
		t.Errorf("%s, want at most %g times as much", text, more)
	}
}
