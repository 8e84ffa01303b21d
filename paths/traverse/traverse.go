package traverse

import (
	"fmt"
	"io"
	"math"
	"strings"

	"bankfire/thermal"
)

// Traverse is one element measured along a line from rim to centre, or a part
// of it.
type Traverse struct {
	Name        string    // of the file
	Unit        string    // of Value and Sigma, in its usual spelling
	Position    []float64 // m from the crystal's centre (a slab's inner end), rising or falling throughout as in the file; as typed, see Place
	Value       []float64
	Sigma       []float64 // one standard deviation, above 0
	Limit       []bool    // true: below detection, Value is the limit, Sigma that of a value at it, Value/3; nil = none
	Grey        bool      // relative values: an unknown scale and offset lie between Value and the element's unit
	Independent bool      // the errors of overlapping spots have nothing in common: counting errors
	Line        []int     // where each point stands in the file, from 1
	Spot        Spot
	Zero        Zero     // where positions count from in the file
	Size        float64  // position of the rim from the centre, m; 0 = not known
	Notes       []string // what was not taken exactly as typed
}

// Zero says where positions of the file count from.
type Zero int

// The places to count from. Centre is the zero value.
const (
	Centre Zero = iota // outwards from the centre, or from the inner end of a slab
	Rim                // inwards from the rim
)

// Place sets dst to the positions of the points, m from the centre, where the
// zero of the file is off by origin (m) and the line meets the boundaries at a
// slant of tilt (rad):
//
//	true distance from the zero = (typed distance + origin) cos tilt.
//
// Place(dst, 0, 0) is Position. It panics if dst is not as long as Position or
// if Size is needed and not known.
func (t *Traverse) Place(dst []float64, origin, tilt float64) {
	if len(dst) != len(t.Position) {
		panic(fmt.Sprintf("traverse: len(dst) %d != points %d", len(dst), len(t.Position)))
	}
	if t.Zero == Rim && !(t.Size > 0) {
		panic("traverse: positions count from a rim that is not known")
	}
	shrink := math.Cos(tilt)
	for i, x := range t.Position {
		if t.Zero == Rim {
			dst[i] = t.Size - float64((t.Size-x+origin)*shrink)
		} else {
			dst[i] = (x + origin) * shrink
		}
	}
}

// Below says what becomes of a value below detection, typed as "<5".
type Below int

// What becomes of values below detection. Words that stand for one without its
// limit ("bdl", "n.d.", "<LOD" and their like) can only be left out.
const (
	Undeclared Below = iota // refused
	AsLimit                 // kept as a limit, see Traverse.Limit
	LeftOut                 // left out and counted in the notes
)

// sigmasOfLimit is how many standard deviations of the blank a detection limit
// is taken to be: three, the usual definition (Long and Winefordner 1983, Anal.
// Chem. 55, 712A-724A). A true value mu is then reported as below a limit L with
// the likelihood Phi((L - mu)/s), s = L/3, Phi the normal distribution function.
const sigmasOfLimit = 3

// Options say how a file of a traverse is to be read.
type Options struct {
	Position string  // header of the positions, with its unit as in Column.Header
	Value    string  // header of the values, likewise
	Errors   Errors  // where the errors come from; it must say, unless Unstated
	Unstated bool    // nothing is known of the errors: Errors is not looked at, and Traverse.Sigma is nil
	Skip     string  // header of a column that marks rows to be left out; "" = there is none
	Below    Below   // what becomes of values below detection
	Zero     Zero    // where positions count from
	Size     float64 // position of the rim from the centre, m; needed for Rim, else 0 = not known yet
	Beyond   float64 // how far beyond the rim positions may lie because the zero is uncertain, m
	From, To float64 // rows to keep by position as in the file, m, ends included; both 0 = all
	Spot     Spot    // handed on
}

