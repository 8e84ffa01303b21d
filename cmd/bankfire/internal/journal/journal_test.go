package journal_test

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"bankfire/cmd/bankfire/internal/journal"
	"bankfire/cmd/bankfire/internal/results"
	"bankfire/cmd/bankfire/internal/results/failing"
)

// header is that of a journal with the records 3 ... 8.
var header = journal.Header{Study: "ab12", Build: "cd34", Seeds: []uint64{5, 1 << 63}, Keep: "all", Method: "table",
	Part: 2, Parts: 3, From: 3, To: 9}

// record is record k: different lengths, none at all among them.
func record(k int64) []byte { return bytes.Repeat([]byte{byte(k), 'x'}, int(k-3)*7) }

// write appends the records that are missing and closes the journal.
func write(j *journal.Journal) error {
	for k := j.Next(); k < j.Header().To; k++ {
		if err := j.Append(record(k)); err != nil {
			return errors.Join(err, j.Close())
		}
	}
	return j.Close()
}

// whole returns the bytes of a journal that was never broken off.
func whole(t testing.TB) []byte {
	t.Helper()
	name := filepath.Join(t.TempDir(), "j")
	j, err := journal.Create(results.OnDisk{}, name, header)
	if err == nil {
		err = write(j)
	}
	if err != nil {
		t.Fatal(err)
	}
	return contents(t, name)
}

