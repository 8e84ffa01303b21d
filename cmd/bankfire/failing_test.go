package main

import (
	"bytes"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"bankfire/cmd/bankfire/internal/results/failing"
)

// smallStudy has one path and the traverse of smallTraverse, to be quick.
const smallStudy = `title = "small"
[[path]]
name = "warm"
legs = [{ hold = "750 C", for = "100 yr" }]
[[crystal]]
name = "HF-1"
mineral = "quartz"
shape = "slab"
zones = [{ name = "core", width = "20 um" }, { name = "mantle", width = "20 um" }]
[[crystal.element]]
name = "Ti"
law = "quartz-ti-cherniak2007"
start = { zones = ["free", "free"], edge = "0 um" }
rim = { held = "mantle" }
traverse = { file = "ti.csv", position = "x [um]", zero = "centre", value = "Ti [ppm]", error = "2 ppm", spot = "0.8 um fwhm" }
`

const smallTraverse = "x [um],Ti [ppm]\n10,92\n17,91\n19,80\n21,68\n23,60\n30,58\n"

// plantStudy puts the small study into the folder and returns its name.
func plantStudy(t *testing.T, dir string) string {
	t.Helper()
	name := filepath.Join(dir, "study.toml")
	for file, text := range map[string]string{name: smallStudy, filepath.Join(dir, "ti.csv"): smallTraverse} {
		if err := os.WriteFile(file, []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	return name
}

// TestEveryWriteFails makes each operation on the disk fail in turn while earlier results
// are being replaced, and demands that the user is told, that the status says so, that
// nothing is printed as if it had gone well and that the earlier results are still there.
func TestEveryWriteFails(t *testing.T) {
	t.Parallel() // much of the time is waiting for the disk
	dir := t.TempDir()
	study, out := plantStudy(t, dir), filepath.Join(dir, "out")
	if status, _, said := weighOn(&failing.Disk{}, study, out); status != done {
		t.Fatal(said)
	}
	before := readSummary(t, out)
	for at := 1; ; at++ {
		disk := &failing.Disk{At: at}
		status, printed, said := weighOn(disk, study, out)
		if disk.Count < at {
			if status != done || said != "" || printed == "" {
				t.Errorf("without a failure: status %d, printed %q, said %q", status, printed, said)
			}
			break
		}
		if status != failed || printed != "" || !strings.Contains(said, failing.ErrFull.Error()) {
			t.Errorf("operation %d: status %d, printed %q, said %q", at, status, printed, said)
		}
		if got := readSummary(t, out); got != before {
			t.Errorf("operation %d: got results %q, want %q", at, got, before)
		}
		removeLeftovers(t, dir, out)
	}
}

// weighOn runs weigh on the disk. It returns the status, what it printed and what it
// said had gone wrong.
func weighOn(disk *failing.Disk, study, out string) (status int, printed, said string) {
	var stdout, stderr bytes.Buffer
	args := []string{"weigh", study, "--out", out, "--replace"}
	status = execute([]*command{weighCommandOn(disk)}, args, streams{nil, &stdout, &stderr})
	return status, stdout.String(), stderr.String()
}

// removeLeftovers removes what is left where the failing operation was one of cleaning up.
func removeLeftovers(t *testing.T, dirs ...string) {
	t.Helper()
	for _, dir := range dirs {
		names, err := filepath.Glob(filepath.Join(dir, ".bankfire-*"))
		if err != nil {
			t.Fatal(err)
		}
		for _, name := range names {
			if err := os.RemoveAll(name); err != nil {
				t.Fatal(err)
			}
		}
	}
}

// readSummary returns the summary in the folder, "" if there is none.
func readSummary(t *testing.T, out string) string {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(out, "summary.json"))
	if err != nil && !os.IsNotExist(err) {
		t.Fatal(err)
	}
	return string(text)
}
