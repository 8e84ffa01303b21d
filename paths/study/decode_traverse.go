package study

import (
	"fmt"
	"math"
	"slices"

	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// traverse reads the measured traverse of an element and its file.
func (d *decoder) traverse(n *node, c *Crystal, e *Element, u *units) {
	const example = `write traverse = { file = "ti.csv", position = "distance [um]", zero = "rim", value = "Ti [ppm]", error = "4 %", spot = "1 um fwhm" }`
	if !d.is(n, tableNode, example) {
		return
	}
	if d.again() {
		d.remeasured(n, e, u)
		return
	}
	before := d.faults
	d.keys(n, traverseTable)
	e.Tilt = d.nuisance(n.get("tilt"), tiltLatitude())
	e.Origin = d.nuisance(n.get("origin"), originLatitude())
	e.Scatter = d.scatter(n.get("scatter"))
	independent := d.independent(n.get("overlap"))
	o := d.options(n, c)
	o.Beyond = e.Origin.outwards(o.Zero)
	file := d.need(n, "file", `name the file, such as file = "ti.csv"`)
	if d.faults > before || !c.sized() {
		return
	}
	label, r, ok := d.dataFile(file)
	if !ok {
		return
	}
	t, err := traverse.Read(label, r, o)
	if err != nil {
		d.unread(n, err)
		return
	}
	t.Independent = independent
	d.component(n.get("value"), t, u, o.Value)
	t.Notes = d.named(file, label, t.Notes)
	d.notes = append(d.notes, t.Notes...)
	d.reach(file, t, c, e)
	e.Traverse = t
	d.twiceMeasured(n, c, e)
	if !t.Grey && d.faults == before { // else the unit may be the fault
		u.unit, u.from = t.Unit, n.get("value")
	}
}

// unread reports what is wrong with the file of the traverse n; where it is the
// stated errors that do not go with the file, at these.
func (d *decoder) unread(n *node, err error) {
	if in, ok := err.(*thermal.InputError); ok && in.Line == 0 && in.Field == "error" {
		bare := *in
		bare.File, bare.Field = "", ""
		d.reportError(n.get("error"), &bare)
		return
	}
	d.reportError(n.get("file"), err)
}

// options reads how the file of a traverse is to be read.
func (d *decoder) options(n *node, c *Crystal) traverse.Options {
	o := traverse.Options{Size: c.Size()}
	o.Position, _ = d.text(d.need(n, "position", `name the column of positions, such as position = "distance [um]"`), "name the column of positions")
	o.Value = d.valueColumn(n, `name the column of values, such as value = "Ti [ppm]"`)
	o.Zero = d.zero(d.need(n, "zero", `say where positions count from: zero = "rim" or zero = "centre"`))
	o.Errors = d.errors(d.need(n, "error", `write one standard deviation: error = "4 %", "1.5 ppm" or { column = "2se [ppm]", sigmas = 2 }`), errorTable)
	o.Spot = d.spot(d.need(n, "spot", `write what one analysis averages over: spot = "0.8 um fwhm", "15 um top-hat" or "point"`))
	o.Below = d.below(n.get("below"))
	if v := n.get("window"); v != nil {
		o.From, o.To = d.window(v)
	}
	if v := n.get("skip"); v != nil {
		o.Skip, _ = d.text(v, "name the column that marks rows to leave out")
	}
	return o
}

// scatter reads whether scatter beyond the errors is fitted.
func (d *decoder) scatter(n *node) bool {
	const remedy = `write scatter = "free", or leave it out`
	if !d.is(n, textNode, remedy) {
		return false
	}
	if n.text != "free" {
		d.report(n, "no scatter that can be stated", remedy)
	}
	return true
}

// independent reads whether the errors of overlapping spots have nothing in
// common.
func (d *decoder) independent(n *node) bool {
	const remedy = `write overlap = "independent" for counting errors, or "shared" for those of an uneven sample`
	if !d.is(n, textNode, remedy) {
		return false
	}
	if n.text != "independent" && n.text != "shared" {
		d.report(n, "no way in which errors overlap", remedy)
	}
	return n.text == "independent"
}

// below reads what becomes of values below detection.
func (d *decoder) below(n *node) traverse.Below {
	const remedy = `write "limit" or "skip"`
	if n == nil {
		return traverse.Undeclared
	}
	text, ok := d.text(n, remedy)
	switch {
	case !ok:
	case text == "limit":
		return traverse.AsLimit
	case text == "skip":
		return traverse.LeftOut
	default:
		d.reportWord(n, "no way to take values below detection", []string{"limit", "skip"}, remedy)
	}
	return traverse.Undeclared
}

// sureSigmas is how many standard deviations an uncertain origin may be off.
const sureSigmas = 3

// outwards returns how far beyond the rim a typed position may lie, m, because
// the origin can bring it back.
func (n Nuisance) outwards(zero traverse.Zero) float64 {
	lo, hi := n.Value-sureSigmas*n.Sigma, n.Value+sureSigmas*n.Sigma
	if n.Ranged() {
		lo, hi = n.Lo, n.Hi
	}
	if zero == traverse.Rim {
		return max(0, hi)
	}
	return max(0, -lo)
}

// positionSlack is round-off of positions, which are sums of typed widths, as a part of them.
const positionSlack = 1e-9

// reach reports a traverse that leaves the piece of crystal through its inner
// end, and one that its origin moves out of the rim. A range of origins is cut
// to where all points are in the crystal.
func (d *decoder) reach(file *node, t *traverse.Traverse, c *Crystal, e *Element) {
	at := make([]float64, len(t.Position))
	t.Place(at, e.Origin.Middle(), e.Tilt.Middle())
	for i, x := range at {
		place := thermal.Place{File: d.files.path(file.text), Line: t.Line[i], Field: "position"}
		switch {
		case c.R0 > 0 && x < c.R0*(1-positionSlack) && e.Origin.Fixed():
			d.add(place.Error("", fmt.Sprintf("%.6g um from the centre, inside the inner radius", x*1e6),
				"set a window, or check the widths of the zones"))
			return
		case math.Abs(x) > c.Size()*(1+positionSlack) && e.Origin.Fixed():
			d.add(place.Error("", fmt.Sprintf("%.6g um from the centre once it is moved by the origin, beyond the rim at %.6g um", x*1e6, c.Size()*1e6),
				"check the sign of the origin: it is added to every position of the file"))
			return
		}
	}
	if e.Origin.Ranged() {
		d.cutOrigin(file, t, c, e)
	}
}

// cutOrigin leaves of a range of origins the part that keeps all points within
// the rim.
func (d *decoder) cutOrigin(file *node, t *traverse.Traverse, c *Crystal, e *Element) {
	outermost := slices.Max(t.Position)
	lo, hi := e.Origin.Lo, e.Origin.Hi
	if t.Zero == traverse.Rim {
		lo = max(lo, outermost-c.Size())
	} else {
		hi = min(hi, c.Size()-outermost)
	}
	switch {
	case !(lo < hi):
		d.report(file, "no origin in its range has all points in the crystal", "check the sign of the range and the zero")
		return
	case lo > e.Origin.Lo || hi < e.Origin.Hi:
		d.note("%s: the origin is free from %.4g to %.4g um only, since all points lie in the crystal", e.Name, lo*1e6, hi*1e6)
	}
	e.Origin.Lo, e.Origin.Hi = lo, hi
}

// valueColumn reads the header of the column of values; its unit may stand
// beside it.
func (d *decoder) valueColumn(n *node, remedy string) string {
	v := n.get("value")
	header, ok := d.text(d.need(n, "value", remedy), remedy)
	unit := n.get("unit")
	if !ok || unit == nil {
		return header
	}
	name := d.concentrationUnit(unit)
	if _, given := traverse.SplitHeader(header, thermal.Concentration); given != "" {
		d.report(v, "its unit is given here and under unit", "give it once")
	}
	return header + " [" + name + "]"
}

func (d *decoder) zero(n *node) traverse.Zero {
	const remedy = `write "rim" or "centre"`
	text, ok := d.text(n, remedy)
	switch {
	case !ok || text == "centre":
	case text == "rim":
		return traverse.Rim
	case text == "center":
		d.report(n, "spelt centre here", `write "centre"`)
	default:
		d.reportWord(n, "no place to count from", []string{"rim", "centre"}, remedy)
	}
	return traverse.Centre
}

func (d *decoder) spot(n *node) traverse.Spot {
	text, ok := d.text(n, `write it like "0.8 um fwhm", "0.3 um sigma", "15 um top-hat" or "point"`)
	if !ok {
		return traverse.Spot{}
	}
	s, err := traverse.ParseSpot(text)
	switch {
	case err != nil:
		d.reportError(n, err)
		return traverse.Spot{}
	case s.Kind != traverse.Point && s.Width < atom:
		d.report(n, "narrower than an atom", `check the unit, or write "point"`)
	case s.Width > width.top:
		d.report(n, "wider than "+width.topText, "check the unit")
	}
	return s
}

func (d *decoder) window(n *node) (lo, hi float64) {
	const remedy = `write the positions to keep, such as "20..60 um"`
	text, ok := d.text(n, remedy)
	if !ok {
		return 0, 0
	}
	lo, hi, err := thermal.ParseRange(text, thermal.Length)
	if err != nil {
		d.reportError(n, err)
		return 0, 0
	}
	return lo, hi
}

// errors reads what one standard deviation of the values is: a text, or a
// table of a column or a size, with or without a floor.
func (d *decoder) errors(n *node, kind tableKind) traverse.Errors {
	const remedy = `write error = "4 %", "1.5 ppm", { column = "2se [ppm]", sigmas = 2 } or { size = "4 %", floor = "0.5 ppm" }`
	switch {
	case n == nil:
		return traverse.Errors{}
	case n.kind == numberNode:
		d.report(n, "a number without a unit", remedy)
		return traverse.Errors{}
	case n.kind == tableNode:
		return d.errorTable(n, kind, remedy)
	}
	return d.errorText(n, remedy)
}

func (d *decoder) errorText(n *node, remedy string) traverse.Errors {
	text, ok := d.text(n, remedy)
	if !ok {
		return traverse.Errors{}
	}
	e, err := traverse.ParseErrors(text)
	if err != nil {
		d.reportError(n, err)
	}
	return e
}

func (d *decoder) errorTable(n *node, kind tableKind, remedy string) traverse.Errors {
	d.keys(n, kind)
	var e traverse.Errors
	column, size := n.get("column"), n.get("size")
	switch {
	case column != nil && size != nil:
		d.report(size, "a column of errors is given as well", "keep one of them")
	case column != nil:
		e.Column, _ = d.text(column, "name the column of errors")
		d.analyses(n.get("analyses"), &e)
		if v := n.get("sigmas"); v != nil || n.get("analyses") == nil {
			e.Sigmas = d.sigmas(d.need(n, "sigmas", "say what the column holds: sigmas = 1 or sigmas = 2"))
		}
	case size != nil:
		e = d.errorText(size, remedy)
		for _, key := range []string{"sigmas", "analyses"} {
			if v := n.get(key); v != nil {
				d.report(v, "goes with a column", "leave it out: the error is one standard deviation")
			}
		}
	default:
		d.report(n, "no errors given", remedy)
	}
	if v := n.get("floor"); v != nil {
		if text, ok := d.text(v, `write the least error, such as floor = "0.5 ppm"`); ok {
			var err error
			if e.Floor, err = traverse.ParseAmount(text); err != nil {
				d.reportError(v, err)
			}
		}
	}
	return e
}

// analyses reads how many analyses each value is the mean of: a number, or the
// name of a column of numbers.
func (d *decoder) analyses(n *node, e *traverse.Errors) {
	const remedy = "write how many analyses each value is the mean of, such as analyses = 5, or the name of the column that says it"
	switch {
	case n == nil:
	case n.kind == textNode:
		e.Counts, _ = d.text(n, remedy)
	case !d.is(n, numberNode, remedy):
	case !n.whole || n.number < 1 || n.number > 1e6:
		d.report(n, "not a number of analyses", remedy)
	default:
		e.Analyses = n.number
	}
}

func (d *decoder) sigmas(n *node) float64 {
	const remedy = "write sigmas = 1 or sigmas = 2"
	if !d.is(n, numberNode, remedy) {
		return 0
	}
	if n.number != 1 && n.number != 2 {
		d.report(n, "neither 1 nor 2", remedy)
		return 0
	}
	return n.number
}