// Read reads a measured traverse from a text table; see [ReadColumns] for the
// kinds of table, what is noted and what is refused.
//
// Rows are left out, unread but for their position, if they are marked in the
// Skip column or outside the window; both are counted in the notes. A mark is
// "x", "1", "yes", "true" or "skip"; no mark is a blank, "0", "no" or "false".
// Also refused are positions that occur twice or turn back, positions beyond
// the rim if Size is known, errors that are not above zero, values below
// detection unless Options.Below says what becomes of them, and a file of which
// no value is left. Negative values are kept and noted: about a detection limit
// they are as honest as positive ones. Of a limit, the error column is not read.
//
// The error is a *thermal.InputError with file, line and column, or up to 20 of
// them joined; the traverse is then nil. Read panics if Options cannot be meant:
// Rim without a Size above 0, a window that ends before it begins, a Spot
// without a width.
func Read(name string, r io.Reader, o Options) (*Traverse, error) {
	o.check()
	want, err := o.columns(name)
	if err != nil {
		return nil, err
	}
	s, err := openSheet(name, r, want)
	if err != nil {
		return nil, err
	}
	unit := s.columns[valueColumn].unit
	d := reader{sheet: s, o: o, lines: map[float64]int{},
		t: &Traverse{Name: name, Unit: unit, Grey: unit == Grey, Spot: o.Spot, Zero: o.Zero, Size: o.Size}}
	if err := d.bindErrors(); err != nil {
		return nil, err
	}
	for s.next() {
		d.row()
	}
	if err := s.finish(); err != nil {
		return nil, err
	}
	if len(d.t.Position) == d.limits {
		return nil, d.noneLeft()
	}
	if o.Unstated {
		d.t.Sigma = nil
	}
	d.addNotes()
	return d.t, nil
}

func (o *Options) check() {
	o.Spot.check()
	switch {
	case o.Zero != Centre && o.Zero != Rim:
		panic(fmt.Sprintf("traverse: unknown zero %d", o.Zero))
	case !(o.Size >= 0) || !finite(o.Size) || o.Zero == Rim && o.Size == 0:
		panic(fmt.Sprintf("traverse: size of the crystal %g m", o.Size))
	case !(o.Beyond >= 0) || !finite(o.Beyond):
		panic(fmt.Sprintf("traverse: positions may lie %g m beyond the rim", o.Beyond))
	case !(o.From < o.To) && (o.From != 0 || o.To != 0):
		panic(fmt.Sprintf("traverse: window from %g to %g m", o.From, o.To))
	}
}

// Where the wanted columns stand in sheet.columns. Those that Options may leave
// out come after them, in this order: errors, numbers of analyses, marks.
const (
	positionColumn = iota
	valueColumn
	wantedColumns
)

func (o *Options) columns(name string) ([]Column, error) {
	if o.Unstated {
		o.Errors = Errors{}
	} else if err := o.Errors.check(name); err != nil {
		return nil, err
	}
	want := []Column{{o.Position, thermal.Length}, {o.Value, thermal.Concentration}}
	for _, more := range []Column{
		{o.Errors.Column, errorColumn}, {o.Errors.Counts, countColumn}, {o.Skip, flagColumn},
	} {
		if more.Header != "" {
			want = append(want, more)
		}
	}
	return want, nil
}

// reader turns the rows of a sheet into a traverse.
type reader struct {
	*sheet
	o                          Options
	t                          *Traverse
	lines                      map[float64]int // of the positions so far
	last                       float64         // position as in the file
	direction                  float64         // 1 rising, -1 falling, 0 not known yet
	turned                     bool            // a position that turns back has been reported
	constant, floor, perColumn float64         // in the unit of the values
	relative                   bool            // the error column is in per cent of each value
	marked, outside, negative  int
	limits, below              int // values below detection kept and left out
}

