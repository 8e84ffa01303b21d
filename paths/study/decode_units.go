package study

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// units is what the values of an element have to agree with while they are read.
type units struct {
	element  string // its name, which says what Fo and An are of it
	unit     string
	from     *node            // the value that decided it
	measured bool             // there is a traverse to fit free values to
	known    map[float64]bool // values of plateaux and rims that the study states
}

// amount reads a value of the element: "free", "58 ppm", "58 +- 1.5 ppm", or a
// bare number whose unit stands beside it (beside is "" if none does).
func (d *decoder) amount(n *node, u *units, beside string) Plateau {
	const example = `write it like "58 ppm", "58 +- 1.5 ppm" or "free"`
	switch {
	case d.isOpen(n):
		return d.filledAmount(n, u, beside)
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
	switch {
	case !looksLikeValue(strings.TrimSpace(text)):
		d.reportWord(n, "neither a value nor free", []string{"free"}, example)
		return Plateau{}
	case err != nil:
		d.reportError(n, err)
		return Plateau{}
	}
	return d.inUnit(n, u, value, unit)
}

// inUnit converts a value to the unit of the element, or decides that unit.
func (d *decoder) inUnit(n *node, u *units, v thermal.Uncertain, unit string) Plateau {
	if unit == "Fo" || unit == "An" {
		of, ok := u.of(unit, percent)
		if !ok {
			d.report(n, "in "+unit+", which says nothing of "+u.element, componentRemedy)
			return Plateau{}
		}
		v, unit = thermal.Uncertain{Value: of.value(v.Value), Sigma: of.sigma(v.Sigma)}, moleFraction
	}
	factor, ok := d.unitFactor(n, u, unit)
	switch {
	case !ok:
	case v.Value < 0:
		d.report(n, "below zero", "a value is zero or more")
	case v.Value*factor > traverse.Whole(u.unit):
		d.report(n, fmt.Sprintf("more than all there is, %.0f %s", traverse.Whole(u.unit), u.unit), "check the unit")
	case v.Sigma*factor > traverse.Whole(u.unit):
		d.report(n, fmt.Sprintf("its error is more than all there is, %.0f %s", traverse.Whole(u.unit), u.unit), "check the unit")
	}
	u.known[v.Value*factor] = true
	return Plateau{Value: v.Value * factor, Sigma: v.Sigma * factor}
}

// unitFactor is what a value in a unit is multiplied by to be in that of the element,
// which it decides if nothing has.
func (d *decoder) unitFactor(n *node, u *units, unit string) (float64, bool) {
	if u.unit == "" {
		u.unit, u.from = unit, n
	}
	factor, ok := thermal.ConcentrationFactor(unit, u.unit)
	if !ok {
		d.report(n, fmt.Sprintf("in %s, but line %d has %s", unit, u.from.line, u.unit), "give both in one unit")
	}
	return factor, ok
}

// concentrationUnit reads the unit that stands beside bare numbers, "" if none
// does.
func (d *decoder) concentrationUnit(n *node) string {
	const remedy = `write unit = "ppm", "wt%", "mole fraction", "mol%", "%", "Fo", "An" or "grey"`
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

// Units that the study treats in ways of their own.
const (
	moleFraction = "mole fraction"
	percent      = "%"
)

// component is what a value of Fo or An is of an element: its mole fraction is
// scale x + offset.
type component struct {
	scale, offset float64
	words         string
}

func (c component) value(x float64) float64 { return float64(c.scale*x) + c.offset }

func (c component) sigma(s float64) float64 { return math.Abs(c.scale) * s }

const componentRemedy = `want Fo for an element named Fe or Mg, An for one named Ca or Na; else write ppm, wt% or mole fraction`

// of returns what forsterite (Fo) or anorthite (An), in per cent or as a mole
// fraction, is of the element. The first letters of its name decide:
//
//	Fo   of Mg: Mg/(Mg+Fe) = Fo/100   of Fe: Fe/(Mg+Fe) = 1 - Fo/100
//	An   of Ca: Ca/(Ca+Na) = An/100   of Na: Na/(Ca+Na) = 1 - An/100
func (u *units) of(name, unit string) (component, bool) {
	letters := strings.TrimPrefix(u.element, "X")
	letters = letters[:min(2, len(letters))]
	var c component
	switch name + " of " + letters {
	case "Fo of Mg", "Fo of Fo", "An of Ca", "An of An":
		c = component{scale: 1, words: name + "/100"}
	case "Fo of Fe", "Fo of Fa", "An of Na", "An of Ab":
		c = component{scale: -1, offset: 1, words: "1 - " + name + "/100"}
	default:
		return c, false
	}
	if unit != moleFraction {
		c.scale /= 100
	}
	return c, true
}

// named returns which component a column holds, "" if neither: by its unit, as
// which the reader of tables also takes the per cent of "Fo [mol%]", or by its
// name, "XAn [mole fraction]".
func named(header, unit string) string {
	if unit == "Fo" || unit == "An" {
		return unit
	}
	name, _ := traverse.SplitHeader(header, thermal.Concentration)
	switch name = strings.TrimPrefix(name, "X"); name {
	case "Fo", "An":
		return name
	}
	return ""
}

// moles turns values in Fo or An, and their errors if there are any, into the
// mole fraction of the element, in place. It returns the unit they are in then.
func (d *decoder) moles(n *node, u *units, header, unit string, values, sigmas []float64) (string, component) {
	name := named(header, unit)
	if name == "" {
		return unit, component{}
	}
	of, ok := u.of(name, unit)
	switch {
	case unit == "ppm" || unit == "wt%" || unit == traverse.Grey:
		d.report(n, fmt.Sprintf("%s in %s, but it counts moles", name, unit), fmt.Sprintf("write [mol%%] or [%s]", name))
		return unit, component{}
	case !ok:
		d.report(n, name+" says nothing of "+u.element, componentRemedy)
		return unit, component{}
	}
	for i := range values {
		values[i] = of.value(values[i])
	}
	for i := range sigmas {
		sigmas[i] = of.sigma(sigmas[i])
	}
	return moleFraction, of
}

// component turns a traverse of Fo or An into one of the element.
func (d *decoder) component(n *node, t *traverse.Traverse, u *units, header string) {
	unit, of := d.moles(n, u, header, t.Unit, t.Value, t.Sigma)
	if of.scale == 0 {
		return
	}
	t.Unit = unit
	if of.scale < 0 && t.Limit != nil {
		d.report(n, "what is below a limit of the one component is above one of the other", `leave such rows out: below = "skip"`)
	}
	t.Notes = append(t.Notes, fmt.Sprintf("%s: %s is read as the mole fraction %s", t.Name, u.element, of.words))
}

// grey settles in which unit an element is that was measured in grey levels:
// that of the values which the study states, an unknown scale and offset between
// them, or grey levels if it states none.
func (d *decoder) grey(n *node, e *Element, u *units) {
	switch {
	case u.unit == "":
		d.note("%s: no value is stated, so all are fitted in grey levels", e.Name)
		u.unit, e.Traverse.Grey = traverse.Grey, false
	case u.unit == traverse.Grey:
		e.Traverse.Grey = false
	case len(u.known) < 2:
		d.report(n, "measured in grey levels, and one stated value does not tell their scale and offset",
			"state a second plateau or rim value that differs, or leave all free")
	case e.uncertain():
		d.report(n, "relative values have no unit, so a plateau or rim value known with an error cannot be tied to them",
			`make that value "free", or give it without an error`)
	}
}

// uncertain reports whether a plateau or a rim value is known with an error.
func (e *Element) uncertain() bool {
	return slices.ContainsFunc(e.Start.plateaux(), func(p Plateau) bool { return p.Sigma > 0 }) ||
		slices.ContainsFunc(slices.Concat(e.Inner, e.Rims), func(r Rim) bool { return r.valued() && r.Value.Sigma > 0 })
}
