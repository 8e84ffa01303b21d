package study

import (
	"fmt"
	"maps"
	"slices"
	"strconv"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// Setting is conditions that hold during legs: those of the study, or those with
// what a leg states of its own.
type Setting struct {
	Conditions Conditions
	Legs       int           // how many of the study's legs have it, repeated ones counted once
	First      string        // of them: leg "wake 1"
	Place      thermal.Place // of that one
}

// Of names the legs that have the setting.
func (s *Setting) Of() string {
	if s.Legs == 1 {
		return s.First
	}
	return fmt.Sprintf("%s and %d more", s.First, s.Legs-1)
}

// studyConditions reads [conditions], the first setting.
func (d *decoder) studyConditions(n *node) Conditions {
	c := Conditions{Given: catalogue.Conditions{}}
	if d.is(n, tableNode, `write [conditions] and below it pressure = "2 kbar"`) {
		c = d.conditions(n, conditionsTable, c)
	}
	d.settings = []Setting{{Conditions: c}}
	return c
}

// legConditions returns the number of the setting of a leg, which has the
// conditions of from but for what it states itself.
func (d *decoder) legConditions(leg *node, from int) int {
	n := leg.get("conditions")
	if n == nil || !d.is(n, tableNode, `write conditions = { fO2 = "NNO" } for those that differ during the leg`) {
		return from
	}
	c := d.conditions(n, duringTable, d.settings[from-1].Conditions)
	i := slices.IndexFunc(d.settings, func(s Setting) bool { return s.Conditions.same(&c) })
	if i < 0 {
		i = len(d.settings)
		d.settings = append(d.settings, Setting{Conditions: c})
	}
	return i + 1
}

// same reports whether the same holds.
func (c *Conditions) same(other *Conditions) bool {
	buffer := func(c *Conditions) string {
		if c.Buffer == nil {
			return ""
		}
		return c.Buffer.Names[0]
	}
	return maps.Equal(c.Given, other.Given) && buffer(c) == buffer(other) && c.Offset == other.Offset
}

// inForce notes that a leg has the setting of a number.
func (d *decoder) inForce(number int, leg *node, kind legKind) {
	s := &d.settings[number-1]
	if s.Legs++; s.Legs > 1 {
		return
	}
	s.First, s.Place = fmt.Sprintf("the %s leg on line %d", kind.needs[0], leg.line), d.place(leg)
	if name := leg.get("name"); name != nil {
		s.First = "leg " + strconv.Quote(name.text)
	}
}

// inUse returns the numbers of the settings that legs have, of which there is at
// least one.
func (d *decoder) inUse() []int {
	var numbers []int
	for i := range d.settings {
		if d.settings[i].Legs > 0 {
			numbers = append(numbers, i+1)
		}
	}
	if numbers == nil {
		return []int{1}
	}
	return numbers
}

// gives reports whether all legs, or some, have a condition of a law.
func (d *decoder) gives(name string) (all, some bool) { return d.give(d.inUse(), name) }

// give reports whether all settings, by their numbers, or some have a condition.
func (d *decoder) give(settings []int, name string) (all, some bool) {
	all = true
	for _, i := range settings {
		given := d.settings[i-1].Conditions.gives(name)
		all, some = all && given, some || given
	}
	return all, some
}

// lacks reports the legs without a condition that others have.
func (d *decoder) lacks(name, law string) {
	for _, i := range d.inUse() {
		s := &d.settings[i-1]
		if s.Conditions.gives(name) {
			continue
		}
		example := name + " = " + conditionExample(name)
		d.add(s.Place.Error("", fmt.Sprintf("%s has no %s, on which %s depends", s.First, name, law),
			fmt.Sprintf("write conditions = { %s } in it, or %s in [conditions]", example, example)))
	}
}

// bySetting returns the law of which of gives what acts in each setting: as it is
// where that is the same in all of them.
func (d *decoder) bySetting(of func(setting int, c *Conditions) diffusion.Law) diffusion.Law {
	var each []diffusion.Law
	numbers := d.inUse()
	for _, i := range numbers {
		each = append(each, of(i, &d.settings[i-1].Conditions))
	}
	if !slices.ContainsFunc(each, func(l diffusion.Law) bool { return !sameLaw(l, each[0]) }) {
		return each[0]
	}
	var law diffusion.Law
	for k, l := range each {
		where := windows(l)
		for j := range where {
			where[j].Setting = numbers[k]
		}
		law = plus(law, diffusion.Law{Terms: l.Terms, Where: where})
	}
	return law
}

func sameLaw(a, b diffusion.Law) bool {
	return slices.Equal(a.Terms, b.Terms) && slices.Equal(a.Where, b.Where)
}

// windows are those in which the terms of a law act, a copy.
func windows(l diffusion.Law) []thermal.Window {
	all := make([]thermal.Window, len(l.Terms))
	copy(all, l.Where)
	return all
}

// plus returns the law whose D is the sum of those of two.
func plus(a, b diffusion.Law) diffusion.Law {
	sum := diffusion.Law{Terms: slices.Concat(a.Terms, b.Terms)}
	if a.Where != nil || b.Where != nil {
		sum.Where = slices.Concat(windows(a), windows(b))
	}
	return sum
}

// underConditions gives the law of a row its terms, under the conditions of each
// setting and those at, which stay the same.
func (d *decoder) underConditions(n *node, row *catalogue.Row, at catalogue.Conditions, law *Law) {
	needs := row.Needs()
	for _, name := range needs {
		d.used[name] = true
	}
	onFO2 := slices.Contains(needs, catalogue.FO2)
	law.Law = d.bySetting(func(setting int, c *Conditions) diffusion.Law {
		given := maps.Clone(c.Given)
		maps.Copy(given, at)
		if onFO2 {
			law.Fugacities = append(law.Fugacities, Fugacity{setting, c.Buffer, c.Given[catalogue.FO2]})
		}
		of, err := row.Law(given)
		if onFO2 && c.Buffer != nil {
			of, err = row.LawAlong(given, c.Fugacity())
		}
		if err != nil {
			d.reportError(n, err)
		}
		return of
	})
}

// noteUnused notes the conditions that nothing in the study depends on, and a
// buffer that is taken at a pressure of 1 bar.
func (d *decoder) noteUnused() {
	given := func(name string) bool {
		return slices.ContainsFunc(d.settings, func(s Setting) bool { return s.Conditions.gives(name) })
	}
	for _, i := range d.inUse() {
		c := &d.settings[i-1].Conditions
		switch {
		case c.Buffer == nil || !d.used[catalogue.FO2]:
		case c.gives(catalogue.Pressure):
			d.used[catalogue.Pressure] = true
		default:
			d.noteOnce("no pressure given: the %s buffer is taken at 1 bar", c.Buffer.Names[0])
		}
	}
	for _, name := range []string{catalogue.Pressure, catalogue.FO2, catalogue.ASiO2, catalogue.ATiO2} {
		if given(name) && !d.used[name] {
			d.note("conditions: nothing in this study depends on %s", name)
		}
	}
}
