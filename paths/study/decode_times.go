package study

import (
	"fmt"
	"math"
	"slices"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// like reads a law that has a name, and is multiplied by a factor or has an error of its
// slope that is stated here.
func (d *decoder) like(n *node, c *Crystal, e *Element) Law {
	d.keys(n, likeTable)
	slope := n.get("slope_sigma")
	if slope == nil {
		d.need(n, "times", timesRemedy)
	}
	v := n.get("like")
	if !d.is(v, textNode, `write a key that "bankfire laws" lists, or the name of a [[law]]`) {
		return Law{}
	}
	before := d.faults
	law := d.law(v, c, e)
	if slope != nil && d.faults == before {
		d.likeSlope(slope, &law)
	}
	if at := n.get("at"); at != nil && d.faults == before {
		d.heldAt(at, slope, &law)
	}
	return law
}

const timesRemedy = `write what D is multiplied by, a number above 0 without a unit, such as times = "10 +- 3" or times = 0.5`

// factor reads the user's factor on D.
func (d *decoder) factor(n *node, law *Law) {
	var factor thermal.Uncertain
	if n.kind == numberNode {
		factor.Value = n.number
	} else {
		text, ok := d.text(n, timesRemedy)
		if !ok {
			return
		}
		var err error
		if factor, err = thermal.ParseFactor(text); err != nil {
			d.reportError(n, err)
			return
		}
	}
	switch {
	case !(factor.Value >= leastNumber && factor.Value <= mostNumber):
		d.report(n, "not a usable factor above zero", timesRemedy)
	case factor.Sigma > factor.Value/2:
		d.report(n, "its error is more than half of it, too much to stand for one of log10 D",
			`write a smaller error; or D0 and E of your own, with sigma for that of log10 D`)
	default:
		law.Times = factor
		law.Law = scaled(law.Law, math.Log(factor.Value))
	}
}

// scaled returns the law with D multiplied by exp(ln).
func scaled(law diffusion.Law, ln float64) diffusion.Law {
	law.Terms = slices.Clone(law.Terms)
	for i := range law.Terms {
		law.Terms[i].LnA += ln
	}
	return law
}

// TimesText names the user's factor on D, "D times 10 +- 3, yours"; "" is none.
func (l *Law) TimesText() string {
	switch f := l.Times; {
	case f.Value == 0:
		return ""
	case f.Sigma == 0:
		return fmt.Sprintf("D times %.4g, yours", f.Value)
	default:
		return fmt.Sprintf("D times %.4g +- %.4g, yours", f.Value, f.Sigma)
	}
}
