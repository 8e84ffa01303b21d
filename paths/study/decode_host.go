package study

import (
	"fmt"
	"slices"
	"strings"

	"bankfire/thermal"
)

const fractionRemedy = "write a mole fraction as a number from 0 to 1, such as host = 0.55 for An55"

// host reads the composition of a host, a mole fraction.
func (d *decoder) host(n *node) float64 {
	if !d.is(n, numberNode, fractionRemedy) {
		return 0
	}
	if !(n.number >= 0 && n.number <= 1) {
		d.report(n, "not from 0 to 1", fractionRemedy)
		return 0
	}
	return n.number
}

// mostHostSigma is the largest error of a host in a zone: with 1/sqrt(12) it could be
// any.
const mostHostSigma = 0.28

// zoneHost reads the composition of the host in a zone, perhaps with its error.
func (d *decoder) zoneHost(n *node, z *Zone) {
	const remedy = `write a mole fraction from 0 to 1, perhaps with an error, such as host = 0.55 or host = "0.55 +- 0.02"`
	switch n.kind {
	case numberNode:
		z.Host = d.host(n)
		return
	case tableNode:
		d.report(n, "a table, not the host of one zone", "write a file of the host once for the crystal: host = { ... } beside zones")
		return
	}
	text, ok := d.text(n, remedy)
	if !ok {
		return
	}
	x, err := thermal.ParseFactor(text)
	switch {
	case err != nil:
		d.reportError(n, err)
	case !(x.Value >= 0 && x.Value <= 1):
		d.report(n, "not from 0 to 1", remedy)
	case x.Sigma > mostHostSigma:
		d.report(n, fmt.Sprintf("its error is more than %g, so that it could be anything from 0 to 1", mostHostSigma), remedy)
	default:
		z.Host, z.HostSigma = x.Value, x.Sigma
	}
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
	const example = `write host = { ln_slope = -9.4, at = 0 }, or ln_slope = "-9.4 +- 0.9": D times exp(ln_slope (X - at))`
	if !d.is(n, tableNode, example) {
		return
	}
	d.keys(n, kind)
	if of := n.get("slope_of"); of != nil {
		d.slopeOf(n, of, law)
	} else if slope, ok := d.slope(d.need(n, "ln_slope", example), example); ok {
		law.HostSlope, law.HostSlopeSigma = slope.Value, slope.Sigma
	}
	if at := n.get("at"); at != nil {
		law.HostAt = d.host(at)
	}
}

// noteHost notes a host that changes nothing, one that was measured without an error,
// and one of whose error a part is left out.
func (d *decoder) noteHost(c *Crystal, measured bool) {
	if !c.Hosted {
		return
	}
	if !slices.ContainsFunc(c.Elements, func(e Element) bool { return e.OnHost() }) {
		d.note("%s: its host changes nothing: no element has a partition relation or a law that depends on it", c.Name)
		return
	}
	switch modes, left := c.modes(); {
	case measured && modes == nil:
		d.note("%s: no error of its host is stated, so it is taken to be exact", c.Name)
	case left > 0:
		d.note("%s: its host is redrawn %d times, too few for a spline so narrow: up to %.0f %% of its variance is left out, so that a true path may miss the data; a larger width mends it",
			c.Name, len(modes), 100*left)
	}
}
