package study

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/pelletier/go-toml/v2/unstable"
)

// Bounds that no honest study comes near; they keep a wrong or hostile file
// from costing more than a moment.
const (
	maxStudyBytes = 4 << 20
	maxValues     = 400_000
	maxDepth      = 64
)

// document builds the tree of one TOML text.
type document struct {
	parser unstable.Parser
	data   []byte
	lines  []int // offset of the start of each line
	root   *node
	here   *node // the table that the last header opened
	count  int
	last   struct{ line, offset, col int } // the place found last
}

// syntaxError is what stops the reading of a document. Line and column may be 0.
type syntaxError struct {
	line, col       int
	field           string
	value           string
	problem, remedy string
}

func (e *syntaxError) Error() string { return e.problem }

// parseDocument reads a TOML text into its tree of nodes. The error is a
// *syntaxError: a document with one cannot be read further.
func parseDocument(data []byte) (*node, error) {
	d := &document{data: data, root: &node{line: 1, col: 1, source: headerSource}}
	d.here = d.root
	if err := d.plain(); err != nil {
		return nil, err
	}
	d.parser.Reset(d.data)
	for d.parser.NextExpression() {
		if err := d.expression(d.parser.Expression()); err != nil {
			return nil, err
		}
	}
	if err := d.parser.Error(); err != nil {
		return nil, d.parserError(err)
	}
	return d.root, nil
}

// plain refuses what is no text, takes a byte-order mark off and finds the
// lines.
func (d *document) plain() error {
	switch {
	case len(d.data) > maxStudyBytes:
		return &syntaxError{problem: fmt.Sprintf("larger than %d MiB", maxStudyBytes>>20),
			remedy: "name a study file; tables of data belong in files of their own"}
	case bytes.HasPrefix(d.data, []byte{0xff, 0xfe}) || bytes.HasPrefix(d.data, []byte{0xfe, 0xff}):
		return &syntaxError{line: 1, problem: "the text is UTF-16", remedy: "save the study as UTF-8"}
	}
	d.data = bytes.TrimPrefix(d.data, []byte("\xef\xbb\xbf"))
	d.lines = []int{0}
	for i, b := range d.data {
		if b == '\n' {
			d.lines = append(d.lines, i+1)
		}
	}
	if i := bytes.IndexByte(d.data, 0); i >= 0 {
		return d.errorAt(i, "", "not a text: it holds a zero byte", "name a study file, in TOML as UTF-8")
	}
	if !utf8.Valid(d.data) {
		return d.errorAt(firstInvalid(d.data), "", "not UTF-8", "save the study as UTF-8")
	}
	if len(bytes.TrimSpace(d.data)) == 0 {
		return &syntaxError{problem: "the file is empty", remedy: "write at least one [[path]] and one [[crystal]]"}
	}
	return nil
}

func firstInvalid(data []byte) int {
	for i := 0; i < len(data); {
		r, size := utf8.DecodeRune(data[i:])
		if r == utf8.RuneError && size == 1 {
			return i
		}
		i += size
	}
	return len(data)
}

// place returns line and column, in characters, of an offset; both from 1. Most
// places are asked for in the order of the text, so it counts on from the last.
func (d *document) place(offset int) (line, col int) {
	lo, hi := 0, len(d.lines) // the line is in [lo, hi)
	for hi-lo > 1 {
		if mid := (lo + hi) / 2; d.lines[mid] <= offset {
			lo = mid
		} else {
			hi = mid
		}
	}
	line, col = lo+1, 1
	from := d.lines[lo]
	if line == d.last.line && d.last.offset <= offset {
		from, col = d.last.offset, d.last.col
	}
	col += utf8.RuneCount(d.data[from:offset])
	d.last.line, d.last.offset, d.last.col = line, offset, col
	return line, col
}

func (d *document) errorAt(offset int, field, problem, remedy string) error {
	line, col := d.place(offset)
	return &syntaxError{line: line, col: col, field: field, problem: problem, remedy: remedy}
}

func (d *document) parserError(err error) error {
	var p *unstable.ParserError
	if !errors.As(err, &p) {
		return &syntaxError{problem: err.Error()}
	}
	offset := min(cap(d.data)-cap(p.Highlight), len(d.data))
	return d.errorAt(max(offset, 0), "", "not TOML: "+p.Message,
		`close quotes and brackets, and write quantities in quotes: "800 yr"`)
}

// expression adds one top-level expression: a header or a key with its value.
func (d *document) expression(e *unstable.Node) error {
	switch e.Kind {
	case unstable.Table:
		return d.header(e)
	case unstable.ArrayTable:
		return d.listHeader(e)
	default:
		return d.keyValue(d.here, e, 1)
	}
}

// part is one part of a dotted key.
type part struct {
	name   string
	offset int
}

func parts(e *unstable.Node) []part {
	var list []part
	for it := e.Key(); it.Next(); {
		list = append(list, part{string(it.Node().Data), int(it.Node().Raw.Offset)})
	}
	return list
}

func (d *document) header(e *unstable.Node) error {
	list := parts(e)
	t, err := d.walk(d.root, list[:len(list)-1], pathSource)
	if err != nil {
		return err
	}
	last := list[len(list)-1]
	n := t.get(last.name)
	switch {
	case n == nil:
		n, err = d.newTable(t, last, headerSource)
	case n.kind == tableNode && n.source == pathSource:
		n.source = headerSource
		n.line, n.col = d.place(last.offset)
	default:
		return d.twice(last, n)
	}
	d.here = n
	return err
}

