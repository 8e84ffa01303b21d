package study

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"bankfire/thermal"
)

// expression is a sum of products with the values of a family, in SI:
//
//	{life} - {hot}, {store} + 130 K, 2 * {wait}, {n} * {dwell} + 10 yr.
type expression struct {
	text  string
	terms []product
}

// product is a number times some of the values.
type product struct {
	times float64
	of    []int
}

// at returns what the expression comes to.
func (e *expression) at(values []float64) float64 {
	sum := 0.0
	for i := range e.terms {
		x := e.terms[i].times
		for _, k := range e.terms[i].of {
			x *= values[k]
		}
		sum += x
	}
	return sum
}

// measure is what a value or an expression measures.
type measure struct {
	plain bool // a number without a unit
	dim   thermal.Dimension
	// level says that it is a temperature on a scale with a zero of its own, C or
	// F, so that two cannot be added; one in K may be a difference as well.
	level bool
	whole bool   // a plain number that is always whole
	unit  string // of a concentration: values are in it
}

func (m measure) String() string {
	if m.plain {
		return "a plain number"
	}
	if m.unit != "" {
		return m.dim.String() + " in " + m.unit
	}
	return m.dim.String()
}

// like reports whether both measure the same kind of thing.
func (m measure) like(o measure) bool {
	return m.plain == o.plain && (m.plain || m.dim == o.dim && m.unit == o.unit)
}

// openDimensions are the kinds of quantity that a leg or a crystal has, but for
// concentrations, whose unit stays.
var openDimensions = [...]thermal.Dimension{thermal.Temperature, thermal.Duration, thermal.Length, thermal.Diffusivity, thermal.Velocity}

// readAny reads a plain number or a quantity of any kind that a leg has, perhaps
// with an error.
func readAny(text string) (value thermal.Uncertain, m measure, refused *thermal.InputError) {
	if value, err := thermal.ParseFactor(text); err == nil {
		return value, measure{plain: true, whole: value.Sigma == 0 && value.Value == math.Trunc(value.Value)}, nil
	}
	for _, dim := range openDimensions {
		if value, err := thermal.ParseUncertain(text, dim); err == nil {
			level := dim == thermal.Temperature && !strings.HasSuffix(strings.TrimSpace(text), "K")
			return value, measure{dim: dim, level: level}, nil
		}
	}
	if value, unit, err := thermal.ParseConcentration(text); err == nil {
		return value, measure{dim: thermal.Concentration, unit: unit}, nil
	}
	return value, m, &thermal.InputError{Value: text, Problem: "neither a number nor a quantity that a leg or a crystal has",
		Remedy: `want a temperature, a duration, a length, a diffusivity, a velocity or a concentration with its unit, such as "12 kyr"`}
}

// names are the values that an expression may speak of.
type names struct {
	name []string
	is   []measure // of each; plain and not whole where it is not known yet
}

const expressionForms = `write sums and products of values in braces, such as "{life} - {hot}" or "2 * {wait} + 10 yr"`

// parse reads an expression.
func (n *names) parse(text string) (expression, measure, *thermal.InputError) {
	e := expression{text: text}
	var m measure
	levels := 0 // temperatures with a zero of their own, each with its sign
	for i, part := range cutTerms(text) {
		p, of, refused := n.product(part.text)
		if refused != nil {
			return e, m, refused
		}
		switch {
		case i == 0:
			m = of
		case !m.like(of):
			return e, m, &thermal.InputError{Problem: fmt.Sprintf("%s and %s do not add up", m, of), Remedy: "want terms of one kind"}
		}
		m.whole = m.whole && of.whole
		if part.minus {
			p.times = -p.times
		}
		if of.level {
			levels += 1 - 2*btoi(part.minus)
		}
		e.terms = append(e.terms, p)
	}
	switch {
	case len(e.terms) == 0:
		return e, m, &thermal.InputError{Problem: "empty", Remedy: expressionForms}
	case levels != 0 && levels != 1:
		return e, m, &thermal.InputError{Problem: "adds or takes away two temperatures", Remedy: `give the second as a difference in K, such as "{store} + 130 K"`}
	}
	m.level = levels == 1
	return e, m, nil
}

func btoi(b bool) int {
	if b {
		return 1
	}
	return 0
}

// signed is a term with the sign before it.
type signed struct {
	text  string
	minus bool
}

// cutTerms cuts a sum at every + or - with blanks around it.
func cutTerms(text string) []signed {
	var out []signed
	now := signed{}
	for _, word := range strings.Fields(text) {
		if word != "+" && word != "-" {
			now.text = strings.TrimSpace(now.text + " " + word)
			continue
		}
		if now.text != "" || len(out) > 0 || now.minus {
			out = append(out, now)
		}
		now = signed{minus: word == "-"}
	}
	return append(out, now)
}

// product reads a term: factors of which at most one has a unit.
func (n *names) product(text string) (product, measure, *thermal.InputError) {
	p := product{times: 1}
	m := measure{plain: true, whole: true}
	factors := strings.Split(text, "*")
	for _, f := range factors {
		of, refused := n.factor(&p, strings.TrimSpace(f))
		switch {
		case refused != nil:
			return p, m, refused
		case !of.plain && !m.plain:
			return p, m, &thermal.InputError{Problem: fmt.Sprintf("%s times %s", m, of), Remedy: "multiply with plain numbers only"}
		case of.level && len(factors) > 1:
			return p, m, &thermal.InputError{Problem: "a multiple of a temperature in C or F", Remedy: "multiply a difference in K"}
		case of.plain:
			m.whole = m.whole && of.whole
		default:
			m = measure{dim: of.dim, level: of.level, unit: of.unit}
		}
	}
	return p, m, nil
}

// factor multiplies the product by a value in braces, a number or a quantity.
func (n *names) factor(p *product, text string) (measure, *thermal.InputError) {
	if text == "" {
		return measure{}, &thermal.InputError{Problem: "a term is missing", Remedy: expressionForms}
	}
	inner, open := strings.CutPrefix(text, "{")
	name, closed := strings.CutSuffix(inner, "}")
	if !open && !closed {
		value, m, refused := readAny(text)
		if refused == nil && value.Sigma != 0 {
			refused = &thermal.InputError{Problem: "has an error", Remedy: "give it a name of its own in [family.vary]"}
		}
		p.times *= value.Value
		return m, refused
	}
	if !open || !closed || strings.ContainsAny(name, "{}") {
		return measure{}, &thermal.InputError{Problem: "braces that do not match", Remedy: expressionForms}
	}
	k := slices.Index(n.name, strings.TrimSpace(name))
	if k < 0 {
		remedy := "write it under [family.vary]"
		if near := nearest(name, n.name); near != "" {
			remedy = fmt.Sprintf("did you mean {%s}?", near)
		}
		return measure{}, &thermal.InputError{Problem: fmt.Sprintf("no value is named %q", name), Remedy: remedy}
	}
	p.of = append(p.of, k)
	return n.is[k], nil
}
