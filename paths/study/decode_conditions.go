package study

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strconv"
	"strings"

	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

var (
	pressure = bound{thermal.Pressure, true, 1e12, "1e12 Pa", "2 kbar"}
	fugacity = bound{thermal.Pressure, false, 1e12, "1e12 Pa", "1e-7 Pa"}
)

// conditions reads the conditions of the study, or of legs: what they do not state
// is as in from. A value that is wrong is taken as 1, so that no law misses it.
func (d *decoder) conditions(n *node, kind tableKind, from Conditions) Conditions {
	c := from
	c.Given, c.Typed = maps.Clone(from.Given), nil
	d.keys(n, kind)
	for _, name := range tables[kind].Keys {
		v := n.get(name)
		if v == nil {
			i := slices.IndexFunc(from.Typed, func(typed string) bool { return strings.HasPrefix(typed, name+" ") })
			if i >= 0 {
				c.Typed = append(c.Typed, from.Typed[i])
			}
			continue
		}
		c.Typed = append(c.Typed, name+" "+v.text)
		switch name {
		case "pressure":
			c.Given[catalogue.Pressure], _ = d.quantity(v, pressure)
		case "fO2":
			c.Buffer, c.Offset = nil, 0
			d.fugacity(v, &c)
		case "aTiO2":
			c.Given[catalogue.ATiO2] = d.activity(v)
		case "aSiO2":
			c.Given[catalogue.ASiO2] = d.activity(v)
		}
	}
	return c
}

// maxActivity is far above any in a magma, whose melts are hardly supersaturated.
const maxActivity = 10

func (d *decoder) activity(n *node) float64 {
	const remedy = "write an activity as a number above 0, such as 0.6; 1 is saturation"
	if !d.is(n, numberNode, remedy) {
		return 1
	}
	if !(n.number >= leastNumber && n.number <= maxActivity) {
		d.report(n, fmt.Sprintf("not above 0 and up to %d", maxActivity), remedy)
		return 1
	}
	if n.number > saturated {
		d.noteOnce("%s = %s is above saturation, which is 1: is it meant?", n.field, n.text)
	}
	return n.number
}

// fugacity reads fO2: a buffer with an offset in log10 units, or a value that
// stays the same.
func (d *decoder) fugacity(n *node, c *Conditions) {
	c.Given[catalogue.FO2] = 1
	const remedy = `write a buffer with an offset, such as "NNO+0.3", or a pressure, such as "1e-7 Pa"`
	if n.kind == numberNode {
		d.report(n, "a number without a unit", remedy+of10(n.text))
		return
	}
	text, ok := d.text(n, remedy)
	if !ok {
		return
	}
	if number := strings.TrimSpace(text); plainNumber(number) {
		d.report(n, "a number without a unit", remedy+of10(number))
		return
	}
	if looksLikeValue(strings.TrimSpace(text)) {
		if x, ok := d.quantity(n, fugacity); ok {
			c.Given[catalogue.FO2] = x
			if x > oxygenOfAir {
				d.noteOnce("fO2 = %q is more than that of air, 0.21 bar: is the unit right?", text)
			}
			d.noteOnce("fO2 is held at %s at every temperature; in nature a buffer follows the temperature, as fO2 = \"NNO\" does", text)
		}
		return
	}
	name, offset, ok := catalogue.CutOffset(text)
	buffer, known := catalogue.FindBuffer(name)
	switch {
	case !known:
		d.reportBuffer(n, name)
	case !ok:
		d.report(n, "its offset is no number of log10 units", remedy)
	case !(math.Abs(offset) <= catalogue.MaxOffset):
		d.report(n, fmt.Sprintf("more than %d log10 units off the buffer", catalogue.MaxOffset), remedy)
	default:
		c.Buffer, c.Offset = buffer, offset
		delete(c.Given, catalogue.FO2)
	}
}

// of10 adds to a remedy how the log10 of an oxygen fugacity, which a number below zero
// must be, is written.
func of10(number string) string {
	x, err := strconv.ParseFloat(number, 64)
	if err != nil || !(x < 0 && x > -100) {
		return ""
	}
	return fmt.Sprintf(`; if it is log10 of fO2 in bar, "%.2g bar"`, math.Pow(10, x))
}

func plainNumber(text string) bool {
	_, err := strconv.ParseFloat(text, 64)
	return err == nil
}

func (d *decoder) reportBuffer(n *node, name string) {
	var names []string
	for _, b := range catalogue.Buffers() {
		names = append(names, b.Names...)
	}
	remedy := fmt.Sprintf(`known are %s; or write fO2 as a pressure, such as "1e-7 Pa"`, strings.Join(names, ", "))
	if near := nearest(name, names); near != "" {
		remedy = fmt.Sprintf("did you mean %q?", near)
	}
	d.report(n, "no known buffer of oxygen fugacity", remedy)
}

// gives reports whether the study gives a condition of a law.
func (c *Conditions) gives(name string) bool {
	_, given := c.Given[name]
	return given || name == catalogue.FO2 && c.Buffer != nil
}
