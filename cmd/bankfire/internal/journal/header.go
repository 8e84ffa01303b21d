package journal

import (
	"bytes"
	"encoding/binary"
	"encoding/json"
	"fmt"
	"hash/crc32"
	"slices"
)

// Header says whose records a journal holds.
type Header struct {
	Study  string   `json:"study"` // SHA-256 over the study file and those that it names, hexadecimal
	Build  string   `json:"build"` // SHA-256 of the executable, hexadecimal
	Seeds  []uint64 `json:"seeds"` // one a family
	Keep   string   `json:"keep"`  // which rows are kept
	Method string   `json:"method"`
	Part   int64    `json:"part"` // from 1
	Parts  int64    `json:"parts"`
	From   int64    `json:"from"` // the records are those numbered From ... To-1
	To     int64    `json:"to"`
}

// Other says in what h, of a journal, differs from the header that is wanted, as the
// predicate of a sentence about the journal; "" if in nothing.
func (h *Header) Other(want *Header) string {
	switch {
	case h.Study != want.Study:
		return "is of another study, or of other data"
	case h.Build != want.Build:
		return "was made by another build of the program"
	case !slices.Equal(h.Seeds, want.Seeds):
		return fmt.Sprintf("was drawn with the seed %s, not %s", words(h.Seeds), words(want.Seeds))
	case h.Keep != want.Keep:
		return fmt.Sprintf("keeps %s, not %s", h.Keep, want.Keep)
	case h.Method != want.Method:
		return fmt.Sprintf("was made by the method %s, not %s", h.Method, want.Method)
	case h.Parts != want.Parts:
		return fmt.Sprintf("is one of %d parts, not of %d", h.Parts, want.Parts)
	case h.Part != want.Part:
		return fmt.Sprintf("is part %d, not %d", h.Part, want.Part)
	case h.From != want.From || h.To != want.To:
		return fmt.Sprintf("holds the blocks %d to %d, not %d to %d", h.From, h.To-1, want.From, want.To-1)
	}
	return ""
}

func words(seeds []uint64) string {
	text := fmt.Sprint(seeds)
	return text[1 : len(text)-1]
}

// What a file begins with.
const (
	magic = "bankfire journal "
	line  = magic + "1\n"
)

// The most bytes of a header and of a record that a reader believes.
const (
	mostHeader = 1 << 20
	mostRecord = 1 << 28
)

var castagnoli = crc32.MakeTable(crc32.Castagnoli)

// bytes is the beginning of the file up to the records, and its checksum.
func (h *Header) bytes() ([]byte, uint32, error) {
	text, err := json.Marshal(h)
	if err != nil {
		return nil, 0, err
	}
	if len(text) > mostHeader {
		return nil, 0, fmt.Errorf("journal: a header of %d bytes", len(text))
	}
	data := binary.LittleEndian.AppendUint32([]byte(line), uint32(len(text)))
	data = append(data, text...)
	sum := crc32.Checksum(data, castagnoli)
	return binary.LittleEndian.AppendUint32(data, sum), sum, nil
}

// parseHeader reads the JSON of a header, which must be as bytes writes it.
func parseHeader(text []byte) (Header, error) {
	var h Header
	if err := json.Unmarshal(text, &h); err != nil {
		return Header{}, fmt.Errorf("%w: %w", ErrForeign, err)
	}
	again, err := json.Marshal(h)
	if err != nil || !bytes.Equal(text, again) || h.From < 0 || h.To < h.From || h.Part < 1 || h.Parts < h.Part {
		return Header{}, fmt.Errorf("%w: its header is odd", ErrForeign)
	}
	return h, nil
}
