package study

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// ownLaws reads every [[law]] of the study, which elements name like a law of
// the catalogue.
func (d *decoder) ownLaws(n *node) {
	if n == nil {
		return
	}
	seen := map[string]int{}
	for _, t := range d.tables(n, `begin each law with "[[law]]"`) {
		law := d.ownLaw(t, ownLawTable)
		v := d.need(t, "name", `write a name, such as name = "mine"`)
		name, ok := "", false
		if v != nil {
			name, ok = d.name(v, `write a name, such as "mine"`)
		}
		if !ok {
			continue
		}
		if _, err := catalogue.Find(name); err == nil {
			d.report(v, "a law of the catalogue has this key", "choose another name")
		}
		d.unique(v, name, seen)
		law.Key = name
		d.laws[name] = law
	}
}

// ownLaw reads a law written in the study.
func (d *decoder) ownLaw(n *node, kind tableKind) Law {
	d.keys(n, kind)
	var law Law
	const example = `write D0 = "7e-8 m2/s" and E = "273 kJ/mol"`
	d0, ok0 := d.quantity(d.need(n, "D0", example), frequency)
	e, okE := d.quantity(d.need(n, "E", example), energy)
	if ok0 && okE {
		law.Law = diffusion.NewLaw(d0, e)
	}
	if v := n.get("host"); v != nil {
		host := ownLawHostTable
		if kind == lawTable {
			host = lawHostTable
		}
		d.lawHost(v, host, &law)
	}
	if v := n.get("own"); v != nil {
		own := ownLawOwnTable
		if kind == lawTable {
			own = lawOwnTable
		}
		d.lawOwn(v, own, &law)
	}
	if v := n.get("sigma"); v != nil {
		law.Sigma, _ = d.number(v, "write the standard deviation of log10 D at mid-range as a number, such as sigma = 0.2")
	}
	d.oddLaw(n, e, &law)
	if v := n.get("range"); v != nil {
		law.TMin, law.TMax = d.calibrated(v)
	}
	if v := n.get("citation"); v != nil {
		law.Citation, _ = d.text(v, "write where the law was published")
	}
	if v := n.get("caution"); v != nil {
		law.Caution, _ = d.text(v, "write what belongs beside every verdict that rests on the law")
	}
	return law
}

func (d *decoder) calibrated(n *node) (lo, hi float64) {
	const remedy = `write the calibrated temperatures, such as "700..1150 C"`
	text, ok := d.text(n, remedy)
	if !ok {
		return 0, 0
	}
	lo, hi, err := thermal.ParseRange(text, thermal.Temperature)
	switch {
	case err != nil:
		d.reportError(n, err)
	case d.within(n, lo, temperature) && d.within(n, hi, temperature):
		return lo, hi
	}
	return 0, 0
}

// law reads the law of an element with the factor that the study has on it.
func (d *decoder) law(n *node, c *Crystal, e *Element) Law {
	if n == nil {
		return Law{}
	}
	law := d.unscaled(n, c, e)
	if v := n.get("times"); v != nil {
		d.factor(v, &law)
	}
	return law
}

// unscaled reads the law of an element: a key of the catalogue, the name of a
// [[law]], laws by direction, one of two regimes, or the constants themselves.
func (d *decoder) unscaled(n *node, c *Crystal, e *Element) Law {
	const example = `write a key that "bankfire laws" lists, the name of a [[law]], or { D0 = "7e-8 m2/s", E = "273 kJ/mol" }`
	switch {
	case slices.ContainsFunc(directionKeys[:], func(key string) bool { return n.get(key) != nil }):
		return d.directed(n, c, e)
	case switches(n):
		return d.switched(n, c, e)
	case n.get("like") != nil:
		return d.like(n, c, e)
	case n.kind == tableNode:
		return d.onHost(n, d.ownLaw(n, lawTable), c)
	}
	key, ok := d.text(n, example)
	if !ok {
		return Law{}
	}
	if law, own := d.laws[key]; own {
		return d.onHost(n, law, c)
	}
	row, err := catalogue.Find(key)
	if err != nil {
		d.unknownLaw(n, key, err)
		return Law{}
	}
	return d.published(n, row, c, e)
}

