package study

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"bankfire/paths/draw"
	"bankfire/thermal"
)

// defaultSeed is that of a family where the study states none.
const defaultSeed = 1

// mostMembers is the largest family.
const mostMembers = 1_000_000_000

// openLegs collects the places of a family's legs that its values fill.
type openLegs struct {
	names  names
	middle []float64 // of each value, with which the legs are checked
	at     []int     // the leg that is being read
	holes  []hole
	random []randomReheats
}

// enter and leave follow the reading of legs inside legs; of a path there is
// nothing to follow.
func (o *openLegs) enter(i int) {
	if o != nil {
		o.at = append(o.at, i)
	}
}

func (o *openLegs) leave() {
	if o != nil {
		o.at = o.at[:len(o.at)-1]
	}
}

// times is the bound of how often legs are repeated.
var times = bound{zero: false, top: thermal.MaxLegs, topText: fmt.Sprint(thermal.MaxLegs), example: "3"}

// isOpen reports whether the value is one that a family fills.
func (d *decoder) isOpen(n *node) bool {
	return (d.open != nil || d.fill != nil) && n != nil && n.kind == textNode && strings.ContainsAny(n.text, "{}")
}

// openQuantity reads a value of a leg or of a crystal that a family fills.
func (d *decoder) openQuantity(n *node, b bound) (float64, bool) {
	if d.open == nil {
		return d.filledQuantity(n, n.text, b)
	}
	return d.hole(n, b)
}

// hole reads a value of a leg that a family fills, and returns what it is in the
// middle of the family.
func (d *decoder) hole(n *node, b bound) (float64, bool) {
	if strings.Contains(n.field, ".conditions.") {
		d.report(n, "conditions do not vary within a family", "write a value")
		return 0, false
	}
	e, ok := d.holeText(n, n.text, b)
	if !ok {
		return 0, false
	}
	key := n.field[strings.LastIndex(n.field, ".legs.")+len(".legs."):]
	d.open.holes = append(d.open.holes, hole{at: slices.Clone(d.open.at), key: key, value: e, bound: b,
		words: fmt.Sprintf("%s = %q on line %d", key, n.text, n.line)})
	x := e.at(d.open.middle)
	if b == times {
		return math.Max(1, math.Min(math.Round(x), b.top)), true
	}
	if !(x > 0) || x > b.top { // a member of its own matter
		x, _ = thermal.ParseQuantity(b.example, b.dim)
	}
	return x, true
}

// holeText reads the expression in n for a value with the bound.
func (d *decoder) holeText(n *node, text string, b bound) (expression, bool) {
	e, m, refused := d.open.names.parse(text)
	want := measure{plain: b == times || b == howMany, dim: b.dim}
	switch {
	case refused != nil:
		refused.Value = thermal.Shorten(n.text)
		d.add(refused.At(d.place(n)))
	case !m.like(want):
		d.report(n, fmt.Sprintf("%s where %s belongs", m, want), fmt.Sprintf("want something like %q", b.example))
	case b == times && !m.whole:
		d.report(n, "not always a whole number", "give the ends of its range as whole numbers, such as from = 1, to = 20")
	default:
		return e, true
	}
	return e, false
}

// families reads every [[family]]. The eruption and the seed of the study's top
// level hold for those that have none of their own.
func (d *decoder) families(root *node, seen map[string]int) []Family {
	if s := root.get("seed"); s != nil {
		d.seed(s)
	}
	list := root.get("family")
	if list == nil {
		return nil
	}
	var out []Family
	for _, n := range d.tables(list, `begin each family with "[[family]]"`) {
		out = append(out, d.family(n, root, seen))
	}
	return out
}

