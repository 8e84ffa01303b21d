package study

import (
	"slices"
	"strings"

	"bankfire/diffusion"
)

// element reads one [[crystal.element]]. Values keep the unit they were typed
// in until the unit of the element is known: that of its traverse, else of the
// first value given.
func (d *decoder) element(n *node, c *Crystal, inner *node, seen map[string]int) Element {
	d.keys(n, elementTable)
	e := Element{Place: d.place(n)}
	if v := d.need(n, "name", `write the element, such as name = "Ti"`); v != nil {
		var ok bool
		if e.Name, ok = d.name(v, `write the element, such as "Ti"`); ok {
			d.unique(v, e.Name, seen)
		}
	}
	u := &units{element: e.Name, measured: n.get("traverse") != nil, known: map[float64]bool{}}
	d.traverse(n.get("traverse"), c, &e, u)
	e.Partition = d.partition(n.get("partition"), c, &e)
	d.starts(n, c, &e, u)
	e.Rims = d.complete(d.rims(n.get("rim"), c, u, true), c, e.Name)
	if e.Inner = d.rims(inner, c, u, false); allSealed(e.Inner) {
		e.Inner = nil
	}
	if e.Traverse != nil && e.Traverse.Grey {
		d.grey(n.get("traverse"), &e, u)
	}
	e.Unit = u.unit
	e.Law = d.law(d.need(n, "law", `write a key of the catalogue, such as law = "quartz-ti-cherniak2007"`), c, &e)
	d.followers(e.Inner, c.R0, c, &e)
	d.followers(e.Rims, c.Size(), c, &e)
	d.assumed(n, c, &e)
	for k := range e.Starts() {
		d.nonlinear(n, c, e.Starting(k))
	}
	return e
}

// assumed notes what was taken because the study does not say.
func (d *decoder) assumed(n *node, c *Crystal, e *Element) {
	if !d.again() {
		d.odd(n, c, e)
	}
	if n.get("rim") == nil && len(c.Zones) > 0 {
		last := len(c.Zones) - 1
		d.note("%s: no rim given, held at the plateau of its outermost zone, %s", e.Name, c.Zones[last].Name)
		e.Rims = d.complete([]Rim{tied(last, d.place(n))}, c, e.Name)
	}
}

// odd notes what of an element may not be meant.
func (d *decoder) odd(n *node, c *Crystal, e *Element) {
	d.otherMineral(c, e)
	d.otherElement(e)
	d.oneOfSeveral(e)
	d.takenAlong(n.get("law"), e)
	d.rimRelations(e)
	d.otherHost(n, c, e)
	d.noteXFe(e)
	if len(c.Zones) > 1 && slices.ContainsFunc(startTables(n), edgeless) {
		d.note("%s: no edge given, taken to begin with sharp ones", e.Name)
	}
	if e.Tilt != (Nuisance{}) && len(c.Zones) > 1 {
		d.note("%s: the tilt shortens measured positions, not the widths of zones: these must be true ones, or the origin free", e.Name)
	}
}

// startTables are the tables of an element's start or of its alternatives; nil is one
// that is left out.
func startTables(element *node) []*node {
	if n := element.get("start"); n != nil && n.kind == arrayNode {
		return n.items
	}
	return []*node{element.get("start")}
}

// edgeless reports whether a start has edges and does not say how wide they are.
func edgeless(start *node) bool {
	return start.get("edge") == nil && (start.get("scaled") == nil || start.get("width") == nil)
}

// otherMineral notes a law that is for another mineral than the crystal's, unless
// that is mistyped.
func (d *decoder) otherMineral(c *Crystal, e *Element) {
	for _, law := range e.Law.all() {
		if law.Row == nil || c.Mineral == "" {
			continue
		}
		if of := law.Row.Mineral; !strings.EqualFold(of, c.Mineral) && nearest(c.Mineral, minerals()) != of {
			d.note("%s: law %s is for %s, but the crystal %s is %s: is the law the right one?", e.Name, law.Key, of, c.Name, c.Mineral)
		}
	}
}

func allSealed(rims []Rim) bool {
	for _, r := range rims {
		if r.Kind != diffusion.Sealed {
			return false
		}
	}
	return true
}