// onHost reports a law of the study that depends on a host that is not given.
func (d *decoder) onHost(n *node, law Law, c *Crystal) Law {
	if law.onAHost() && !c.Hosted && len(c.Zones) > 0 {
		d.report(n, "this law depends on the host's composition", hostRemedy)
	}
	return law
}

func (d *decoder) unknownLaw(n *node, key string, err error) {
	if near := nearest(key, slices.Sorted(maps.Keys(d.laws))); near != "" {
		d.report(n, "neither in the catalogue nor a [[law]] of this study", fmt.Sprintf("did you mean %q?", near))
		return
	}
	d.reportError(n, err)
}

// published returns the law of a row of the catalogue under the study's
// conditions. Where it depends on a composition, that of the host or the element's
// own, it is that of the reference, and the zones or values have the factor of
// their own.
func (d *decoder) published(n *node, row *catalogue.Row, c *Crystal, e *Element) Law {
	law := Law{Key: row.Key, Row: row, Sigma: row.SigmaMid.Value, TMin: row.TMin, TMax: row.TMax, Citation: row.Citation}
	if !d.givesAll(n, row, c, e) {
		return law
	}
	at := catalogue.Conditions{}
	switch term := row.Composition; {
	case e.onHost(row):
		at[term.Variable] = term.Reference
		of := hostTerm(row)
		law.HostSlope, law.HostAt, law.HostSlopeSigma, law.SlopeOf = of.HostSlope, of.HostAt, of.HostSlopeSigma, of.SlopeOf
	case row.OwnComposition():
		at[term.Variable] = term.Reference
		d.ownIron(n, row, e, &law)
	}
	d.underConditions(n, row, at, &law)
	return law
}

// hostTerm is a law with nothing but how the law of a row depends on the host.
func hostTerm(row *catalogue.Row) Law {
	term := &row.Composition
	if _, on := row.OnHost(); !on && !row.OwnComposition() {
		return Law{}
	}
	return Law{Key: row.Key, HostSlope: math.Ln10 * term.Slope, HostAt: term.Reference, HostSlopeSigma: math.Ln10 * term.Sigma, SlopeOf: term.SlopeOf}
}

// onHost reports whether the law of a row depends on the host of the zones: a
// tracer has one of its own XFe too, which iron and magnesium are themselves.
func (e *Element) onHost(row *catalogue.Row) bool {
	_, on := row.OnHost()
	return on || row.OwnComposition() && !e.ironOrMagnesium()
}

// givesAll reports every condition of the law that the study does not give.
func (d *decoder) givesAll(n *node, row *catalogue.Row, c *Crystal, e *Element) bool {
	var missing, conditions []string
	remedy, lacking := "", false
	for _, name := range row.Needs() {
		switch {
		case name == row.Composition.Variable && e.onHost(row):
			if !c.Hosted && len(c.Zones) > 0 {
				missing, remedy = append(missing, name), hostRemedy+"; or "
				if name == catalogue.XFe {
					remedy = e.Name + " is neither Fe nor Mg: give every zone of the crystal its XFe, such as host = 0.12; or "
				}
			}
		case name == row.Composition.Variable && row.OwnComposition():
		default:
			all, some := d.gives(name)
			switch {
			case some && !all:
				d.lacks(name, row.Key)
				lacking = true
			case !all:
				missing, conditions = append(missing, name), append(conditions, name+" = "+conditionExample(name))
			}
		}
	}
	if len(missing) == 0 {
		return !lacking
	}
	if len(conditions) > 0 {
		remedy = "write [conditions] and below it " + strings.Join(conditions, ", ") + "; or "
	}
	d.report(n, "this law depends on "+strings.Join(missing, ", ")+", not given in this study",
		remedy+"run "+row.Command()+" with your values, and paste the line that it prints")
	return false
}

// conditionExample is how a condition is written in a study.
func conditionExample(name string) string {
	switch name {
	case catalogue.Pressure:
		return `"2 kbar"`
	case catalogue.FO2:
		return `"NNO+0.3"`
	}
	return "0.6"
}
