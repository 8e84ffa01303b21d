package study

import (
	"fmt"
	"maps"
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
	if v := n.get("sigma"); v != nil {
		law.Sigma, _ = d.number(v, "write the standard deviation of log10 D at mid-range as a number, such as sigma = 0.2")
	}
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

// law reads the law of an element: a key of the catalogue, the name of a
// [[law]], or the constants themselves.
func (d *decoder) law(n *node) Law {
	const example = `write a key that "bankfire laws" lists, the name of a [[law]], or { D0 = "7e-8 m2/s", E = "273 kJ/mol" }`
	if n == nil {
		return Law{}
	}
	if n.get("a") != nil || n.get("b") != nil || n.get("c") != nil {
		d.report(n, "a law by direction is not known in this version", "name the law along your traverse")
		return Law{}
	}
	if n.kind == tableNode {
		return d.ownLaw(n, lawTable)
	}
	key, ok := d.text(n, example)
	if !ok {
		return Law{}
	}
	if law, own := d.laws[key]; own {
		return law
	}
	row, err := catalogue.Find(key)
	if err != nil {
		d.unknownLaw(n, key, err)
		return Law{}
	}
	return d.published(n, row)
}

func (d *decoder) unknownLaw(n *node, key string, err error) {
	if near := nearest(key, slices.Sorted(maps.Keys(d.laws))); near != "" {
		d.report(n, "neither in the catalogue nor a [[law]] of this study", fmt.Sprintf("did you mean %q?", near))
		return
	}
	d.reportError(n, err)
}

// published returns the law of a row of the catalogue.
func (d *decoder) published(n *node, row *catalogue.Row) Law {
	law := Law{Key: row.Key, Row: row, Sigma: row.SigmaMid.Value, TMin: row.TMin, TMax: row.TMax, Citation: row.Citation}
	if needs := row.Needs(); len(needs) > 0 {
		d.report(n, "this law depends on "+strings.Join(needs, ", ")+", which a study cannot give yet",
			"run "+row.Command()+" with your values, and paste the line that it prints")
		return law
	}
	var err error
	if law.Law, err = row.Law(nil); err != nil {
		d.reportError(n, err)
	}
	return law
}
