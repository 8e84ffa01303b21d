package traverse

import (
	"fmt"
	"io"
	"strings"
	"unicode/utf8"

	"bankfire/thermal"
)

// Bounds that no honest table comes near; they bound the memory that a wrong
// one can cost.
const (
	maxLine  = 1 << 20 // bytes
	maxCells = 16_384  // columns of the widest spreadsheets
	maxRows  = 100_000
)

// sheet walks down the rows of a text table.
type sheet struct {
	name     string
	rest     string // of the text, not walked yet
	line     int    // number of the current line
	rows     int    // walked so far
	text     string // the current line
	cells    []cell // of the current line; overwritten by next
	delim    byte
	header   []cell
	columns  []bound // those asked for
	numbers  numbers
	comma    *thermal.InputError // about the first comma that may mean thousands
	comments []int               // lines skipped as comments, in the end those below the header
	notes    []string
	problems list
}

// cell is the text of one cell, without blanks and quotes around it, and the
// offset in its line where it begins.
type cell struct {
	text string
	at   int
}

// openSheet reads a text and its header and finds the wanted columns in it.
func openSheet(name string, r io.Reader, want []Column) (*sheet, error) {
	text, notes, err := readText(name, r)
	if err != nil {
		return nil, err
	}
	s := &sheet{name: name, rest: text}
	for _, n := range notes {
		s.note("%s", n)
	}
	for s.nextLine() && s.skippable() {
	}
	if s.skippable() {
		return nil, s.errorAt(0, "", "", "nothing but blank lines and comments", "want a header and at least one row")
	}
	if err := s.readHeader(want); err != nil {
		return nil, err
	}
	s.comments = nil
	return s, nil
}

func (s *sheet) note(format string, a ...any) {
	s.notes = append(s.notes, s.name+": "+fmt.Sprintf(format, a...))
}

// nextLine moves to the next line of the text.
func (s *sheet) nextLine() bool {
	if s.rest == "" {
		return false
	}
	s.text, s.rest, _ = strings.Cut(s.rest, "\n")
	s.line++
	return true
}

// skippable reports whether the current line is blank or a comment, and keeps
// count of comments. "#N/A" and its like are what spreadsheets leave of a
// failed formula and no comments.
func (s *sheet) skippable() bool {
	line := strings.TrimSpace(s.text)
	if line == "" {
		return true
	}
	if line[0] != '#' {
		return false
	}
	for _, e := range []string{"#N/A", "#DIV/0!", "#REF!", "#VALUE!", "#NAME?", "#NUM!", "#NULL!"} {
		if strings.HasPrefix(line, e) {
			return false
		}
	}
	s.comments = append(s.comments, s.line)
	return true
}

// readHeader chooses the one delimiter under which the current line holds all
// wanted columns.
func (s *sheet) readHeader(want []Column) error {
	var closest *list
	most := 0
	for _, delim := range []byte{'\t', ';', ','} {
		s.delim = delim
		s.numbers.commaSeparates = delim == ','
		problems := s.tryHeader(want)
		if len(problems.kinds) == 0 {
			return nil
		}
		if closest == nil || len(s.header) > most {
			closest, most = problems, len(s.header)
		}
	}
	return closest.err()
}

// tryHeader splits the current line as a header and looks for the columns.
func (s *sheet) tryHeader(want []Column) *list {
	problems := &list{}
	cells, e := s.split(nil)
	if e != nil {
		problems.add(e)
	}
	s.header, s.columns = cells, s.columns[:0]
	for _, w := range want {
		if e != nil {
			break
		}
		b, e := s.find(w)
		if e != nil {
			problems.add(e)
		}
		s.columns = append(s.columns, b)
	}
	return problems
}

// next moves to the next row that has as many cells as the header. It returns
// false at the end of the text or after maxRows rows.
func (s *sheet) next() bool {
	for s.nextLine() {
		if s.skippable() {
			continue
		}
		cells, e := s.split(s.cells[:0])
		s.cells = cells
		if e == nil && s.blankRow() {
			continue
		}
		if e == nil {
			e = s.ragged()
		}
		if s.rows++; s.rows > maxRows {
			s.problems.add(s.errorAt(0, "", "", fmt.Sprintf("more than %d rows", maxRows), "thin the table, or check that it is the right file"))
			return false
		}
		if e == nil {
			return true
		}
		s.problems.add(e)
	}
	return false
}

// blankRow reports whether no cell holds anything: the delimiters that a
// spreadsheet writes for an empty row.
func (s *sheet) blankRow() bool {
	for _, c := range s.cells {
		if c.text != "" {
			return false
		}
	}
	return true
}