func (d *decoder) family(n, root *node, seen map[string]int) Family {
	d.keys(n, familyTable)
	f := Family{Place: d.place(n), Seed: defaultSeed}
	if v := d.need(n, "name", `write a name, such as name = "cooler but longer"`); v != nil {
		var ok bool
		if f.Name, ok = d.name(v, `write a name, such as "cooler but longer"`); ok {
			d.unique(v, f.Name, seen)
		}
	}
	if s := cmpNode(n.get("seed"), root.get("seed")); s != nil {
		f.Seed = d.seed(s)
	}
	d.open = &openLegs{}
	defer func() { d.open = nil }()
	before := d.faults
	vary := n.get("vary")
	if !atRandom(n) {
		vary = d.need(n, "vary", `write [family.vary] with the values that are open, such as store = { from = "640 C", to = "740 C" }`)
	}
	d.vary(vary, &f)
	if d.faults > before {
		return f
	}
	f.vary, f.names, f.middle = vary, d.open.names, d.open.middle
	f.specs = d.legList(n, 1)
	if e := cmpNode(n.get("eruption"), root.get("eruption")); e != nil {
		d.familyEruption(e, &f)
	}
	f.holes, f.random = d.open.holes, d.open.random
	f.markUsed()
	d.counted(&f)
	d.draw(d.need(n, "draw", `write draw = { method = "halton", count = 20000 }`), &f)
	return f
}

// cmpNode is the first that is there.
func cmpNode(a, b *node) *node {
	if a != nil {
		return a
	}
	return b
}

func (d *decoder) seed(n *node) uint64 {
	const remedy = "write a whole number from 0 on, such as seed = 1"
	if !d.is(n, numberNode, remedy) {
		return 0
	}
	if !n.whole || n.number < 0 || n.number > 1<<53 {
		d.report(n, "not a whole number from 0 to 2^53", remedy)
		return 0
	}
	return uint64(n.number)
}

// draw reads how members are drawn.
func (d *decoder) draw(n *node, f *Family) {
	const example = `write draw = { method = "halton", count = 20000 }`
	if !d.is(n, tableNode, example) {
		return
	}
	d.keys(n, drawTable)
	method := -1
	if v := d.need(n, "method", example); v != nil {
		remedy := `want "halton", "grid", "random" or "latin"`
		text, ok := d.text(v, remedy)
		if method = slices.Index(draw.Methods(), text); ok && method < 0 {
			d.reportWord(v, "no way to draw", draw.Methods(), remedy)
		}
	}
	count := d.count(d.need(n, "count", example), method)
	if method < 0 || count == 0 {
		return
	}
	var levels []int
	for i := range f.Values {
		if v := &f.Values[i]; v.drawn() {
			levels = append(levels, v.levels())
		}
	}
	f.Asked = count
	f.points = draw.New(draw.Method(method), f.Seed, f.Name, levels, count)
	if draw.Method(method) == draw.Grid && f.points.Count() > count {
		d.report(n.get("count"), fmt.Sprintf("the choices alone make a grid of %d members", f.points.Count()), "ask for as many, or draw by another method")
	}
}

func (d *decoder) count(n *node, method int) int64 {
	const remedy = "write how many members to draw, such as count = 20000"
	most := int64(mostMembers)
	if method == int(draw.Latin) {
		most = draw.MostLatin
	}
	switch {
	case !d.is(n, numberNode, remedy):
	case !n.whole || n.number < 1:
		d.report(n, "not a whole number of at least 1", remedy)
	case n.number > float64(most):
		d.report(n, fmt.Sprintf("more than %d", most), "draw fewer, or a second family")
	default:
		return int64(n.number)
	}
	return 0
}

// markUsed notes which values the legs or other values speak of.
func (f *Family) markUsed() {
	f.used = make([]bool, len(f.Values))
	for i := range f.holes {
		f.holes[i].value.mark(f.used)
	}
	for i := range f.random {
		f.random[i].count.mark(f.used)
		f.random[i].per.mark(f.used)
	}
	if f.eruption != nil && f.eruption.offset != nil {
		f.eruption.offset.mark(f.used)
	}
	for i := range f.Values {
		f.Values[i].tie.mark(f.used)
	}
}

// familyEruption reads the moment of eruption of the members, which may count from
// another by an open time: "{wait} after start".
func (d *decoder) familyEruption(n *node, f *Family) {
	const remedy = `write a moment, such as "end of wake 2" or "{wait} after start"`
	text, ok := d.text(n, remedy)
	if !ok {
		return
	}
	e := &openMoment{}
	if d.isOpen(n) {
		by, rest, ok := cutMoment(text)
		if !ok {
			d.report(n, "a duration, not a moment", remedy)
			return
		}
		offset, ok := d.holeText(n, by, duration)
		if !ok {
			return
		}
		e.offset, text = &offset, rest
	}
	var err error
	if e.moment, err = thermal.ParseEruption(text); err != nil {
		d.reportError(n, err)
		return
	}
	e.moment.Text = n.text
	f.eruption = e
}
