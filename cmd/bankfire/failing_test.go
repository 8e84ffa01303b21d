package main

import (
	"bytes"
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"bankfire/cmd/bankfire/internal/results"
	"bankfire/cmd/bankfire/internal/results/failing"
)

// TestEveryWriteFails makes each operation on the disk fail in turn while earlier results
// are being replaced, and demands that the user is told, that the status says so, that
// nothing is printed as if it had gone well and that the earlier results are still there.
func TestEveryWriteFails(t *testing.T) {
	t.Parallel() // much of the time is waiting for the disk
	dir := t.TempDir()
	out := filepath.Join(dir, "out")
	plantStudy(t, filepath.Join(dir, "earlier.toml"), strings.Replace(smallStudy, `"small"`, `"earlier"`, 1), smallTraverse)
	plantStudy(t, filepath.Join(dir, "study.toml"), smallStudy, smallTraverse)
	if status, _, said := weighOn(&failing.Disk{}, filepath.Join(dir, "earlier.toml"), "--out", out); status != done {
		t.Fatal(said)
	}
	title := `"title": "earlier"`
	for at := 1; ; at++ {
		disk := &failing.Disk{At: at}
		status, printed, said := weighOn(disk, filepath.Join(dir, "study.toml"), "--out", out, "--replace")
		if disk.Count < at {
			if status != done || said != "" || printed == "" {
				t.Errorf("without a failure: status %d, printed %q, said %q", status, printed, said)
			}
			break
		}
		if status != failed || printed != "" || !strings.Contains(said, failing.ErrFull.Error()) {
			t.Errorf("operation %d: status %d, printed %q, said %q", at, status, printed, said)
		}
		if strings.Contains(said, "results written, but not all of the earlier ones removed") {
			title = `"title": "small"`
		}
		if got := readSummary(t, out); !strings.Contains(got, title) {
			t.Errorf("operation %d, %q: got results %q, want those with %s", at, said, got, title)
		}
		removeLeftovers(t, filepath.Dir(out), out)
	}
	if title != `"title": "small"` {
		t.Error("removing the earlier results never failed")
	}
}

// plantStudy writes a study and, beside it, the traverse ti.csv.
func plantStudy(t testing.TB, name, text, traverse string) {
	t.Helper()
	err := errors.Join(os.WriteFile(name, []byte(text), 0o666),
		os.WriteFile(filepath.Join(filepath.Dir(name), "ti.csv"), []byte(traverse), 0o666))
	if err != nil {
		t.Fatal(err)
	}
}

// weighOn runs weigh with its results on the disk. It returns the status, what it printed
// and what it said had gone wrong.
func weighOn(disk results.Disk, args ...string) (status int, printed, said string) {
	var stdout, stderr bytes.Buffer
	status = execute([]*command{newWeighCommand(disk)}, append([]string{"weigh"}, args...), streams{nil, &stdout, &stderr})
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