func contents(t testing.TB, name string) []byte {
	t.Helper()
	data, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

// plant makes a file.
func plant(t testing.TB, data []byte) string {
	t.Helper()
	name := filepath.Join(t.TempDir(), "j")
	if err := os.WriteFile(name, data, 0o666); err != nil {
		t.Fatal(err)
	}
	return name
}

// readAll returns the records of a journal up to the error that ends it.
func readAll(r io.Reader) (records [][]byte, in *journal.Reader, err error) {
	in, err = journal.Read(r)
	for err == nil {
		var data []byte
		if data, err = in.Next(); err == nil {
			records = append(records, slices.Clone(data))
		}
	}
	return records, in, err
}

func TestWriteRead(t *testing.T) {
	data := whole(t)
	records, in, err := readAll(bytes.NewReader(data))
	if err != io.EOF || len(records) != 6 || in.Number() != 9 || in.Size() != int64(len(data)) {
		t.Fatalf("%d records up to %d, %d bytes of %d, %v", len(records), in.Number(), in.Size(), len(data), err)
	}
	if other := in.Header.Other(&header); other != "" {
		t.Errorf("the header %s", other)
	}
	for i, got := range records {
		if want := record(int64(i) + 3); !bytes.Equal(got, want) {
			t.Errorf("record %d is %q, want %q", i+3, got, want)
		}
	}
}

// TestCut cuts the file after each of its bytes: what is whole is read, and a run that
// resumes makes the same file as one that was never broken off.
func TestCut(t *testing.T) {
	t.Parallel() // most of the time is waiting for the disk
	data := whole(t)
	ends := recordEnds(data)
	for size := range data {
		records, _, err := readAll(bytes.NewReader(data[:size]))
		before := 0 // records that are whole, and where the last one ends
		for _, end := range ends[1:] {
			if end <= size {
				before++
			}
		}
		want := map[bool]error{true: io.EOF, false: journal.ErrTorn}[slices.Contains(ends, size)]
		if size < ends[0] {
			want = io.ErrUnexpectedEOF
		}
		if len(records) != before || !errors.Is(err, want) {
			t.Fatalf("%d bytes: %d records, %v; want %d, %v", size, len(records), err, before, want)
		}
		name := plant(t, data[:size])
		j, lost, err := journal.Resume(results.OnDisk{}, name, header)
		if err != nil {
			t.Fatalf("%d bytes: %v", size, err)
		}
		if left := size - ends[before]; j.Next() != 3+int64(before) || size >= ends[0] && lost != int64(left) {
			t.Errorf("%d bytes: goes on at record %d, %d bytes lost; want %d, %d", size, j.Next(), lost, 3+before, left)
		}
		if err := write(j); err != nil || !bytes.Equal(contents(t, name), data) {
			t.Errorf("%d bytes: another file after resuming, %v", size, err)
		}
	}
}

// recordEnds returns where the header and each record end, read with the lengths that
// doc.go describes.
func recordEnds(data []byte) []int {
	at := len("bankfire journal 1\n")
	at += 4 + int(binary.LittleEndian.Uint32(data[at:])) + 4
	ends := []int{at}
	for at < len(data) {
		at += 12 + int(binary.LittleEndian.Uint32(data[at+8:])) + 4
		ends = append(ends, at)
	}
	return ends
}

// TestDamage changes each bit of the file: no record that differs from what was written is
// read, and resuming either refuses the file or makes the whole one of it.
func TestDamage(t *testing.T) {
	t.Parallel()
	data := whole(t)
	ends := recordEnds(data)
	for at := range data {
		for bit := range 8 {
			bad := slices.Clone(data)
			bad[at] ^= 1 << bit
			records, _, err := readAll(bytes.NewReader(bad))
			if err == io.EOF {
				t.Fatalf("byte %d, bit %d: not noticed", at, bit)
			}
			if at >= ends[0] && !errors.Is(err, journal.ErrTorn) {
				t.Fatalf("byte %d, bit %d: %v", at, bit, err)
			}
			for i, got := range records {
				if !bytes.Equal(got, record(int64(i)+3)) || ends[i+1] > at {
					t.Fatalf("byte %d, bit %d: record %d is %q", at, bit, i+3, got)
				}
			}
		}
	}
	for at := range data {
		bad := slices.Clone(data)
		bad[at] ^= 0x10
		name := plant(t, bad)
		j, _, err := journal.Resume(results.OnDisk{}, name, header)
		if err != nil {
			if at >= ends[0] || !bytes.Equal(contents(t, name), bad) {
				t.Errorf("byte %d: %v", at, err)
			}
			continue
		}
		if err := write(j); err != nil || !bytes.Equal(contents(t, name), data) {
			t.Errorf("byte %d: another file after resuming, %v", at, err)
		}
	}
}

// recordAfter is a whole record 9 of the journal, one beyond its last.
func recordAfter(data []byte) []byte {
	header := recordEnds(data)[0]
	sum := binary.LittleEndian.Uint32(data[header-4:])
	after := []byte{9, 0, 0, 0, 0, 0, 0, 0, 1, 0, 0, 0, 'x'}
	return binary.LittleEndian.AppendUint32(after, crc32.Update(sum, crc32.MakeTable(crc32.Castagnoli), after))
}

// TestAfterTheLast has a record behind the last one.
func TestAfterTheLast(t *testing.T) {
	data := whole(t)
	last := recordAfter(data)
	name := plant(t, slices.Concat(data, last))
	if records, _, err := readAll(bytes.NewReader(contents(t, name))); len(records) != 6 || !errors.Is(err, journal.ErrTorn) {
		t.Errorf("%d records, %v", len(records), err)
	}
	j, lost, err := journal.Resume(results.OnDisk{}, name, header)
	if err != nil || lost != int64(len(last)) {
		t.Fatalf("%d bytes lost, %v", lost, err)
	}
	if err := write(j); err != nil || !bytes.Equal(contents(t, name), data) {
		t.Errorf("another file after resuming, %v", err)
	}
}

// TestOtherRecords has records of a journal with another header.
func TestOtherRecords(t *testing.T) {
	data := whole(t)
	other := header
	other.Study = "ffff"
	name := filepath.Join(t.TempDir(), "j")
	j, err := journal.Create(results.OnDisk{}, name, other)
	if err == nil {
		err = write(j)
	}
	if err != nil {
		t.Fatal(err)
	}
	mixed := slices.Concat(data[:recordEnds(data)[0]], contents(t, name)[recordEnds(data)[0]:])
	if records, _, err := readAll(bytes.NewReader(mixed)); len(records) != 0 || !errors.Is(err, journal.ErrTorn) {
		t.Errorf("%d records, %v", len(records), err)
	}
}

func TestRefused(t *testing.T) {
	data := whole(t)
	for _, test := range []struct {
		name string
		data []byte
		want error
	}{
		{"text", []byte("store,wait\n1,2\n1,2\n1,2\n"), journal.ErrForeign},
		{"short text", []byte("bank"), io.ErrUnexpectedEOF},
		{"other short text", []byte("x"), journal.ErrForeign},
		{"another version", append([]byte("bankfire journal 2\n"), data[19:]...), journal.ErrVersion},
		{"damaged header", bytes.Replace(data, []byte("ab12"), []byte("ab13"), 1), journal.ErrForeign},
		{"long header", append([]byte("bankfire journal 1\n"), bytes.Repeat([]byte{0xff}, 100)...), journal.ErrForeign},
	} {
		t.Run(test.name, func(t *testing.T) {
			if _, err := journal.Read(bytes.NewReader(test.data)); !errors.Is(err, test.want) {
				t.Errorf("got %v, want %v", err, test.want)
			}
		})
	}
	name := plant(t, []byte("bankfire jour"))
	if j, _, err := journal.Resume(results.OnDisk{}, name, header); err != nil || write(j) != nil || !bytes.Equal(contents(t, name), data) {
		t.Errorf("the beginning of a header: %v", err)
	}
}

// TestOther has journals of other headers: each is refused, by what differs.
func TestOther(t *testing.T) {
	for want, change := range map[string]func(h *journal.Header){
		"is of another study, or of other data":                  func(h *journal.Header) { h.Study = "x" },
		"was made by another build of the program":               func(h *journal.Header) { h.Build = "x" },
		"was drawn with the seed 5 9223372036854775808, not 5 6": func(h *journal.Header) { h.Seeds = []uint64{5, 6} },
		"keeps all, not survivors":                               func(h *journal.Header) { h.Keep = "survivors" },
		"was made by the method table, not steps":                func(h *journal.Header) { h.Method = "steps" },
		"is one of 3 parts, not of 4":                            func(h *journal.Header) { h.Parts = 4 },
		"is part 2, not 1":                                       func(h *journal.Header) { h.Part = 1 },
		"holds the blocks 3 to 8, not 3 to 9":                    func(h *journal.Header) { h.To = 10 },
		"was drawn with the seed 5 9223372036854775808, not 5":   func(h *journal.Header) { h.Seeds = h.Seeds[:1] },
	} {
		data := whole(t)
		name := plant(t, data)
		wanted := header
		wanted.Seeds = slices.Clone(header.Seeds)
		change(&wanted)
		_, _, err := journal.Resume(results.OnDisk{}, name, wanted)
		other := (*journal.OtherError)(nil)
		if !errors.As(err, &other) || err.Error() != want {
			t.Errorf("got %v, want %s", err, want)
		}
		if !bytes.Equal(contents(t, name), data) {
			t.Errorf("%s: the file was changed", want)
		}
	}
}

// TestClaimed has two writers of one journal.
func TestClaimed(t *testing.T) {
	name := filepath.Join(t.TempDir(), "j")
	j, err := journal.Create(results.OnDisk{}, name, header)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := journal.Create(results.OnDisk{}, name, header); !errors.Is(err, os.ErrExist) {
		t.Errorf("made again: %v", err)
	}
	if _, _, err := journal.Resume(results.OnDisk{}, name, header); !errors.Is(err, results.ErrClaimed) {
		t.Errorf("resumed while it is written: %v", err)
	}
	if err := j.Close(); err != nil {
		t.Fatal(err)
	}
	if j, _, err = journal.Resume(results.OnDisk{}, name, header); err != nil {
		t.Fatal(err)
	}
	if err := j.Close(); err != nil {
		t.Fatal(err)
	}
}

func TestAppendPanics(t *testing.T) {
	j, err := journal.Create(results.OnDisk{}, filepath.Join(t.TempDir(), "j"), header)
	if err != nil {
		t.Fatal(err)
	}
	if err := write(j); err != nil {
		t.Fatal(err)
	}
	defer func() {
		if r := recover(); r != "journal: record 9 beyond the last, 8" {
			t.Errorf("got %v", r)
		}
	}()
	j.Append(nil)
}

// TestEveryOperationFails makes each operation on the disk fail in turn, in every way:
// the error is told, nothing that was appended before is lost, and a run that resumes
// makes the same file as one that was never broken off.
func TestEveryOperationFails(t *testing.T) {
	t.Parallel()
	want := whole(t)
	for name, mode := range failing.Modes {
		t.Run(name, func(t *testing.T) {
			for at := 1; ; at++ {
				disk := &failing.Disk{At: at, Mode: mode}
				if !failAt(t, disk, want) {
					break
				}
				if t.Failed() {
					t.Fatalf("at operation %d", at)
				}
			}
		})
	}
}

// failAt begins a journal, breaks off and resumes it, with a torn record in between, on a
// disk that fails; then resumes it on one that does not. It reports whether the disk came
// to fail.
func failAt(t *testing.T, disk *failing.Disk, want []byte) bool {
	name := filepath.Join(t.TempDir(), "j")
	appended, err := runOrDie(disk, name)
	if disk.Count < disk.At {
		if err != nil || disk.At < 20 || !bytes.Equal(contents(t, name), want) {
			t.Errorf("after %d operations: %v", disk.Count, err)
		}
		return false
	}
	if !errors.Is(err, failing.ErrFull) {
		t.Errorf("got error %v, want %v", err, failing.ErrFull)
	}
	j, _, err := journal.Resume(results.OnDisk{}, name, header)
	switch {
	case errors.Is(err, os.ErrNotExist) && appended == 3:
		return true
	case err != nil:
		t.Fatal(err)
	}
	if j.Next() < appended {
		t.Errorf("goes on at record %d although those before %d were appended", j.Next(), appended)
	}
	if err := write(j); err != nil || !bytes.Equal(contents(t, name), want) {
		t.Errorf("another file after resuming, %v", err)
	}
	return true
}

// runOrDie returns the number of the first record that no Append has promised, and a
// death of the program as an error.
func runOrDie(disk results.Disk, name string) (next int64, err error) {
	next = header.From
	defer func() {
		if r := recover(); r != nil {
			err = r.(error)
		}
	}()
	j, err := journal.Create(disk, name, header)
	if err != nil {
		return next, err
	}
	for ; j.Next() < 6; next = j.Next() {
		if err := j.Append(record(j.Next())); err != nil {
			return next, errors.Join(err, j.Close())
		}
	}
	if err := j.Close(); err != nil {
		return next, err
	}
	if err := tear(name); err != nil {
		return next, err
	}
	if j, _, err = journal.Resume(disk, name, header); err != nil {
		return next, err
	}
	return next, write(j)
}

// tear appends half a record.
func tear(name string) error {
	f, err := os.OpenFile(name, os.O_WRONLY|os.O_APPEND, 0)
	if err != nil {
		return err
	}
	_, err = f.Write([]byte{6, 0, 0, 0, 0, 0, 0, 0, 42})
	return errors.Join(err, f.Close())
}

// FuzzRead reads anything: it never panics, and what it reads are records that a journal
// with this header would hold in these bytes.
func FuzzRead(f *testing.F) {
	data := whole(f)
	random := rand.New(rand.NewPCG(1, 2))
	for range 10 {
		f.Add(data[:random.IntN(len(data))])
	}
	f.Add(data)
	f.Add([]byte("bankfire journal 2\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		records, in, err := readAll(bytes.NewReader(data))
		if err == nil {
			t.Fatal("no end")
		}
		if len(records) == 0 {
			return
		}
		name := filepath.Join(t.TempDir(), "j")
		j, err := journal.Create(results.OnDisk{}, name, in.Header)
		for _, r := range records {
			if err == nil {
				err = j.Append(r)
			}
		}
		if err == nil {
			err = j.Close()
		}
		if err != nil || !bytes.Equal(contents(t, name), data[:in.Size()]) {
			t.Errorf("written again they are others, %v", err)
		}
	})
}

func ExampleJournal() {
	dir, err := os.MkdirTemp("", "")
	if err != nil {
		fmt.Println(err)
		return
	}
	defer os.RemoveAll(dir)
	name := filepath.Join(dir, "part-1-of-1.bankfire")
	h := journal.Header{Part: 1, Parts: 1, To: 2}
	j, err := journal.Create(results.OnDisk{}, name, h)
	if err == nil {
		err = errors.Join(j.Append([]byte("first")), j.Close())
	}
	if err != nil {
		fmt.Println(err)
		return
	}
	j, lost, err := journal.Resume(results.OnDisk{}, name, h)
	fmt.Println(j.Next(), lost, err)
	fmt.Println(j.Append([]byte("second")), j.Close())
	// Output:
	// 1 0 <nil>
	// <nil> <nil>
}
