package traverse

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"strings"
	"unicode/utf8"

	"golang.org/x/text/encoding"
	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"

	"bankfire/thermal"
)

// MaxBytes is the size of the largest table that is read. A measured traverse
// has a few thousand bytes; what is far larger is the wrong file.
const MaxBytes = 64 << 20

// readText reads a whole text as UTF-8 with lines that end in "\n", and notes
// what it had to change. Errors are *thermal.InputError.
func readText(name string, r io.Reader) (text string, notes []string, err error) {
	data, err := io.ReadAll(io.LimitReader(r, MaxBytes+1))
	if err != nil {
		return "", nil, &thermal.InputError{File: name, Problem: readProblem(err), Remedy: "name a file that can be read"}
	}
	if len(data) > MaxBytes {
		return "", nil, &thermal.InputError{File: name, Problem: fmt.Sprintf("larger than %d MiB", MaxBytes>>20),
			Remedy: "name the table of the measurements itself"}
	}
	text, notes, err = decode(name, data)
	if err != nil {
		return "", nil, err
	}
	if strings.TrimSpace(text) == "" {
		return "", nil, &thermal.InputError{File: name, Problem: "empty", Remedy: "want a header and at least one row"}
	}
	text, note := unixLines(text)
	if note != "" {
		notes = append(notes, note)
	}
	if err := refuseControls(name, text); err != nil {
		return "", nil, err
	}
	return text, notes, nil
}

// readProblem is what went wrong, without the name of the file.
func readProblem(err error) string {
	var p *fs.PathError
	if errors.As(err, &p) {
		err = p.Err
	}
	return "cannot be read: " + err.Error()
}

// decode turns the bytes of a text in UTF-8, UTF-16 with a byte-order mark, or
// Windows-1252 into UTF-8.
func decode(name string, data []byte) (string, []string, error) {
	switch {
	case isWorkbook(data):
		return "", nil, &thermal.InputError{File: name, Problem: "a spreadsheet workbook, not a text table",
			Remedy: "save the sheet as CSV in UTF-8"}
	case bytes.HasPrefix(data, []byte("\xff\xfe")), bytes.HasPrefix(data, []byte("\xfe\xff")):
		text, err := decoded(unicode.UTF16(unicode.LittleEndian, unicode.UseBOM), data)
		return text, []string{"read as UTF-16, as its byte-order mark says"}, err
	case bytes.IndexByte(data, 0) >= 0:
		return "", nil, &thermal.InputError{File: name, Problem: "not a text: it holds zero bytes",
			Remedy: "save the table as CSV in UTF-8"}
	case !utf8.Valid(data):
		text, err := decoded(charmap.Windows1252, data)
		return text, []string{"read as Windows-1252, since it is not UTF-8"}, err
	case bytes.HasPrefix(data, []byte("\xef\xbb\xbf")):
		return string(data[3:]), []string{"byte-order mark left out"}, nil
	}
	return string(data), nil, nil
}

// isWorkbook reports whether data begins like an .xlsx, .ods or .xls file.
func isWorkbook(data []byte) bool {
	return bytes.HasPrefix(data, []byte("PK\x03\x04")) || bytes.HasPrefix(data, []byte("\xd0\xcf\x11\xe0"))
}

func decoded(e encoding.Encoding, data []byte) (string, error) {
	text, err := e.NewDecoder().Bytes(data)
	return string(text), err
}

// unixLines turns the line ends of Windows and of old Macintoshes into "\n".
func unixLines(text string) (string, string) {
	switch {
	case strings.Contains(text, "\r\n"):
		text = strings.ReplaceAll(text, "\r\n", "\n")
		return strings.ReplaceAll(text, "\r", "\n"), "Windows line ends read"
	case strings.Contains(text, "\r"):
		return strings.ReplaceAll(text, "\r", "\n"), "lines end in carriage returns alone"
	}
	return text, ""
}

// refuseControls refuses a text with control characters, which no table holds.
func refuseControls(name, text string) error {
	at := strings.IndexFunc(text, func(r rune) bool {
		return r < ' ' && r != '\n' && r != '\t' || r >= 0x7f && r < 0xa0
	})
	if at < 0 {
		return nil
	}
	before := text[:at]
	start := strings.LastIndexByte(before, '\n') + 1
	return &thermal.InputError{File: name, Line: 1 + strings.Count(before, "\n"),
		Col:     1 + utf8.RuneCountInString(before[start:]),
		Problem: "not a text: it holds control characters", Remedy: "save the table as CSV in UTF-8"}
}
