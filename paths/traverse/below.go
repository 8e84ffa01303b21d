package traverse

import (
	"fmt"
	"slices"
	"strings"
)

// belowWords stand for a value below a limit that is not given.
var belowWords = []string{"bd", "b.d.", "bdl", "b.d.l.", "blod", "nd", "n.d.", "<dl", "<lod", "<mdl", "<ld"}

func belowWord(text string) bool { return slices.Contains(belowWords, strings.ToLower(text)) }

// isBelow reports whether the current row's value is typed as below detection.
func (d *reader) isBelow() bool {
	text := d.cells[d.columns[valueColumn].index].text
	return strings.HasPrefix(text, "<") || belowWord(text)
}

// takeBelow keeps the current row, at position x of the file, as a limit or
// leaves it out, as declared.
func (d *reader) takeBelow(x float64) {
	text := d.cells[d.columns[valueColumn].index].text
	word := belowWord(text)
	switch {
	case word && d.o.Below != LeftOut:
		d.refuse(valueColumn, "below a limit that is not given", `write the limit, such as "<5", or below = "skip" in the study to leave such rows out`)
	case d.o.Below == Undeclared:
		d.refuse(valueColumn, "below detection, and the study does not say what becomes of it",
			`write below = "limit" in the traverse to use it as a limit, or below = "skip" to leave such rows out`)
	case word:
		d.below++
	default:
		if limit, ok := d.limit(strings.TrimSpace(text[1:])); ok {
			d.keepLimit(x, limit)
		}
	}
}

// limit reads a detection limit in the unit of the values.
func (d *reader) limit(text string) (float64, bool) {
	v, f := d.parse(valueColumn, text)
	if f != nil {
		d.refuse(valueColumn, f.problem, `write the limit as a number, such as "<5"`)
		return 0, false
	}
	most := Whole(d.t.Unit)
	if !(v/sigmasOfLimit >= leastError*most && v <= most) {
		d.refuse(valueColumn, fmt.Sprintf("not a limit between zero and the whole, which is %g %s", most, d.t.Unit), `write the limit of detection, such as "<5"`)
		return 0, false
	}
	return v, true
}

// keepLimit keeps a limit, or counts it where limits are left out.
func (d *reader) keepLimit(x, limit float64) {
	if d.o.Below == LeftOut {
		d.below++
		return
	}
	if d.t.Limit == nil {
		d.t.Limit = make([]bool, len(d.t.Position))
	}
	d.keep(x, limit, limit/sigmasOfLimit)
	d.t.Limit[len(d.t.Limit)-1] = true
	d.limits++
}
