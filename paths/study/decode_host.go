package study

import (
	"fmt"
	"slices"
	"strings"
)

// host reads the composition of the host in a zone, a mole fraction.
func (d *decoder) host(n *node) float64 {
	const remedy = "write a mole fraction as a number from 0 to 1, such as host = 0.55 for An55"
	if n.kind == tableNode {
		d.report(n, "a table, not the host of one zone", "write a file of the host once for the crystal: host = { ... } beside zones")
		return 0
	}
	if !d.is(n, numberNode, remedy) {
		return 0
	}
	if !(n.number >= 0 && n.number <= 1) {
		d.report(n, "not from 0 to 1", remedy)
		return 0
	}
	return n.number
}

// hosted reports whether the zones have a host, and it is a problem if some have
// and others have not.
func (d *decoder) hosted(list *node, zones []*node) bool {
	var with, without []string
	for _, z := range zones {
		name := "?"
		if v := z.get("name"); v != nil {
			name = v.text
		}
		if z.get("host") != nil {
			with = append(with, name)
		} else {
			without = append(without, name)
		}
	}
	if len(with) == 0 {
		return false
	}
	if len(without) > 0 {
		d.report(list, fmt.Sprintf("no host in %s, but in %s", strings.Join(without, ", "), strings.Join(with, ", ")),
			"give every zone its host, such as host = 0.55, or none")
	}
	return true
}

// maxSlope bounds the slope of ln D on the host: from one end member to the other
// D changes by e^100.
const maxSlope = 100

// lawHost reads how a law written in the study depends on the host,
//
//	D x exp(ln_slope (X - at)).
func (d *decoder) lawHost(n *node, kind tableKind, law *Law) {
	const example = `write host = { ln_slope = -9.4, at = 0 }: D times exp(ln_slope (X - at))`
	if !d.is(n, tableNode, example) {
		return
	}
	d.keys(n, kind)
	slope, at := d.need(n, "ln_slope", example), n.get("at")
	if d.is(slope, numberNode, example) {
		if !(slope.number >= -maxSlope && slope.number <= maxSlope) {
			d.report(slope, fmt.Sprintf("not from -%d to %d", maxSlope, maxSlope), example)
			return
		}
		law.HostSlope = slope.number
	}
	if at != nil {
		law.HostAt = d.host(at)
	}
}

// noteHost notes a host that changes nothing, and one that was measured without an
// error.
func (d *decoder) noteHost(c *Crystal, measured bool) {
	if !c.Hosted {
		return
	}
	if slices.ContainsFunc(c.Elements, func(e Element) bool { return e.OnHost() }) {
		if measured && c.modes() == nil {
			d.note("%s: no error of its host is stated, so it is taken to be exact", c.Name)
		}
		return
	}
	d.note("%s: its host changes nothing: no element has a partition relation or a law that depends on it", c.Name)
}
