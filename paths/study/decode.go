package study

import (
	"errors"
	"fmt"
	"slices"
	"strings"
	"unicode/utf8"

	"bankfire/thermal"
)

// At most maxProblems of one study are reported, the first by line of the
// maxKept that were found first.
const (
	maxProblems = 20
	maxKept     = 1000
)

// decoder turns the tree of a document into a Study. Its methods, one or a few
// a table, return what they could read and report what is wrong; nothing that
// they return is used once a problem was reported.
type decoder struct {
	file        string // the study as the user named it
	files       *files
	settings    []Setting             // the first is the study's own; legs have the number of one, from 1
	used        map[string]bool       // conditions that a law depends on
	laws        map[string]Law        // the study's own, by name
	partitions  map[string]Partition  // the same
	slopeSigmas map[string]slopeSigma // of laws with a name
	notes       []string
	measured    map[string]string // element and crystal that a traverse is of, by its file and columns
	hostIs      string            // what the host of the crystal is known to be, catalogue.XAn or XFe; "" is not known
	hostLine    int               // where it says so
	meant       map[string]bool   // dotted keys, with the place of their table, that a mistyped key stands for
	everyone    map[string]bool   // elements of all crystals
	copies      []scaledStart     // of the crystal that is being read
	legs        int               // of all paths so far
	open        *openLegs         // of the family that is being read; nil in a path
	fill        *filling          // of the crystals that are being read; nil elsewhere
	found       []*thermal.InputError
	faults      int // all found, kept or not
}

func (d *decoder) add(e *thermal.InputError) {
	if d.faults++; d.faults <= maxKept {
		d.found = append(d.found, e)
	}
}

// report adds a problem of the value n.
func (d *decoder) report(n *node, problem, remedy string) {
	value := ""
	if n.kind != tableNode && n.kind != arrayNode {
		value = thermal.Shorten(n.text)
	}
	d.add(d.place(n).Error(value, problem, remedy))
}

// reportKey adds a problem of a key, whatever its value.
func (d *decoder) reportKey(n *node, k *key, problem, remedy string) {
	p := thermal.Place{File: d.file, Line: k.line, Col: k.col, Field: join(n.field, k.name)}
	d.add(p.Error("", problem, remedy))
}

// reportError adds an error that came from reading the value n, at the places
// that it names itself and else at n.
func (d *decoder) reportError(n *node, err error) {
	var joined interface{ Unwrap() []error }
	if errors.As(err, &joined) {
		for _, e := range joined.Unwrap() {
			d.reportError(n, e)
		}
		return
	}
	var in *thermal.InputError
	switch {
	case !errors.As(err, &in):
		d.report(n, err.Error(), "")
	case in.File == "" && in.Line == 0:
		at := in.At(d.place(n))
		if at.Value == "" && n.kind == textNode {
			at.Value = n.text
		}
		at.Value = thermal.Shorten(at.Value)
		d.add(at)
	default:
		d.add(in)
	}
}

func (d *decoder) place(n *node) thermal.Place {
	return thermal.Place{File: d.file, Line: n.line, Col: n.col, Field: n.field}
}

func (d *decoder) note(format string, args ...any) {
	d.notes = append(d.notes, fmt.Sprintf(format, args...))
}

// noteOnce adds a note that is not there yet.
func (d *decoder) noteOnce(format string, args ...any) {
	if note := fmt.Sprintf(format, args...); !slices.Contains(d.notes, note) {
		d.notes = append(d.notes, note)
	}
}

// keys reports every key of the table n that its kind does not have.
func (d *decoder) keys(n *node, kind tableKind) { d.known(n, tables[kind].Keys) }

// known reports every key of the table n that is not among the known ones.
func (d *decoder) known(n *node, known []string) {
	for i := range n.keys {
		k := &n.keys[i]
		if slices.Contains(known, k.name) {
			continue
		}
		if later(join(n.field, k.name)) {
			d.reportKey(n, k, "not known in this version", "leave it out")
			continue
		}
		remedy := "known here: " + strings.Join(known, ", ")
		if near := nearest(k.name, known); near != "" {
			remedy = fmt.Sprintf("did you mean %q?", near)
			d.meant[keyOf(n, near)] = true
		}
		d.reportKey(n, k, "unknown key", remedy)
	}
}

// is reports whether n is of the kind. If it is of another it is a problem, and
// the remedy says what to write instead; no node is left to need.
func (d *decoder) is(n *node, kind nodeKind, remedy string) bool {
	switch {
	case n == nil:
		return false
	case n.kind == kind:
		return true
	}
	d.report(n, fmt.Sprintf("%s, not %s", n.kind, kind), remedy)
	return false
}

// keyOf tells a key of one table from all others.
func keyOf(n *node, name string) string {
	return fmt.Sprintf("%d:%d %s", n.line, n.col, join(n.field, name))
}

// need returns a value of the table n and reports it if it is missing, unless a
// mistyped key of the table was reported that stands for it.
func (d *decoder) need(n *node, name, remedy string) *node {
	v := n.get(name)
	if v == nil && !d.meant[keyOf(n, name)] {
		p := d.place(n)
		p.Field = join(n.field, name)
		d.add(p.Error("", "missing", remedy))
	}
	return v
}

// tables returns the tables of a list; a single table or anything else is
// reported.
func (d *decoder) tables(n *node, remedy string) []*node {
	if !d.is(n, arrayNode, remedy) {
		return nil
	}
	if len(n.items) == 0 {
		d.report(n, "an empty list", remedy)
	}
	var list []*node
	for _, item := range n.items {
		if d.is(item, tableNode, remedy) {
			list = append(list, item)
		}
	}
	return list
}

