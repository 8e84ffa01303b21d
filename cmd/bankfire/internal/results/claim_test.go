package results

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"testing"
)

func TestClaim(t *testing.T) {
	name := filepath.Join(t.TempDir(), "x")
	if _, err := (OnDisk{}).Claim(name, false); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("a file that is not there: %v", err)
	}
	f, err := OnDisk{}.Claim(name, true)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := (OnDisk{}).Claim(name, true); !errors.Is(err, fs.ErrExist) {
		t.Errorf("made twice: %v", err)
	}
	if _, err := (OnDisk{}).Claim(name, false); !errors.Is(err, ErrClaimed) {
		t.Errorf("claimed twice: %v", err)
	}
	if err := f.Close(); err != nil {
		t.Fatal(err)
	}
	if f, err = (OnDisk{}).Claim(name, false); err != nil {
		t.Fatal(err)
	}
	f.Close()
}

// TestStillNamed has the file removed, then made again, between its opening and its
// locking.
func TestStillNamed(t *testing.T) {
	name := filepath.Join(t.TempDir(), "x")
	f, err := os.Create(name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if err := stillNamed(f, name); err != nil {
		t.Error(err)
	}
	os.Rename(name, name+"-old")
	if err := stillNamed(f, name); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("removed: %v", err)
	}
	os.WriteFile(name, nil, 0o666)
	if err := stillNamed(f, name); !errors.Is(err, ErrClaimed) {
		t.Errorf("made again: %v", err)
	}
}
