package main

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"

	"bankfire/cmd/bankfire/internal/journal"
	"bankfire/cmd/bankfire/internal/results"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// A run that screens families keeps the blocks of members in journals, one a part of the
// run, in a folder beside that of the results: results.parts/part-1-of-4.bankfire.

// partsSuffix ends the name of that folder, and partSuffix those of the files in it.
const (
	partsSuffix = ".parts"
	partSuffix  = ".bankfire"
)

// share is part k of n of a run.
type share struct{ k, n int64 }

func (s share) file() string { return fmt.Sprintf("part-%d-of-%d%s", s.k, s.n, partSuffix) }

// blocks are the first block of the share, and the one after its last, of so many.
func (s share) blocks(all int64) (from, to int64) {
	// all * k might be too large for a number
	at := func(k int64) int64 { return all/s.n*k + all%s.n*k/s.n }
	return at(s.k - 1), at(s.k)
}

// mostParts is the most parts that a run may have.
const mostParts = 1_000_000

// parseShare reads "K/N".
func parseShare(text string) (share, error) {
	bad := func(problem string) (share, error) {
		return share{}, &thermal.InputError{Field: "--part", Value: text, Problem: problem, Remedy: "write --part 2/4 for the second of four"}
	}
	first, second, found := strings.Cut(text, "/")
	k, errK := strconv.ParseInt(first, 10, 64)
	n, errN := strconv.ParseInt(second, 10, 64)
	switch {
	case !found || errK != nil || errN != nil:
		return bad("cannot be read")
	case n < 1 || n > mostParts:
		return bad("a run cannot have so many parts")
	case k < 1 || k > n:
		return bad("there is no such part")
	}
	return share{k, n}, nil
}

// newHeader is the header of a part of a run over the study, by the build.
func newHeader(s *study.Study, build, keep, method string, of share) journal.Header {
	h := journal.Header{Study: studyHash(s), Build: build, Keep: keep, Method: method, Part: of.k, Parts: of.n}
	for i := range s.Families {
		h.Seeds = append(h.Seeds, s.Families[i].Seed)
	}
	h.From, h.To = of.blocks(paths.Blocks(s))
	return h
}

// studyHash is one of all files that the study rests on.
func studyHash(s *study.Study) string {
	sum := sha256.New()
	for _, in := range s.Inputs {
		io.WriteString(sum, in.SHA256+"\n") // never fails
	}
	return hex.EncodeToString(sum.Sum(nil))
}

// part is a part of a run that is being written.
type part struct {
	disk    results.Disk
	dir     string // of the parts of the run
	name    string
	journal *journal.Journal
	begun   bool  // by an earlier run
	lost    int64 // of that, bytes
}

// openPart makes a part, or with resume goes on with one that is there. Other parts in the
// folder must be of a run of as many.
func openPart(disk results.Disk, dir string, h journal.Header, resume bool) (*part, error) {
	of := share{h.Part, h.Parts}
	p := &part{disk: disk, dir: dir, name: filepath.Join(dir, of.file())}
	if err := p.makeFolder(); err != nil {
		return nil, err
	}
	if err := refuseOthers(dir, of); err != nil {
		return nil, err
	}
	_, err := os.Lstat(p.name)
	switch p.begun = err == nil; {
	case errors.Is(err, fs.ErrNotExist):
		p.journal, err = journal.Create(disk, p.name, h)
	case err == nil && resume:
		p.journal, p.lost, err = journal.Resume(disk, p.name, h)
	case err == nil:
		err = p.refuse()
	}
	if err != nil {
		return nil, p.error(err)
	}
	return p, nil
}

// makeFolder makes the folder of the parts if it is not there.
func (p *part) makeFolder() error {
	info, err := os.Stat(p.dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		if err := p.disk.Mkdir(p.dir); err != nil && !errors.Is(err, fs.ErrExist) {
			return p.error(err)
		}
		return p.disk.SyncFolder(filepath.Dir(p.dir))
	case err != nil:
		return p.error(err)
	case !info.IsDir():
		return &thermal.InputError{File: p.dir, Problem: "is a file, where the folder for the parts of the run would be", Remedy: "move it away, or name another --out"}
	}
	return nil
}

// refuseOthers refuses a folder with parts of a run in another number of parts.
func refuseOthers(dir string, of share) error {
	names, err := partNames(dir)
	if err != nil {
		return err
	}
	for _, name := range names {
		var other share
		if n, err := fmt.Sscanf(name, "part-%d-of-%d"+partSuffix, &other.k, &other.n); n == 2 && err == nil && other.n != of.n {
			return &thermal.InputError{File: filepath.Join(dir, name), Problem: fmt.Sprintf("is a part of a run in %d, not in %d", other.n, of.n),
				Remedy: "finish that run, or remove " + dir + ", or name another --out"}
		}
	}
	return nil
}

// partNames are the names of the files of a folder that should be parts.
func partNames(dir string) ([]string, error) {
	entries, err := os.ReadDir(dir)
	if err != nil {
		return nil, err
	}
	var names []string
	for _, e := range entries {
		if strings.HasSuffix(e.Name(), partSuffix) {
			names = append(names, e.Name())
		}
	}
	slices.Sort(names)
	return names, nil
}

// refuse says what is there already.
func (p *part) refuse() error {
	f, err := p.disk.Claim(p.name, false)
	if err != nil {
		return err
	}
	return errors.Join(&thermal.InputError{File: p.name, Problem: "is there already, left by a run that was broken off or is to be gathered",
		Remedy: "add --resume to go on with it, or remove " + p.dir}, f.Close())
}

// error says what went wrong with the part, and what to do.
func (p *part) error(err error) error {
	in := &thermal.InputError{File: p.name}
	other := (*journal.OtherError)(nil)
	switch {
	case errors.As(err, &other):
		in.Problem, in.Remedy = other.Error(), "run it as it was begun, or remove "+p.dir+" to begin anew"
	case errors.Is(err, results.ErrClaimed), errors.Is(err, fs.ErrExist):
		in.Problem, in.Remedy = "is being written by another run", "wait for its end, or name another --out"
	case errors.Is(err, journal.ErrForeign), errors.Is(err, journal.ErrVersion):
		in.Problem, in.Remedy = err.Error(), "move it away"
	case errors.Is(err, fs.ErrPermission):
		in.File, in.Problem, in.Remedy = p.dir, "no files can be made there: permission denied", "name another --out"
	default:
		return err
	}
	return in
}

// close closes the part. If nothing is in it that could be, nothing of it remains.
func (p *part) close() error {
	if h := p.journal.Header(); p.journal.Next() == h.From && h.From < h.To {
		return p.remove()
	}
	return p.journal.Close()
}

// remove closes and removes the part, and the folder if it was the last.
func (p *part) remove() error {
	if err := p.journal.Close(); err != nil {
		return err
	}
	return p.delete()
}

func (p *part) delete() error {
	if err := p.disk.Remove(p.name); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return err
	}
	names, err := os.ReadDir(p.dir)
	if err != nil || len(names) > 0 {
		return err
	}
	return errors.Join(p.disk.Remove(p.dir), p.disk.SyncFolder(filepath.Dir(p.dir)))
}

// screen screens the blocks that the part does not have yet.
func (p *part) screen(ctx context.Context, s *paths.Screening) error {
	var data []byte
	err := s.Screen(ctx, p.journal.Next(), p.journal.Header().To, func(b *paths.Block) error {
		var err error
		if data, err = b.AppendBinary(data[:0]); err != nil {
			return err
		}
		return p.journal.Append(data)
	})
	if err != nil {
		return err
	}
	return p.journal.Sync()
}