func (d *document) listHeader(e *unstable.Node) error {
	list := parts(e)
	t, err := d.walk(d.root, list[:len(list)-1], pathSource)
	if err != nil {
		return err
	}
	last := list[len(list)-1]
	n := t.get(last.name)
	if n == nil {
		line, col := d.place(last.offset)
		n = t.add(key{last.name, line, col, &node{kind: arrayNode, line: line, col: col,
			field: join(t.field, last.name), source: headerSource}})
	}
	if n.kind != arrayNode || n.source != headerSource {
		return d.twice(last, n)
	}
	d.here, err = d.counted(&node{field: n.field, source: headerSource}, last.offset)
	n.items = append(n.items, d.here)
	return err
}

// walk goes down from t along the parts of a key, making the tables that are
// missing. A list made by headers stands for its last table.
func (d *document) walk(t *node, list []part, made tableSource) (*node, error) {
	for i, p := range list {
		if i >= maxDepth {
			return nil, d.tooDeep(p.offset)
		}
		n := t.get(p.name)
		switch {
		case n == nil:
			var err error
			if n, err = d.newTable(t, p, made); err != nil {
				return nil, err
			}
		case n.kind == arrayNode && n.source == headerSource && made == pathSource:
			n = n.items[len(n.items)-1]
		case n.kind != tableNode || n.source == closedSource || made == dottedSource && n.source != dottedSource:
			return nil, d.twice(p, n)
		}
		t = n
	}
	return t, nil
}

func (d *document) newTable(t *node, p part, source tableSource) (*node, error) {
	n, err := d.counted(&node{field: join(t.field, p.name), source: source}, p.offset)
	return t.add(key{p.name, n.line, n.col, n}), err
}

func (d *document) keyValue(t *node, e *unstable.Node, depth int) error {
	list := parts(e)
	t, err := d.walk(t, list[:len(list)-1], dottedSource)
	if err != nil {
		return err
	}
	last := list[len(list)-1]
	if old := t.get(last.name); old != nil {
		return d.twice(last, old)
	}
	line, col := d.place(last.offset)
	end := int(e.Raw.Offset) + int(e.Raw.Length)
	v, err := d.value(e.Value(), join(t.field, last.name), d.valueOffset(last.offset, end), depth+len(list))
	if err != nil {
		return err
	}
	t.add(key{last.name, line, col, v})
	return nil
}

// valueOffset finds where the value of a key begins: after the equals sign
// behind the key's last part, which may be quoted.
func (d *document) valueOffset(from, end int) int {
	i := from
	if q := d.data[i]; q == '"' || q == '\'' {
		for i++; i < end && d.data[i] != q; i++ {
			if q == '"' && d.data[i] == '\\' {
				i++
			}
		}
	}
	for ; i < end && d.data[i] != '='; i++ {
	}
	for i++; i < end && (d.data[i] == ' ' || d.data[i] == '\t'); i++ {
	}
	return min(i, end)
}

func (d *document) value(e *unstable.Node, field string, offset, depth int) (*node, error) {
	if e.Raw.Length > 0 {
		offset = int(e.Raw.Offset)
	}
	if depth > maxDepth {
		return nil, d.tooDeep(offset)
	}
	n, err := d.counted(&node{field: field, text: string(e.Data)}, offset)
	if err != nil {
		return nil, err
	}
	switch e.Kind {
	case unstable.InlineTable:
		return n, d.inlineTable(n, e, depth)
	case unstable.Array:
		return n, d.list(n, e, offset, depth)
	case unstable.String:
		n.kind = textNode
	case unstable.Integer, unstable.Float:
		numberValue(n, e)
	case unstable.Bool:
		n.kind = boolNode
	default:
		n.kind = dateNode
	}
	return n, nil
}

func (d *document) inlineTable(n *node, e *unstable.Node, depth int) error {
	for it := e.Children(); it.Next(); {
		if err := d.keyValue(n, it.Node(), depth); err != nil {
			return err
		}
	}
	closeTables(n)
	return nil
}

// closeTables closes an inline table and those that dotted keys made in it.
func closeTables(n *node) {
	n.source = closedSource
	for _, k := range n.keys {
		if k.value.source == dottedSource {
			closeTables(k.value)
		}
	}
}

func (d *document) list(n *node, e *unstable.Node, offset, depth int) error {
	n.kind = arrayNode
	for it := e.Children(); it.Next(); {
		item, err := d.value(it.Node(), n.field, offset, depth+1)
		if err != nil {
			return err
		}
		n.items = append(n.items, item)
	}
	return nil
}

func numberValue(n *node, e *unstable.Node) {
	n.kind, n.whole = numberNode, e.Kind == unstable.Integer
	text := strings.ReplaceAll(n.text, "_", "")
	var err error
	if n.whole {
		var i int64
		i, err = strconv.ParseInt(text, 0, 64)
		n.number = float64(i)
	} else {
		n.number, err = strconv.ParseFloat(text, 64)
	}
	if err != nil || math.IsNaN(n.number) || math.IsInf(n.number, 0) {
		n.kind = strayNode
	}
}

// counted counts one more node, gives it its place, and fails when there are
// too many.
func (d *document) counted(n *node, offset int) (*node, error) {
	n.line, n.col = d.place(offset)
	if d.count++; d.count > maxValues {
		return n, d.errorAt(offset, "", fmt.Sprintf("more than %d values in one study", maxValues),
			"put tables of data in files of their own")
	}
	return n, nil
}

func (d *document) tooDeep(offset int) error {
	return d.errorAt(offset, "", fmt.Sprintf("nested more than %d levels deep", maxDepth),
		"no part of a study needs that many")
}

func (d *document) twice(p part, old *node) error {
	line, col := d.place(p.offset)
	return &syntaxError{line: line, col: col, field: join("", p.name),
		problem: fmt.Sprintf("given twice, first on line %d", old.line), remedy: "keep one of them"}
}
