package study

import (
	"fmt"
	"slices"
	"strings"

	"bankfire/thermal"
)

// eachReheat are the keys whose values every reheat of a leg draws for itself.
var eachReheat = []string{"peak", "rise", "dwell", "efold"}

// howMany is the bound of how many reheats a leg has in a time.
var howMany = bound{zero: true, top: thermal.MaxLegs, topText: fmt.Sprint(thermal.MaxLegs), example: "5"}

// atRandom reports whether a family, or a repeat, has a leg of random reheats, so that
// members differ even where no value varies.
func atRandom(n *node) bool {
	list := n.get("legs")
	return list != nil && slices.ContainsFunc(list.items, func(leg *node) bool { return leg.get("reheats") != nil || atRandom(leg) })
}

// reheats reads a leg of random reheats.
func (d *decoder) reheats(n *node, name string) {
	v := n.get("reheats")
	switch {
	case d.open == nil:
		d.report(v, "at random, in a path that is written out", "write it in a [[family]], whose members have their own each; or write every reheat as a leg")
		return
	case len(d.open.at) > 1:
		d.report(v, "at random inside a repeat, which would repeat the same ones", "write the leg outside of it")
		return
	}
	r := randomReheats{at: slices.Clone(d.open.at), words: fmt.Sprintf("the reheats on line %d", v.line), name: "number of " + name}
	if name == "" {
		r.name = fmt.Sprintf("number of reheats in leg %d", d.open.at[0]+1)
	}
	d.rate(v, &r)
	for i, b := range [...]bound{temperature, pause, pause, duration} {
		if each := n.get(eachReheat[i]); each != nil {
			r.each[i] = d.eachOf(each, b)
		}
	}
	d.open.random = append(d.open.random, r)
}

// rate reads how many reheats there are in a time, on average.
func (d *decoder) rate(n *node, r *randomReheats) {
	const remedy = `write how many there are in a time, such as reheats = "5 per kyr" or "{n} per {life}"`
	text, ok := d.text(n, remedy)
	if !ok {
		return
	}
	count, per, ok := strings.Cut(" "+text+" ", " per ")
	if !ok || strings.TrimSpace(count) == "" || strings.TrimSpace(per) == "" {
		d.report(n, "not a number per time", remedy)
		return
	}
	if per = strings.TrimSpace(per); !looksLikeValue(per) && per[0] != '{' {
		per = "1 " + per
	}
	r.rate = text
	if r.count, ok = d.holeText(n, strings.TrimSpace(count), howMany); ok {
		r.per, ok = d.holeText(n, per, duration)
	}
	if ok && !strings.ContainsAny(text, "{}") {
		d.within(n, r.count.at(nil), howMany)
		d.within(n, r.per.at(nil), duration)
	}
}

// eachOf reads what each reheat draws for itself: a value, which is that of all, a
// range or choices.
func (d *decoder) eachOf(n *node, b bound) Value {
	v := Value{Kind: Ranged, is: measure{dim: b.dim}}
	if n.kind != tableNode {
		v.Lo, _ = d.quantity(n, b)
		v.Hi = v.Lo
		return v
	}
	d.keys(n, varyTable)
	if c := n.get("choices"); c != nil {
		d.besideChoices(n)
		return d.eachChoice(c, b)
	}
	from, to := d.need(n, "from", varyForms), d.need(n, "to", varyForms)
	before := d.faults
	v.Lo, _ = d.quantity(from, b)
	v.Hi, _ = d.quantity(to, b)
	v.Log = d.spread(n.get("spread"))
	switch open := from != nil && to != nil && (d.isOpen(from) || d.isOpen(to)); {
	case from == nil || to == nil || d.faults > before:
	case v.Log && b.dim == thermal.Temperature:
		d.report(n.get("spread"), "of a temperature, whose zero is far away", `want "even"`)
	case open: // each member by itself
	case !(v.Lo < v.Hi):
		d.report(to, "not above from", "want the smaller end first")
	case v.Log && !(v.Lo > 0):
		d.report(from, "not above zero", `a log spread begins above zero; want spread = "even", or a larger from`)
	}
	return v
}

// eachChoice reads choices of the bound's dimension.
func (d *decoder) eachChoice(n *node, b bound) Value {
	before := d.faults
	v := d.choices(n)
	if want := (measure{dim: b.dim}); d.faults == before && !v.is.like(want) {
		d.report(n, fmt.Sprintf("%s where %s belongs", v.is, want), fmt.Sprintf("want something like %q", b.example))
	}
	for i, x := range v.Choices {
		if d.faults == before {
			d.within(n.items[i], x, b)
		}
	}
	return v
}

// counted adds how many reheats each leg has to the values of the family.
func (d *decoder) counted(f *Family) {
	for i := range f.random {
		f.random[i].value = len(f.Values)
		f.Values = append(f.Values, Value{Name: f.random[i].name, Kind: Counted, rate: f.random[i].rate, is: measure{plain: true, whole: true}})
	}
}
