package study

import (
	"fmt"
	"strings"
)

// mostAlternatives bounds the starts of an element: each is run for every path.
const mostAlternatives = 20

// starts reads the profile of an element before diffusion into it, or the list of
// those of which one is true.
func (d *decoder) starts(element *node, c *Crystal, e *Element, u *units) {
	n := element.get("start")
	if n == nil || n.kind != arrayNode {
		e.Start = d.start(element, n, c, e, u)
		return
	}
	const example = `write start = [ { name = "melt A", zones = ["free", "58 ppm"] }, { name = "melt B", zones = ["free", "71 ppm"] } ]`
	if len(n.items) > mostAlternatives {
		d.report(n, fmt.Sprintf("more than %d alternatives", mostAlternatives), "fewer are enough")
		return
	}
	seen := map[string]int{}
	for _, v := range d.tables(n, example) {
		s := d.start(element, v, c, e, u)
		if s.Name != "" {
			d.unique(v.get("name"), s.Name, seen)
		}
		e.Alternatives = append(e.Alternatives, s)
	}
	switch len(e.Alternatives) {
	case 0:
		e.Start = d.start(element, nil, c, e, u)
	case 1:
		d.report(n, "one start is no choice", "write it without the brackets, or add another")
		fallthrough
	default:
		e.Start = e.Alternatives[0]
	}
	if !u.measured {
		d.report(n, "nothing was measured that could tell alternatives apart", "keep one of them, or add a traverse")
	}
}

// start reads one profile before diffusion. Where it does not say otherwise every
// plateau is free, and edges are sharp.
func (d *decoder) start(element, n *node, c *Crystal, e *Element, u *units) Start {
	s := Start{Zones: make([]Plateau, len(c.Zones))}
	for i := range s.Zones {
		s.Zones[i].Free = true
	}
	const example = `write start = { zones = ["free", "58 +- 1.5 ppm"], edge = "0 um" }`
	if n != nil && d.is(n, tableNode, example) {
		d.keys(n, startTable)
	}
	if name := n.get("name"); name != nil {
		s.Name, _ = d.name(name, `write a name, such as name = "melt A"`)
	}
	switch way := d.oneWay(n, "zones", "melt", "solubility", "scaled"); {
	case way == nil && u.measured:
	case way == nil:
		d.report(element, "all plateaux are free, but there is no traverse to fit them to", example)
	case way == n.get("zones"):
		d.plateaux(way, s.Zones, c, u, d.concentrationUnit(n.get("unit")))
	case way == n.get("scaled"):
		d.scaled(n, &s, e, u)
	default:
		d.equilibrium(n, way, &s, c, e, u)
	}
	d.astray(n)
	if edge := n.get("edge"); edge != nil {
		d.edges(edge, &s, c)
	}
	return s
}

// edges reads the width of the edges: one for all boundaries, or a list of one each.
func (d *decoder) edges(n *node, s *Start, c *Crystal) {
	if n.kind != arrayNode {
		s.Edge = d.nuisance(n, edgeLatitude())
		return
	}
	boundaries := max(0, len(c.Zones)-1)
	if len(n.items) != boundaries {
		if len(c.Zones) > 0 {
			d.report(n, fmt.Sprintf("%s for %d between the zones", count(len(n.items), "width"), boundaries),
				`write one width a boundary, from the inside outwards, such as edge = ["free 0..2 um", "0.5 um"]; or one for all without the brackets`)
		}
		return
	}
	for _, v := range n.items {
		s.Edges = append(s.Edges, d.nuisance(v, edgeLatitude()))
	}
	if boundaries == 1 {
		s.Edge, s.Edges = s.Edges[0], nil
	}
}

// astray reports keys that go with another way to give the start.
func (d *decoder) astray(n *node) {
	if v := n.get("temperature"); v != nil && n.get("melt") == nil && n.get("solubility") == nil {
		d.report(v, "goes with a melt or a solubility", "leave it out")
	}
	if n.get("scaled") != nil {
		return
	}
	for _, name := range []string{"lowest", "highest", "smooth", "width"} {
		if v := n.get(name); v != nil {
			d.report(v, "goes with scaled", `leave it out, or write scaled = "P", the element whose shape it has`)
		}
	}
}

// oneWay returns the first of the keys that the table has, nil if it has none;
// having two is a problem.
func (d *decoder) oneWay(n *node, keys ...string) *node {
	var found *node
	for _, key := range keys {
		switch v := n.get(key); {
		case v == nil:
		case found == nil:
			found = v
		default:
			d.report(v, "the start is given in another way as well", "keep one of "+strings.Join(keys, ", "))
		}
	}
	return found
}

// plateaux reads one value a zone into dst.
func (d *decoder) plateaux(n *node, dst []Plateau, c *Crystal, u *units, unit string) {
	const example = `write one value a zone, such as zones = ["free", "58 +- 1.5 ppm"]`
	d.eachZone(n, c, example, func(i int, v *node) { dst[i] = d.amount(v, u, unit) })
}

// eachZone reads a list of one item a zone.
func (d *decoder) eachZone(n *node, c *Crystal, example string, read func(i int, v *node)) bool {
	if !d.is(n, arrayNode, example) {
		return false
	}
	if len(n.items) != len(c.Zones) {
		if len(c.Zones) > 0 {
			d.report(n, fmt.Sprintf("%s for %s", count(len(n.items), "value"), count(len(c.Zones), "zone")),
				"write one value a zone: "+strings.Join(zoneNames(c), ", "))
		}
		return false
	}
	for i, v := range n.items {
		read(i, v)
	}
	return true
}
