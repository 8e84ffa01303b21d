package study

import (
	"fmt"
	"strings"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// element reads one [[crystal.element]]. Values keep the unit they were typed
// in until the unit of the element is known: that of its traverse, else of the
// first value given.
func (d *decoder) element(n *node, c *Crystal, inner *node, seen map[string]int) Element {
	d.keys(n, "name", "law", "start", "rim", "traverse")
	e := Element{Place: d.place(n)}
	if v := d.need(n, "name", `write the element, such as name = "Ti"`); v != nil {
		var ok bool
		if e.Name, ok = d.name(v, `write the element, such as "Ti"`); ok {
			d.unique(v, e.Name, seen)
		}
	}
	e.Law = d.law(d.need(n, "law", `write a key of the catalogue, such as law = "quartz-ti-cherniak2007"`))
	e.Traverse = d.traverse(n.get("traverse"), c)
	u := &units{measured: n.get("traverse") != nil}
	if e.Traverse != nil {
		u.unit, _ = thermal.UnitName(e.Traverse.Unit, thermal.Concentration)
		u.from = n.get("traverse").get("value")
	}
	e.Start = d.start(n, c, u)
	e.Rims = d.rims(n.get("rim"), c, u)
	if e.Inner = d.rims(inner, c, u); allSealed(e.Inner) {
		e.Inner = nil
	}
	e.Unit = u.unit
	d.assumed(n, c, &e)
	return e
}

// assumed notes what was taken because the study does not say.
func (d *decoder) assumed(n *node, c *Crystal, e *Element) {
	if e.Law.Row != nil && c.Mineral != "" && !strings.EqualFold(e.Law.Row.Mineral, c.Mineral) {
		d.note("%s: the law %s is one of %s, the crystal is %s", e.Name, e.Law.Key, e.Law.Row.Mineral, c.Mineral)
	}
	if n.get("start").get("edge") == nil && len(c.Zones) > 1 {
		d.note("%s: no edge given, taken to begin with sharp ones", e.Name)
	}
	if n.get("rim") == nil && len(c.Zones) > 0 {
		last := len(c.Zones) - 1
		e.Rims = []Rim{tied(last, d.place(n))}
		d.note("%s: no rim given, held at the plateau of its outermost zone, %s", e.Name, c.Zones[last].Name)
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

// units is what the values of an element have to agree with while they are read.
type units struct {
	unit     string
	from     *node // the value that decided it
	measured bool  // there is a traverse to fit free values to
}

// amount reads a value of the element: "free", "58 ppm", "58 +- 1.5 ppm", or a
// bare number whose unit stands beside it (beside is "" if none does).
func (d *decoder) amount(n *node, u *units, beside string) Plateau {
	const example = `write it like "58 ppm", "58 +- 1.5 ppm" or "free"`
	switch {
	case n.kind == textNode && n.text == "free":
		if !u.measured {
			d.report(n, "no traverse to fit it to", "write a value, or give a traverse")
		}
		return Plateau{Free: true}
	case n.kind == numberNode && beside == "":
		d.report(n, "a number without a unit", fmt.Sprintf("write it like \"%s ppm\", or add unit = \"ppm\"", n.text))
		return Plateau{}
	case n.kind == numberNode:
		return d.inUnit(n, u, thermal.Uncertain{Value: n.number}, beside)
	}
	text, ok := d.text(n, example)
	if !ok {
		return Plateau{}
	}
	value, unit, err := thermal.ParseConcentration(text)
	if err != nil {
		d.reportError(n, err)
		return Plateau{}
	}
	return d.inUnit(n, u, value, unit)
}

// inUnit converts a value to the unit of the element, or decides that unit.
func (d *decoder) inUnit(n *node, u *units, v thermal.Uncertain, unit string) Plateau {
	if u.unit == "" {
		u.unit, u.from = unit, n
	}
	factor, ok := thermal.ConcentrationFactor(unit, u.unit)
	switch {
	case !ok:
		d.report(n, fmt.Sprintf("in %s, but line %d has %s", unit, u.from.line, u.unit), "give both in one unit")
	case v.Value < 0:
		d.report(n, "below zero", "a value is zero or more")
	case v.Value*factor > maxAmount(u.unit):
		d.report(n, fmt.Sprintf("more than all there is, %.0f %s", maxAmount(u.unit), u.unit), "check the unit")
	case v.Sigma*factor > maxAmount(u.unit):
		d.report(n, fmt.Sprintf("its error is more than all there is, %.0f %s", maxAmount(u.unit), u.unit), "check the unit")
	}
	return Plateau{Value: v.Value * factor, Sigma: v.Sigma * factor}
}

// maxAmount returns the value of a unit that is everything.
func maxAmount(unit string) float64 {
	switch unit {
	case "ppm":
		return 1e6
	case "wt%", "%":
		return 100
	}
	return 1
}

// concentrationUnit reads the unit that stands beside bare numbers, "" if none
// does.
func (d *decoder) concentrationUnit(n *node) string {
	const remedy = `write unit = "ppm", "wt%", "mole fraction" or "%"`
	text, ok := d.text(n, remedy)
	if !ok {
		return ""
	}
	unit, ok := thermal.UnitName(text, thermal.Concentration)
	if !ok {
		d.reportWord(n, "no unit of a concentration", thermal.UnitNames(thermal.Concentration), remedy)
	}
	return unit
}