// row reads the current row into the traverse, or leaves it out.
func (d *reader) row() {
	if d.o.Skip != "" {
		if marked, ok := d.mark(len(d.columns) - 1); !ok || marked {
			return
		}
	}
	x, ok := d.quantity(positionColumn)
	if !ok {
		return
	}
	if (d.o.From != 0 || d.o.To != 0) && !(x >= d.o.From && x <= d.o.To) {
		d.outside++
		return
	}
	if !d.inOrder(x) {
		return
	}
	if d.isBelow() {
		d.takeBelow(x)
		return
	}
	v, ok := d.quantity(valueColumn)
	if !ok {
		return
	}
	if d.o.Unstated {
		d.keep(x, v, 0)
	} else if sigma, ok := d.sigma(v); ok {
		d.keep(x, v, sigma)
	}
}

func (d *reader) keep(x, v, sigma float64) {
	if v < 0 {
		d.negative++
	}
	if d.t.Limit != nil {
		d.t.Limit = append(d.t.Limit, false)
	}
	if d.o.Zero == Rim {
		x = d.o.Size - x
	}
	d.t.Position = append(d.t.Position, x)
	d.t.Value = append(d.t.Value, v)
	d.t.Sigma = append(d.t.Sigma, sigma)
	d.t.Line = append(d.t.Line, d.line)
}

// mark reads the k-th wanted column as a mark.
func (d *reader) mark(k int) (marked, ok bool) {
	switch strings.ToLower(d.cells[d.columns[k].index].text) {
	case "", "0", "no", "false":
		return false, true
	case "x", "1", "yes", "true", "skip":
		d.marked++
		return true, true
	}
	d.refuse(k, "neither a mark nor none", `write "x" to leave the row out, nothing to keep it`)
	return false, false
}

// inOrder checks a position against those before it and the rim. Only the
// first position that turns back is reported: those after it follow from it.
func (d *reader) inOrder(x float64) bool {
	if line, twice := d.lines[x]; twice {
		d.refuse(positionColumn, fmt.Sprintf("the same position as on line %d", line),
			"average the analyses of one place, or leave all but one out")
		return false
	}
	if d.beyondRim(x) {
		d.refuse(positionColumn, "beyond the rim, which is at "+micrometres(d.o.Size)+" from the centre",
			"check the unit, the zero and the widths of the zones, or set a window")
		return false
	}
	step := math.Copysign(1, x-d.last)
	if len(d.lines) > 0 && d.direction == 0 {
		d.direction = step
	}
	if d.direction != 0 && step != d.direction && !d.turned {
		d.turned = true
		d.refuse(positionColumn, fmt.Sprintf("turns back after line %d", d.lines[d.last]), "sort the rows by position")
		return false
	}
	d.lines[x], d.last = d.line, x
	return true
}

// beyondRim allows for round-off at the rim itself, as NewWeights does.
func (d *reader) beyondRim(x float64) bool {
	if d.o.Size == 0 {
		return false
	}
	if d.o.Zero == Rim {
		x = d.o.Size - x
	}
	return !(math.Abs(x) <= d.o.Size*(1+roundOff)+d.o.Beyond)
}

func (d *reader) noneLeft() error {
	if d.marked+d.outside+d.below+d.limits == 0 {
		return d.noRows()
	}
	return &thermal.InputError{File: d.name, Problem: fmt.Sprintf("no value is left: %d marked to be left out, %d outside the window, %d below detection",
		d.marked, d.outside, d.below+d.limits), Remedy: "want at least one"}
}

func (d *reader) addNotes() {
	if d.marked > 0 {
		d.note("%s left out by column %q", plural(d.marked, "row"), d.o.Skip)
	}
	if d.outside > 0 {
		d.note("%s outside the window %s to %s left out", plural(d.outside, "row"), micrometres(d.o.From), micrometres(d.o.To))
	}
	if d.below > 0 {
		d.note("%s below detection left out", plural(d.below, "value"))
	}
	if d.limits > 0 {
		d.note("%s below detection used as limits", plural(d.limits, "value"))
	}
	if d.negative > 0 {
		d.note("%s below zero kept", plural(d.negative, "value"))
	}
	d.noteErrors()
	d.t.Notes = d.notes
}
