package study

import (
	"fmt"
	"math"
	"slices"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// maxOwn bounds by what D may change with the element's own value, as ln.
const maxOwn = 50

// lawOwn reads how a law written in the study depends on the element itself,
//
//	D x exp(ln_slope (C - at)), C in the element's unit.
func (d *decoder) lawOwn(n *node, kind tableKind, law *Law) {
	const example = `write own = { ln_slope = 3, at = 0 }, or ln_slope = "3 +- 0.5": D times exp(ln_slope (C - at)), C in the element's unit`
	if !d.is(n, tableNode, example) {
		return
	}
	d.keys(n, kind)
	if slope := d.need(n, "ln_slope", example); slope != nil {
		law.OwnSlope, law.OwnSlopeSigma = d.ownSlope(slope, example)
	}
	if at := n.get("at"); d.is(at, numberNode, example) {
		if at.number < 0 {
			d.report(at, "below zero", "a value is zero or more")
		}
		law.OwnAt = at.number
	}
}

// ownSlope reads a slope of ln D in one over the element's unit, perhaps with its error.
func (d *decoder) ownSlope(n *node, example string) (slope, sigma float64) {
	if n.kind == textNode {
		x, err := thermal.ParseFactor(n.text)
		if err != nil {
			d.reportError(n, err)
		}
		return x.Value, x.Sigma
	}
	if !d.is(n, numberNode, example) {
		return 0, 0
	}
	return n.number, 0
}

// ownIron makes a law of the catalogue, whose log10 D has the term
// Slope (XFe - Reference), one of the element's own value. XFe = Fe/(Fe+Mg) is a
// straight line in a value that counts moles, and none in one of mass.
func (d *decoder) ownIron(n *node, row *catalogue.Row, e *Element, law *Law) {
	const want = "want Fo, or a mole fraction or mol% of Fe/(Fe+Mg) or Mg/(Fe+Mg)"
	xFe, ok := e.xFe()
	switch {
	case ok:
		term := row.Composition
		law.OwnSlope = math.Ln10 * term.Slope * xFe.scale
		law.OwnAt = (term.Reference - xFe.offset) / xFe.scale
	case e.Unit != "":
		d.report(n, fmt.Sprintf("this law depends on XFe = Fe/(Fe+Mg), which %s in %s does not tell", e.Name, e.Unit),
			want+"; or run "+row.Command()+" with your values, and paste the line that it prints")
	}
}

// xFe returns what Fe/(Fe+Mg) is of a value of the element. ok is false for
// elements that are neither iron nor magnesium, and units that count no moles.
func (e *Element) xFe() (xFe component, ok bool) {
	fo, ok := (&units{element: e.Name}).of("Fo", moleFraction)
	unit, moles := thermal.ConcentrationFactor(e.Unit, moleFraction)
	if !ok || !moles {
		return component{}, false
	}
	// C = scale Fo + offset, so that XFe = 1 - Fo = 1 - (C - offset) / scale
	return component{scale: -unit / fo.scale, offset: 1 + fo.offset/fo.scale}, true
}

// ironOrMagnesium reports whether the element is one of those that XFe is made of.
func (e *Element) ironOrMagnesium() bool {
	_, ok := (&units{element: e.Name}).of("Fo", moleFraction)
	return ok
}

// noteXFe notes which composition a law that depends on XFe was given.
func (d *decoder) noteXFe(e *Element) {
	if !slices.ContainsFunc(e.Law.all(), func(l *Law) bool { return l.Row != nil && l.Row.OwnComposition() }) {
		return
	}
	xFe, ok := e.xFe()
	switch {
	case !ok:
		d.note("%s: XFe, on which its law depends, is that of the host, which stays as it is", e.Name)
	case xFe.scale > 0:
		d.note("%s: XFe, on which its law depends, is its value, taken as Fe/(Fe+Mg)", e.Name)
	default:
		d.note("%s: XFe, on which its law depends, is 1 less its value, taken as Mg/(Fe+Mg)", e.Name)
	}
}

// nonlinear checks an element whose law depends on the element itself: its profile
// is no sum of parts, one for each value that would be fitted.
func (d *decoder) nonlinear(n *node, c *Crystal, e *Element) {
	if !e.Law.onItself() {
		return
	}
	problem := "D depends on " + e.Name + " itself, so that this value must be known exactly"
	at := d.place(n)
	if v := n.get("start"); v != nil {
		at = d.place(v)
	}
	for i, p := range e.Start.plateaux() {
		if p.open() {
			if e.Start.Scaled != nil {
				d.add(at.Error("", problem+": "+e.Start.Scaled.endName(i), `write it like lowest = "58 ppm", without "free" and "+-"`))
				return
			}
			d.add(at.Error("", problem+": "+c.Zones[i].Name, `state one value a zone, such as zones = ["90 ppm", "58 ppm"], without "free" and "+-"`))
			return
		}
	}
	for _, rims := range [][]Rim{e.Inner, e.Rims} {
		for _, r := range rims {
			if r.valued() && r.Value.open() {
				d.add(r.Place.Error("", problem, `write it like "90 ppm", without "free" and "+-"`))
				return
			}
		}
	}
	if open := slices.DeleteFunc(slices.Clone(e.Start.Widths()), Nuisance.Fixed); len(open) > 1 {
		d.add(at.Error("", fmt.Sprintf("D depends on %s itself, so that one width of its edges can be open, and %d are", e.Name, len(open)),
			`state all but one like "0.5 um", or one width for all boundaries: edge = "free 0..2 um"`))
		return
	}
	lo, hi := c.values(e)
	steepest := e.Law
	steepest.OwnSlope = math.Abs(e.Law.OwnSlope) + MostDeviation*math.Abs(e.Law.OwnSlopeSigma)
	if most := max(math.Abs(steepest.lnOwn(hi)), math.Abs(steepest.lnOwn(lo))); !(most <= maxOwn) {
		d.report(n.get("law"), fmt.Sprintf("its own composition, from %.4g to %.4g %s, changes D by a factor of e^%.3g", lo, hi, e.Unit, most),
			"check the values, and ln_slope and at if the law is yours: C is in "+e.Unit)
	}
}

// values returns the least and the largest value that the study states of the
// element: those between which it stays if it follows no host.
func (c *Crystal) values(e *Element) (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	add := func(x float64) { lo, hi = min(lo, x), max(hi, x) }
	for _, p := range e.Start.plateaux() {
		add(p.Value)
	}
	for _, rims := range [][]Rim{e.Inner, e.Rims} {
		for _, r := range rims {
			switch {
			case r.Given != nil:
				for _, x := range r.Given.Value {
					add(x)
				}
			case r.Kind != diffusion.Sealed && r.Zone < 0:
				add(r.Value.Value)
			}
		}
	}
	return lo, hi
}

// onItself reports whether D depends, or may depend, on the element's own value.
func (l *Law) onItself() bool { return l.OwnSlope != 0 || l.OwnSlopeSigma != 0 }

// onAHost reports whether D depends, or may depend, on the host.
func (l *Law) onAHost() bool { return l.HostSlope != 0 || l.HostSlopeSigma != 0 }

// lnOwn is ln of the factor that D has at the element's own value.
func (l *Law) lnOwn(value float64) float64 {
	return float64(l.OwnSlope * (value - l.OwnAt))
}

// own returns the factor on D as a function of the element's own value, nil if
// there is none. Far beyond the values that a study may state it is constant.
func (l *Law) own() func(float64) float64 {
	if l.OwnSlope == 0 {
		return nil
	}
	return func(value float64) float64 {
		return math.Exp(min(max(l.lnOwn(value), -2*maxOwn), 2*maxOwn))
	}
}