// ragged checks the number of cells against the header. Blank cells beyond the
// header are dropped.
func (s *sheet) ragged() *thermal.InputError {
	for len(s.cells) > len(s.header) && s.cells[len(s.cells)-1].text == "" {
		s.cells = s.cells[:len(s.cells)-1]
	}
	if len(s.cells) == len(s.header) {
		return nil
	}
	remedy := "give every row one cell a column"
	if s.delim == ',' && len(s.cells) > len(s.header) {
		remedy += "; if the commas are decimal, separate the columns by semicolons or tabs"
	}
	return s.errorAt(0, "", thermal.Shorten(s.text),
		fmt.Sprintf("%s where the header has %d", plural(len(s.cells), "cell"), len(s.header)), remedy)
}

// split appends the cells of the current line to dst. A cell may stand in
// double quotes, a quote inside it doubled, and must end on its line.
func (s *sheet) split(dst []cell) ([]cell, *thermal.InputError) {
	if len(s.text) > maxLine {
		return dst, s.errorAt(0, "", "", fmt.Sprintf("a line of more than %d bytes", maxLine), "want one row a line")
	}
	for at := 0; ; {
		if len(dst) >= maxCells {
			return dst, s.errorAt(at, "", "", fmt.Sprintf("more than %d columns", maxCells), "want one row a line")
		}
		c, end, f := s.cellFrom(at)
		if f != nil {
			return dst, s.errorAt(c.at, "", thermal.Shorten(s.text[c.at:]), f.problem, f.remedy)
		}
		dst = append(dst, c)
		if end == len(s.text) {
			return dst, nil
		}
		at = end + 1
	}
}

// cellFrom reads the cell that begins at an offset and returns the offset of
// the delimiter, or line's end, behind it.
func (s *sheet) cellFrom(at int) (c cell, end int, f *fault) {
	for at < len(s.text) && s.text[at] == ' ' {
		at++
	}
	if at < len(s.text) && s.text[at] == '"' {
		return s.quotedFrom(at)
	}
	end = len(s.text)
	if i := strings.IndexByte(s.text[at:], s.delim); i >= 0 {
		end = at + i
	}
	raw := s.text[at:end]
	text := strings.TrimSpace(raw)
	return cell{text, at + strings.Index(raw, text)}, end, nil
}

// quotedFrom reads the cell whose opening quote stands at an offset.
func (s *sheet) quotedFrom(at int) (c cell, end int, f *fault) {
	c.at = at
	var text strings.Builder
	for i := at + 1; i < len(s.text); i++ {
		switch {
		case s.text[i] != '"':
			text.WriteByte(s.text[i])
		case strings.HasPrefix(s.text[i+1:], `"`):
			text.WriteByte('"')
			i++
		default:
			c.text = strings.TrimSpace(text.String())
			end = i + 1
			for end < len(s.text) && s.text[end] == ' ' {
				end++
			}
			if end < len(s.text) && s.text[end] != s.delim {
				return c, end, &fault{"text behind the closing quote", `double a quote that belongs to the cell: ""`}
			}
			return c, end, nil
		}
	}
	return c, len(s.text), &fault{"the quote is not closed on its line", "close the quote, and keep each cell on one line"}
}

// number reads the current row's cell of the k-th wanted column as typed.
func (s *sheet) number(k int) (float64, bool) {
	v, f := s.parse(k, s.cells[s.columns[k].index].text)
	if f != nil {
		s.refuse(k, f.problem, f.remedy)
		return 0, false
	}
	return v, true
}

// parse reads a number from the current row's cell of the k-th wanted column.
func (s *sheet) parse(k int, text string) (float64, *fault) {
	v, f := s.numbers.parse(text)
	if f == nil && s.comma == nil && s.numbers.ambiguous() {
		s.comma = s.problemIn(k, "thousands set off, or a decimal comma",
			"write 1234 or 1.234; nothing else in the file tells which is meant")
	}
	return v, f
}

// refuse reports the current row's cell of the k-th wanted column.
func (s *sheet) refuse(k int, problem, remedy string) {
	s.problems.add(s.problemIn(k, problem, remedy))
}

func (s *sheet) problemIn(k int, problem, remedy string) *thermal.InputError {
	b := s.columns[k]
	c := s.cells[b.index]
	return s.errorAt(c.at, b.title, thermal.Shorten(c.text), problem, remedy)
}

// errorAt returns an error about what stands at an offset of the current line.
func (s *sheet) errorAt(offset int, field, value, problem, remedy string) *thermal.InputError {
	return &thermal.InputError{File: s.name, Line: s.line, Col: 1 + utf8.RuneCountInString(s.text[:offset]),
		Field: field, Value: value, Problem: problem, Remedy: remedy}
}

// finish returns what was wrong with the rows, and else notes how their
// numbers were read.
func (s *sheet) finish() error {
	if s.comma != nil && s.numbers.ambiguous() {
		s.problems.add(s.comma)
	}
	if err := s.problems.err(); err != nil {
		return err
	}
	if s.numbers.commas {
		s.note("decimal commas read")
	}
	if len(s.comments) > 0 {
		s.note("%s skipped, the first on line %d", plural(len(s.comments), "comment line"), s.comments[0])
	}
	return nil
}

// plural is a count with its noun.
func plural(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return fmt.Sprintf("%d %ss", n, noun)
}
