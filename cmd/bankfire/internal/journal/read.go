package journal

import (
	"bufio"
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"strings"
)

// What a file can be instead of a whole journal.
var (
	ErrForeign = errors.New("is no journal of this program")
	ErrVersion = errors.New("is a journal of another version of the program")
	ErrTorn    = errors.New("holds a record that is not whole")
)

// Reader reads a journal.
type Reader struct {
	Header Header

	in    *bufio.Reader
	sum   uint32 // of the header
	next  int64  // number of the next record
	size  int64  // of what was read as whole, bytes
	data  bytes.Buffer
	frame [frameSize]byte
}

// frameSize is the size of a record's number and length, bytes.
const frameSize = 12

// bufferSize is how many bytes are read at a time.
const bufferSize = 64 << 10

// Read reads the header of a journal. The error is or wraps ErrForeign, ErrVersion or
// what reading failed with. It is io.ErrUnexpectedEOF if the file ends before its header
// does.
func Read(r io.Reader) (*Reader, error) {
	in := &Reader{in: bufio.NewReaderSize(r, bufferSize)}
	if err := in.readLine(); err != nil {
		return nil, err
	}
	size, err := in.number32()
	if err != nil {
		return nil, err
	}
	if size > mostHeader {
		return nil, fmt.Errorf("%w: its header has %d bytes", ErrForeign, size)
	}
	text := make([]byte, size)
	if _, err := io.ReadFull(in.in, text); err != nil {
		return nil, early(err)
	}
	want, err := in.number32()
	if err != nil {
		return nil, err
	}
	sum := crc32.Checksum([]byte(line), castagnoli)
	sum = crc32.Update(sum, castagnoli, binary.LittleEndian.AppendUint32(nil, size))
	if in.sum = crc32.Update(sum, castagnoli, text); in.sum != want {
		return nil, fmt.Errorf("%w: its header is damaged", ErrForeign)
	}
	in.Header, err = parseHeader(text)
	in.next, in.size = in.Header.From, int64(len(line)+4+len(text)+4)
	return in, err
}

// readLine reads the line that names the format.
func (r *Reader) readLine() error {
	got := make([]byte, len(line))
	n, err := io.ReadFull(r.in, got)
	switch text := string(got[:n]); {
	case err != nil && strings.HasPrefix(line, text):
		return early(err)
	case text == line:
		return nil
	case strings.HasPrefix(text, magic):
		return ErrVersion
	}
	return ErrForeign
}

func (r *Reader) number32() (uint32, error) {
	var data [4]byte
	_, err := io.ReadFull(r.in, data[:])
	return binary.LittleEndian.Uint32(data[:]), early(err)
}

// early says that a file which ends where something should come ends too early.
func early(err error) error {
	if err == io.EOF {
		return io.ErrUnexpectedEOF
	}
	return err
}

// Next returns the next record, in memory that the call after it uses again. The error
// is io.EOF where the file ends between two records, wraps ErrTorn where no whole record
// follows, and else is what reading failed with.
func (r *Reader) Next() ([]byte, error) {
	n, err := io.ReadFull(r.in, r.frame[:])
	switch {
	case err == io.EOF:
		return nil, io.EOF
	case err == io.ErrUnexpectedEOF:
		return nil, r.torn(fmt.Sprintf("cut after %d bytes", n))
	case err != nil:
		return nil, err
	}
	number, size := binary.LittleEndian.Uint64(r.frame[:]), binary.LittleEndian.Uint32(r.frame[8:])
	if number != uint64(r.next) || r.next >= r.Header.To || size > mostRecord {
		return nil, r.torn("damaged")
	}
	r.data.Reset() // which grows with what there is, not with what a damaged length says
	got, err := io.CopyN(&r.data, r.in, int64(size)+4)
	switch {
	case err == io.EOF:
		return nil, r.torn(fmt.Sprintf("cut after %d bytes", frameSize+got))
	case err != nil:
		return nil, err
	}
	data, sum := r.data.Bytes()[:size], binary.LittleEndian.Uint32(r.data.Bytes()[size:])
	if checksum(r.sum, r.frame[:], data) != sum {
		return nil, r.torn("damaged")
	}
	r.next++
	r.size += frameSize + int64(size) + 4
	return data, nil
}

func (r *Reader) torn(how string) error {
	return fmt.Errorf("%w: record %d at byte %d is %s", ErrTorn, r.next, r.size, how)
}

// Number is that of the record that Next comes to.
func (r *Reader) Number() int64 { return r.next }

// Size is how much of the file was read as whole, bytes.
func (r *Reader) Size() int64 { return r.size }

// checksum is that of a record, from the header's on.
func checksum(sum uint32, frame, data []byte) uint32 {
	return crc32.Update(crc32.Update(sum, castagnoli, frame), castagnoli, data)
}
