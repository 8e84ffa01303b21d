package study

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"bankfire/thermal"
)

// How far the squared cosines of a normal may add up from 1, and what is no
// share at all: the square of the round-off of cos 90 deg.
const (
	cosinesOff = 0.02
	noShare    = 1e-20
)

// directed reads a law by direction,
//
//	D = Da cos2(a) + Db cos2(b) + Dc cos2(c),
//
// with a law along each axis, or along one with the ratio by which D is less along
// the others, and the angles of the boundary's normal to the axes.
func (d *decoder) directed(n *node, c *Crystal, e *Element) Law {
	d.keys(n, directionTable)
	before := d.faults
	shares, _ := d.cosines(d.need(n, "normal", normalRemedy))
	var parts []Part
	if v := n.get("ratio"); v != nil {
		parts = d.byRatio(n, v, shares, c, e)
	} else {
		for i, axis := range axes {
			parts = addPart(parts, axis, shares[i], d.along(n, axis, c, e))
		}
	}
	if d.faults > before {
		return Law{}
	}
	if len(parts) == 1 && math.Abs(parts[0].Share-1) < noShare {
		return parts[0].Law
	}
	return d.joined(n, parts)
}

// along reads the law along an axis.
func (d *decoder) along(n *node, axis string, c *Crystal, e *Element) Law {
	v := d.need(n, axis, `write the law along each axis: a, b and c; or along one, and ratio = 6 if D is 6 times less along the others`)
	if v == nil || !switches(v) && !d.is(v, textNode, `write a key that "bankfire laws" lists, or the name of a [[law]]`) {
		return Law{}
	}
	law := d.law(v, c, e)
	d.otherAxis(axis, &law, e)
	return law
}

// byRatio reads the law along one axis and the ratio of D there to that along the
// other two.
func (d *decoder) byRatio(n, v *node, shares [3]float64, c *Crystal, e *Element) []Part {
	const example = `write the law along one axis and the ratio, such as c = "olivine-ni-petry2004", ratio = 6`
	ratio, ok := d.number(v, example)
	var with, without []string
	share := 0.0
	for i, axis := range axes {
		if n.get(axis) != nil {
			with, share = append(with, axis), share+shares[i]
		} else {
			without, share = append(without, axis), share+shares[i]/ratio
		}
	}
	switch {
	case !ok:
		return nil
	case len(with) == 0:
		d.report(v, "a ratio, and no law along any axis", example)
		return nil
	case len(with) != 1:
		d.report(v, fmt.Sprintf("laws along %d axes, and a ratio", len(with)), example)
		return nil
	}
	axes := fmt.Sprintf("%s (%.4g times that along %s)", with[0], ratio, strings.Join(without, " and "))
	return []Part{{Axes: axes, Share: share, Law: d.along(n, with[0], c, e)}}
}

// axes are the keys of the laws in a law by direction, directionKeys all that no
// other law has.
var (
	axes          = [3]string{"a", "b", "c"}
	directionKeys = [...]string{"a", "b", "c", "ratio", "normal"}
)

const normalRemedy = `write the angles of the boundary's normal to a, b and c, such as normal = ["90 deg", "90 deg", "0 deg"]`

// cosines reads the three angles of a normal, and returns the squares of their
// cosines.
func (d *decoder) cosines(n *node) (squares [3]float64, ok bool) {
	if !d.is(n, arrayNode, normalRemedy) {
		return squares, false
	}
	if len(n.items) != len(squares) {
		d.report(n, count(len(n.items), "angle")+", not 3", normalRemedy)
		return squares, false
	}
	sum := 0.0
	for i, v := range n.items {
		angle, ok := d.quantity(v, axisAngle)
		if !ok {
			return squares, false
		}
		squares[i] = math.Pow(math.Cos(angle), 2)
		sum += squares[i]
	}
	if !(math.Abs(sum-1) <= cosinesOff) {
		d.report(n, fmt.Sprintf("the squares of the cosines of its angles add up to %.3g, not 1", sum), normalRemedy)
		return squares, false
	}
	return squares, true
}

// addPart adds the law along an axis, to the part that has the same law if there
// is one.
func addPart(parts []Part, axis string, share float64, law Law) []Part {
	if share < noShare {
		return parts
	}
	for i := range parts {
		if parts[i].Law.Key == law.Key {
			parts[i].Axes += " and " + axis
			parts[i].Share += share
			return parts
		}
	}
	return append(parts, Part{Axes: axis, Share: share, Law: law})
}

// joined returns the law whose D is the sum of the parts'. It is calibrated
// where all of them are.
func (d *decoder) joined(n *node, parts []Part) Law {
	law := Law{Parts: parts, HostSlope: parts[0].Law.HostSlope, HostAt: parts[0].Law.HostAt, OwnSlope: parts[0].Law.OwnSlope, OwnAt: parts[0].Law.OwnAt}
	var keys, citations []string
	for _, p := range parts {
		if !d.agree(n, &law, &p.Law) {
			return Law{}
		}
		law.leastKnown(&p.Law)
		keys = append(keys, p.Law.Key)
		if p.Law.Citation != "" && !slices.Contains(citations, p.Law.Citation) {
			citations = append(citations, p.Law.Citation)
		}
		law.Law = plus(law.Law, scaled(p.Law.Law, math.Log(p.Share)+law.lnAt(&p.Law)))
		law.narrow(&p.Law)
	}
	law.Key, law.Citation = strings.Join(keys, " + "), strings.Join(citations, "; ")
	if law.TMin > law.TMax {
		law.Caution = "its laws have no calibrated temperature in common"
		law.TMin, law.TMax = 0, 0
	}
	return law
}

// narrow leaves of the law's calibrated range what is in that of another.
func (l *Law) narrow(other *Law) {
	switch {
	case other.TMin == 0 && other.TMax == 0:
	case l.TMin == 0 && l.TMax == 0:
		l.TMin, l.TMax = other.TMin, other.TMax
	default:
		l.TMin, l.TMax = max(l.TMin, other.TMin), min(l.TMax, other.TMax)
	}
}

// axisAngle bounds the angle of a normal to an axis.
var axisAngle = bound{thermal.Angle, true, math.Pi * (1 + 1e-9), "180 deg", "90 deg"}
