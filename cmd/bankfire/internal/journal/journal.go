package journal

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"time"

	"bankfire/cmd/bankfire/internal/results"
)

// Journal is a journal that is being written.
type Journal struct {
	header Header
	file   results.Claimed
	sum    uint32 // of the header
	next   int64
	synced time.Time
	broken error // what an Append failed with
	data   []byte
}

// syncEvery is how much of the work a computer that loses its power may lose. A process
// that is killed loses nothing of what was appended.
const syncEvery = time.Second

// Create begins a journal in a file that must not be there. It is for this process alone
// until it is closed. If Create fails, no file remains.
func Create(disk results.Disk, name string, h Header) (*Journal, error) {
	data, sum, err := h.bytes()
	if err != nil {
		return nil, err
	}
	file, err := disk.Claim(name, true)
	if err != nil {
		return nil, err
	}
	j := &Journal{header: h, file: file, sum: sum, next: h.From, synced: time.Now()}
	if err := j.begin(disk, name, data); err != nil {
		return nil, errors.Join(err, file.Close(), disk.Remove(name))
	}
	return j, nil
}

// begin writes the beginning of the file.
func (j *Journal) begin(disk results.Disk, name string, data []byte) error {
	if _, err := j.file.Write(data); err != nil {
		return err
	}
	if err := j.file.Sync(); err != nil {
		return err
	}
	return disk.SyncFolder(filepath.Dir(name))
}

// Resume goes on with the journal in a file: it keeps the whole records and cuts what
// follows them, lost bytes. The error is results.ErrClaimed while another process writes
// the journal, an *OtherError if its header is not the one given, and else wraps one of
// the errors of Read, or is what the disk failed with. The file is then as it was.
//
// A file that ends within the header given is what is left of a Create that was broken
// off. It is begun again.
func Resume(disk results.Disk, name string, h Header) (j *Journal, lost int64, err error) {
	data, sum, err := h.bytes()
	if err != nil {
		return nil, 0, err
	}
	file, err := disk.Claim(name, false)
	if err != nil {
		return nil, 0, err
	}
	j = &Journal{header: h, file: file, sum: sum, next: h.From, synced: time.Now()}
	if lost, err = j.resume(disk, name, data); err != nil {
		return nil, 0, errors.Join(err, file.Close())
	}
	return j, lost, nil
}

// OtherError is the error about a journal whose header is not the one wanted.
type OtherError struct{ Got, Want Header }

// Error says how they differ.
func (e *OtherError) Error() string { return e.Got.Other(&e.Want) }

// resume reads what there is and cuts what is not whole.
func (j *Journal) resume(disk results.Disk, name string, data []byte) (lost int64, err error) {
	r, err := Read(j.file)
	switch {
	case errors.Is(err, io.ErrUnexpectedEOF):
		return 0, j.restart(disk, name, data)
	case err != nil:
		return 0, err
	case r.Header.Other(&j.header) != "":
		return 0, &OtherError{r.Header, j.header}
	}
	for err == nil {
		_, err = r.Next()
	}
	if err != io.EOF && !errors.Is(err, ErrTorn) {
		return 0, err
	}
	end, err := j.file.Seek(0, io.SeekEnd)
	if err != nil {
		return 0, err
	}
	j.next = r.Number()
	return end - r.Size(), j.cut(r.Size())
}

// cut leaves so many bytes of the file, after which it is written.
func (j *Journal) cut(size int64) error {
	if err := j.file.Truncate(size); err != nil {
		return err
	}
	if _, err := j.file.Seek(size, io.SeekStart); err != nil {
		return err
	}
	return j.file.Sync()
}

// restart begins a file again that ends within its header, if it is ours.
func (j *Journal) restart(disk results.Disk, name string, data []byte) error {
	if _, err := j.file.Seek(0, io.SeekStart); err != nil {
		return err
	}
	got, err := io.ReadAll(io.LimitReader(j.file, int64(len(data))))
	if err != nil {
		return err
	}
	if !bytes.HasPrefix(data, got) {
		return fmt.Errorf("%w: it ends within its header", ErrForeign)
	}
	if err := j.cut(0); err != nil {
		return err
	}
	return j.begin(disk, name, data)
}

// Header is what was given.
func (j *Journal) Header() Header { return j.header }

// Next is the number of the record that Append adds, Header().To once all are there.
func (j *Journal) Next() int64 { return j.next }

// Append adds a record. When it returns, the record outlives the process, and within a
// second or so it is on disk. After an error all calls return it. Append panics if all
// records are there.
func (j *Journal) Append(record []byte) error {
	switch {
	case j.broken != nil:
		return j.broken
	case j.next >= j.header.To:
		panic(fmt.Sprintf("journal: record %d beyond the last, %d", j.next, j.header.To-1))
	case len(record) > mostRecord:
		return fmt.Errorf("journal: record %d has %d bytes", j.next, len(record))
	}
	j.data = binary.LittleEndian.AppendUint64(j.data[:0], uint64(j.next))
	j.data = binary.LittleEndian.AppendUint32(j.data, uint32(len(record)))
	j.data = append(j.data, record...)
	j.data = binary.LittleEndian.AppendUint32(j.data, checksum(j.sum, j.data[:frameSize], record))
	if _, j.broken = j.file.Write(j.data); j.broken != nil {
		return j.broken
	}
	j.next++
	if time.Since(j.synced) >= syncEvery {
		j.broken = j.Sync()
	}
	return j.broken
}

// Sync returns when all records are on disk.
func (j *Journal) Sync() error {
	j.synced = time.Now()
	return j.file.Sync()
}

// Close syncs and closes the journal.
func (j *Journal) Close() error { return errors.Join(j.Sync(), j.file.Close()) }
