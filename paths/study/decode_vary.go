package study

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"bankfire/thermal"
)

const varyForms = `write { from = "640 C", to = "740 C" }, { choices = ["2 day", "20 day"] }, "12 +- 2 kyr" or "{life} - {hot}"`

// vary reads the values of a family, those tied to others last.
func (d *decoder) vary(n *node, f *Family) {
	if !d.is(n, tableNode, `write [family.vary] and a line for each value, such as store = { from = "640 C", to = "740 C" }`) {
		return
	}
	if len(n.keys) == 0 {
		d.report(n, "nothing varies", "write a value, or make it a [[path]]")
	}
	var tied []*key
	for i := range n.keys {
		k := &n.keys[i]
		switch {
		case !valueName(k.name):
			d.reportKey(n, k, "not a name for a value", "use letters, digits, - and _")
		case k.value.kind == textNode && strings.ContainsAny(k.value.text, "{}"):
			tied = append(tied, k)
		default:
			d.addValue(f, k.name, d.value(k.value))
		}
	}
	for len(tied) > 0 {
		ready := slices.IndexFunc(tied, func(k *key) bool {
			return !slices.ContainsFunc(tied, func(o *key) bool { return speaksOf(k.value.text, o.name) })
		})
		if ready < 0 {
			d.report(tied[0].value, "tied to itself, round about", "tie values to others that are drawn")
			return
		}
		k := tied[ready]
		d.addValue(f, k.name, d.tie(k.value))
		tied = slices.Delete(tied, ready, ready+1)
	}
}

func valueName(name string) bool {
	return name != "" && !strings.ContainsFunc(name, func(r rune) bool { return !bareKey(r) })
}

// speaksOf reports whether an expression names the value.
func speaksOf(text, name string) bool {
	for _, part := range strings.Split(text, "{")[1:] {
		inner, _, _ := strings.Cut(part, "}")
		if strings.TrimSpace(inner) == name {
			return true
		}
	}
	return false
}

// addValue adds a value that was read to the family and to what legs may name.
func (d *decoder) addValue(f *Family, name string, v Value) {
	v.Name = name
	o := d.open
	middle := 0.0
	if v.Kind == Tied {
		middle = v.tie.at(o.middle)
	} else {
		middle = v.at(0.5)
	}
	f.Values = append(f.Values, v)
	o.names.name, o.names.is = append(o.names.name, name), append(o.names.is, v.is)
	o.middle = append(o.middle, middle)
}

// tie reads a value that follows from others.
func (d *decoder) tie(n *node) Value {
	e, m, refused := d.open.names.parse(n.text)
	if refused != nil {
		refused.Value = thermal.Shorten(n.text)
		d.add(refused.At(d.place(n)))
	}
	return Value{Kind: Tied, is: m, tie: e}
}

// value reads a value that is drawn.
func (d *decoder) value(n *node) Value {
	switch {
	case n.kind == textNode:
		return d.normal(n)
	case !d.is(n, tableNode, varyForms):
		return Value{}
	}
	d.keys(n, varyTable)
	if c := n.get("choices"); c != nil {
		d.besideChoices(n)
		return d.choices(c)
	}
	return d.span(n)
}

// besideChoices reports what does not go with choices.
func (d *decoder) besideChoices(n *node) {
	for _, other := range []string{"from", "to", "spread"} {
		if v := n.get(other); v != nil {
			d.report(v, "beside choices", "keep choices, or from and to")
		}
	}
}

// spread reads whether a range is even in the logarithm.
func (d *decoder) spread(n *node) (log bool) {
	const remedy = `want "even" or "log"`
	text, ok := d.text(n, remedy)
	if ok && text != "even" && text != "log" {
		d.reportWord(n, "no spread", []string{"even", "log"}, remedy)
	}
	return text == "log"
}

// normal reads a value with an error, such as a dated age.
func (d *decoder) normal(n *node) Value {
	x, m, refused := readAny(n.text)
	if refused != nil {
		d.report(n, refused.Problem, varyForms)
		return Value{}
	}
	if x.Sigma == 0 {
		d.report(n, "does not vary", "write it in the legs themselves, or give it an error: \"12 +- 2 kyr\"")
	}
	return Value{Kind: Normal, is: m, Mean: x.Value, Sigma: x.Sigma}
}

// open reads one value of a range or choice, a quantity in quotes or a bare number.
func (d *decoder) openValue(n *node) (float64, measure) {
	if n == nil {
		return 0, measure{}
	}
	if n.kind == numberNode {
		return n.number, measure{plain: true, whole: n.whole}
	}
	text, ok := d.text(n, varyForms)
	if !ok {
		return 0, measure{}
	}
	x, m, refused := readAny(text)
	switch {
	case refused != nil:
		d.report(n, refused.Problem, refused.Remedy)
	case x.Sigma != 0:
		d.report(n, "has an error", "want a single value")
	case m.plain:
		d.report(n, "a number without a unit", "write it with its unit, or without quotes if it has none")
	}
	return x.Value, m
}

func (d *decoder) choices(n *node) Value {
	const remedy = `write the values to choose from, such as choices = ["2 day", "20 day"]`
	v := Value{Kind: Chosen}
	if !d.is(n, arrayNode, remedy) {
		return v
	}
	if len(n.items) < 2 {
		d.report(n, "fewer than two choices", remedy)
	}
	for i, item := range n.items {
		x, m := d.openValue(item)
		switch {
		case i == 0:
			v.is = m
		case !m.like(v.is) && d.faults == 0:
			d.report(item, fmt.Sprintf("%s among choices of which the first is %s", m, v.is), "want values of one kind")
		default:
			v.is.whole, v.is.level = v.is.whole && m.whole, v.is.level || m.level
		}
		v.Choices = append(v.Choices, x)
	}
	return v
}

// span reads a range: even, or log, which is even in the logarithm.
func (d *decoder) span(n *node) Value {
	from, to := d.need(n, "from", varyForms), d.need(n, "to", varyForms)
	lo, m := d.openValue(from)
	hi, of := d.openValue(to)
	v := Value{Kind: Ranged, Lo: lo, Hi: hi, is: m}
	v.is.whole, v.is.level = m.whole && of.whole, m.level || of.level
	v.Log = d.spread(n.get("spread"))
	switch {
	case from == nil || to == nil || d.faults > 0:
	case !m.like(of):
		d.report(to, fmt.Sprintf("%s, but from is %s", of, m), "want both of one kind")
	case !(lo < hi):
		d.report(to, "not above from", "want the smaller end first")
	case v.Log && !(lo > 0):
		d.report(from, "not above zero", `a log spread begins above zero; want spread = "even", or a larger from`)
	case v.Log && m.dim == thermal.Temperature && !m.plain:
		d.report(n.get("spread"), "of a temperature, whose zero is far away", `want "even"`)
	case v.is.plain && v.is.whole && math.Max(-lo, hi) > mostWhole:
		d.report(to, "too large for a whole number", "want something smaller")
	}
	return v
}

// mostWhole bounds whole numbers that are drawn.
const mostWhole = 1e9
