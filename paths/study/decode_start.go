package study

import (
	"fmt"
	"strings"
)

// start reads the profile of an element before diffusion. Where it does not say
// otherwise every plateau is free, and edges are sharp.
func (d *decoder) start(element *node, c *Crystal, u *units) Start {
	s := Start{Zones: make([]Plateau, len(c.Zones))}
	for i := range s.Zones {
		s.Zones[i].Free = true
	}
	const example = `write start = { zones = ["free", "58 +- 1.5 ppm"], edge = "0 um" }`
	n := element.get("start")
	switch {
	case n == nil:
	case n.kind == arrayNode:
		d.report(n, "alternatives of a start are not known in this version", example)
		return s
	case d.is(n, tableNode, example):
		d.keys(n, startTable)
	}
	if zones := n.get("zones"); zones != nil {
		d.plateaux(zones, s.Zones, c, u, d.concentrationUnit(n.get("unit")))
	} else if !u.measured {
		d.report(element, "all plateaux are free, but there is no traverse to fit them to", example)
	}
	if edge := n.get("edge"); edge != nil {
		s.Edge = d.nuisance(edge, edgeLatitude())
	}
	return s
}

// plateaux reads one value a zone into dst.
func (d *decoder) plateaux(n *node, dst []Plateau, c *Crystal, u *units, unit string) {
	const example = `write one value a zone, such as zones = ["free", "58 +- 1.5 ppm"]`
	if !d.is(n, arrayNode, example) {
		return
	}
	if len(n.items) != len(dst) {
		if len(dst) > 0 {
			d.report(n, fmt.Sprintf("%s for %s", count(len(n.items), "value"), count(len(dst), "zone")),
				"write one value a zone: "+strings.Join(zoneNames(c), ", "))
		}
		return
	}
	for i, v := range n.items {
		dst[i] = d.amount(v, u, unit)
	}
}
