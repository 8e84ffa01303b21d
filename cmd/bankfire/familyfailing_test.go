package main

import (
	"bytes"
	"crypto/sha256"
	"errors"
	"maps"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"bankfire/cmd/bankfire/internal/results/failing"
)

// TestEveryWriteFailsOfFamilies makes operations on the disk fail in turn, in every way,
// while a study with a family is weighed. The user must be told, and a run that resumes on
// a disk that is well must make the same results as one that never failed. Without -long it
// is every eleventh operation, another one in each way.
func TestEveryWriteFailsOfFamilies(t *testing.T) {
	dir := t.TempDir()
	study := filepath.Join(dir, "study.toml")
	plantStudy(t, study, familyStudy(9000), familyTraverse)
	if status, _, said := weighOn(&failing.Disk{}, study, "--out", filepath.Join(dir, "want")); status != done {
		t.Fatal(said)
	}
	want := hashes(t, filepath.Join(dir, "want"))
	first, step := 0, 11
	if *long {
		step = 1
	}
	for name, mode := range failing.Modes {
		first += 4
		from := 1 + first%step
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			for at := from; ; at += step {
				out := filepath.Join(t.TempDir(), "out")
				disk := &failing.Disk{At: at, Mode: mode}
				status, said := weighOrDie(disk, study, out)
				if disk.Count < at {
					if status != done || at < 60 {
						t.Errorf("after %d operations: status %d, said %q", disk.Count, status, said)
					}
					break
				}
				if status != failed || !strings.Contains(said, failing.ErrFull.Error()) {
					t.Errorf("operation %d: status %d, said %q", at, status, said)
				}
				checkResumes(t, at, study, out, said, want)
			}
		})
	}
}

// weighOrDie is a run with a death of the program as a failure.
func weighOrDie(disk *failing.Disk, study, out string) (status int, said string) {
	defer func() {
		if r := recover(); r != nil {
			status, said = failed, r.(error).Error()
		}
	}()
	status, _, said = weighOn(disk, study, "--out", out)
	return status, said
}

// checkResumes resumes the run and compares its results.
func checkResumes(t *testing.T, at int, study, out, said string, want map[string][sha256.Size]byte) {
	t.Helper()
	_, err := os.Stat(filepath.Join(out, "summary.json"))
	if err != nil {
		if status, _, now := weighOn(&failing.Disk{}, study, "--out", out, "--resume"); status != done {
			t.Errorf("operation %d, %q: resumed with status %d, said %q", at, said, status, now)
			return
		}
		if _, err := os.Stat(out + partsSuffix); !errors.Is(err, os.ErrNotExist) {
			t.Errorf("operation %d, %q: the parts are still there, %v", at, said, err)
		}
	}
	if got := hashes(t, out); !maps.Equal(got, want) {
		t.Errorf("operation %d, %q: other results", at, said)
	}
}

// TestDamagedPart changes bytes of a part that is to be gathered or resumed: nothing that
// is damaged gets into results.
func TestDamagedPart(t *testing.T) {
	dir := t.TempDir()
	study := filepath.Join(dir, "study.toml")
	plantStudy(t, study, familyStudy(9000), familyTraverse)
	out := filepath.Join(dir, "out")
	if status, _, said := weighOn(&failing.Disk{}, study, "--out", out, "--part", "1/1"); status != done {
		t.Fatal(said)
	}
	name := filepath.Join(out+partsSuffix, share{1, 1}.file())
	data, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	for _, at := range []int{0, 17, 19, 100, len(data) / 3, len(data) / 2, len(data) - 1} {
		bad := bytes.Clone(data)
		bad[at] ^= 0x40
		if err := os.WriteFile(name, bad, 0o666); err != nil {
			t.Fatal(err)
		}
		var stdout, stderr bytes.Buffer
		status := execute(commands(), []string{"gather", study, out + partsSuffix, "--out", out}, streams{nil, &stdout, &stderr})
		if status != wrong || !strings.Contains(stderr.String(), name+": ") || stdout.Len() > 0 {
			t.Errorf("byte %d: status %d, said %q", at, status, stderr.String())
		}
		if _, err := os.Stat(out); err == nil {
			t.Fatalf("byte %d: there are results", at)
		}
	}
	if status, _, said := weighOn(&failing.Disk{}, study, "--out", out, "--resume"); status != done || !strings.Contains(said, "was not whole and is made again") {
		t.Errorf("resumed: status %d, said %q", status, said)
	}
}