// text returns a text that is not empty.
func (d *decoder) text(n *node, remedy string) (string, bool) {
	if !d.is(n, textNode, remedy) {
		return "", false
	}
	if strings.TrimSpace(n.text) == "" {
		d.report(n, "empty", remedy)
		return "", false
	}
	return n.text, true
}

// name returns the name of a thing, which must be a line of text that does not
// look like a number.
func (d *decoder) name(n *node, remedy string) (string, bool) {
	text, ok := d.text(n, remedy)
	switch {
	case !ok:
	case text != strings.TrimSpace(text):
		d.report(n, "spaces around a name", remedy)
	case strings.ContainsFunc(text, func(r rune) bool { return r < ' ' || r == utf8.RuneError }):
		d.report(n, "a name must be one line of plain text", remedy)
	case utf8.RuneCountInString(text) > 200:
		d.report(n, "more than 200 characters", "write a shorter one")
	default:
		return text, true
	}
	return "", false
}

// unique reports a name that was used before.
func (d *decoder) unique(n *node, name string, seen map[string]int) {
	if line, twice := seen[name]; twice {
		d.report(n, fmt.Sprintf("used twice, first on line %d", line), "give each a name of its own")
		return
	}
	seen[name] = n.line
}

// bound is the range that a quantity must keep to.
type bound struct {
	dim     thermal.Dimension
	zero    bool    // zero is allowed
	top     float64 // largest, SI
	topText string
	example string
}

// The bounds of the quantities of a study: generous, but a mistyped unit shows.
var (
	temperature = bound{thermal.Temperature, false, 5000, "5000 K", "750 C"}
	duration    = bound{thermal.Duration, false, 1.4e10 * thermal.Year, "the age of the universe", "12 kyr"}
	pause       = bound{thermal.Duration, true, 1.4e10 * thermal.Year, "the age of the universe", "15 yr"}
	width       = bound{thermal.Length, false, 1, "1 m", "140 um"}
	edgeWidth   = bound{thermal.Length, true, 1, "1 m", "0 um"}
	fromMiddle  = bound{thermal.Length, true, 1e6, "1000 km", "3 m"}
	thickness   = bound{thermal.Length, false, 1e6, "1000 km", "20 m"}
	heat        = bound{thermal.Diffusivity, false, 1, "1 m2/s", "1e-6 m2/s"}
	frequency   = bound{thermal.Diffusivity, false, 1e12, "1e12 m2/s", "7e-8 m2/s"}
	exchange    = bound{thermal.Velocity, false, 1e12, "1e12 m/s", "1e-3 m/s"}
	energy      = bound{thermal.MolarEnergy, true, 2e6, "2000 kJ/mol", "273 kJ/mol"}
)

// quantity returns a quantity with its unit within bounds, in SI; 0 if it is
// not one.
func (d *decoder) quantity(n *node, b bound) (float64, bool) {
	if n == nil {
		return 0, false
	}
	if n.kind == numberNode {
		d.report(n, "a number without a unit", fmt.Sprintf("write it in quotes with its unit, such as %q", b.example))
		return 0, false
	}
	if d.isOpen(n) {
		return d.openQuantity(n, b)
	}
	if !d.is(n, textNode, fmt.Sprintf("write it like %q", b.example)) || d.braced(n) {
		return 0, false
	}
	x, err := thermal.ParseQuantity(n.text, b.dim)
	if err != nil {
		d.reportError(n, err)
		return 0, false
	}
	if !d.within(n, x, b) {
		return 0, false
	}
	return x, true
}

// braced reports braces where no family fills them.
func (d *decoder) braced(n *node) bool {
	if !strings.ContainsAny(n.text, "{}") {
		return false
	}
	d.report(n, "in braces, but nothing fills them here", "write a value; braces may stand in a [[family]], and in starts, rims and moments of crystals")
	return true
}

func (d *decoder) within(n *node, x float64, b bound) bool {
	switch {
	case x < 0:
		d.report(n, "below zero", fmt.Sprintf("want something like %q", b.example))
	case x == 0 && !b.zero:
		d.report(n, "zero", fmt.Sprintf("want more than zero, such as %q", b.example))
	case !(x <= b.top):
		d.report(n, "more than "+b.topText, "check the unit")
	default:
		return true
	}
	return false
}

// Extremes of plain numbers, which no factor or scatter needs to pass.
const leastNumber, mostNumber = 1e-12, 1e12

// number returns a plain number above zero.
func (d *decoder) number(n *node, remedy string) (float64, bool) {
	if !d.is(n, numberNode, remedy) {
		return 0, false
	}
	if !(n.number >= leastNumber && n.number <= mostNumber) {
		d.report(n, "not a usable number above zero", remedy)
		return 0, false
	}
	return n.number, true
}

// moment returns a moment of a path, such as "end of wake 1".
func (d *decoder) moment(n *node) (*thermal.Moment, bool) {
	if d.isOpen(n) && d.open == nil {
		return d.filledMoment(n)
	}
	text, ok := d.text(n, `write a moment, such as "4 kyr after start"`)
	if !ok || d.braced(n) {
		return nil, false
	}
	m, err := thermal.ParseMoment(text)
	if err != nil {
		d.reportError(n, err)
		return nil, false
	}
	return &m, true
}
