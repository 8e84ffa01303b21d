package study

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"bankfire/thermal"
)

// filling is what braces in crystals stand for while these are read: for the values of
// a member of a family, or while the study is read for the middle of its first family.
type filling struct {
	names  names
	values []float64
	middle bool // what is out of bounds gives way to something usual: members are of their own matter
	blind  bool // the names are not known, since the family is wrong
	holes  []crystalHole
	// Once they have been read: the expressions, and the elements by their traverse.
	known    map[*node]parsed
	measured map[*node]*Element
}

// parsed is an expression that was read.
type parsed struct {
	expression
	is measure
}

// crystalHole is a value of a crystal with braces in it.
type crystalHole struct {
	n    *node
	text string // the expression in it
	is   measure
}

// openPlaces are the keys of crystals, or the beginnings of such, whose values may vary
// within a family, each with what is open then. What is not here decides with what the
// measured values are compared and by which laws, or lies under one that does.
var openPlaces = [...]struct{ field, what string }{
	{"crystal.element.start.", "its start"},
	{"crystal.element.rim", "its rim"},
	{"crystal.inner.rim", "its rim"},
	{"crystal.zones.added", "when zones of its crystal were added"},
	{"crystal.exists_from", "when its crystal began to exist"},
	{"crystal.grows.", "when its crystal grew"},
	{"crystal.dissolves.", "when its crystal dissolves"},
}

// openPlace says what is open where a field varies; "" is that it may not.
func openPlace(field string) string {
	for _, p := range openPlaces {
		if strings.HasPrefix(field, p.field) {
			return p.what
		}
	}
	return ""
}

// filled reads an expression in a crystal for the values that braces stand for.
func (d *decoder) filled(n *node, text string) (float64, measure, bool) {
	f := d.fill
	if f.blind {
		return 0, measure{}, false
	}
	if openPlace(n.field) == "" {
		d.report(n, "does not vary within a family", "write a value; in crystals braces may stand in starts, in rims and in moments")
		return 0, measure{}, false
	}
	if p, known := f.known[n]; known {
		return p.at(f.values), p.is, true
	}
	e, m, refused := f.names.parse(text)
	if refused != nil {
		refused.Value = thermal.Shorten(n.text)
		d.add(refused.At(d.place(n)))
		return 0, m, false
	}
	f.holes = append(f.holes, crystalHole{n, text, m})
	return e.at(f.values), m, true
}

// filledQuantity is filled for a quantity with the bound.
func (d *decoder) filledQuantity(n *node, text string, b bound) (float64, bool) {
	x, m, ok := d.filled(n, text)
	switch want := (measure{dim: b.dim}); {
	case !ok:
		return 0, false
	case !m.like(want):
		d.report(n, fmt.Sprintf("%s where %s belongs", m, want), fmt.Sprintf("want something like %q", b.example))
		return 0, false
	case d.fill.middle && !(x > 0 && x <= b.top):
		x, _ = thermal.ParseQuantity(b.example, b.dim)
	}
	return x, d.within(n, x, b)
}

// filledAmount is filled for a value of the element.
func (d *decoder) filledAmount(n *node, u *units, beside string) Plateau {
	x, m, ok := d.filled(n, n.text)
	unit := m.unit
	switch {
	case !ok:
		return Plateau{}
	case m.plain && beside == "":
		d.report(n, "a number without a unit", `give the ends of its range like "58 ppm", or add unit = "ppm"`)
		return Plateau{}
	case m.plain:
		unit = beside
	case m.dim != thermal.Concentration:
		d.report(n, fmt.Sprintf("%s where %s belongs", m, measure{dim: thermal.Concentration}), `want something like "58 ppm"`)
		return Plateau{}
	}
	if d.fill.middle {
		x = math.Max(x, 0)
	}
	return d.inUnit(n, u, thermal.Uncertain{Value: x}, unit)
}

// filledMoment reads a moment that counts from another by an open time.
func (d *decoder) filledMoment(n *node) (*thermal.Moment, bool) {
	offset, rest, ok := cutMoment(n.text)
	if !ok {
		d.report(n, "a duration, not a moment", `write a moment, such as "{wait} after start"`)
		return nil, false
	}
	x, ok := d.filledQuantity(n, offset, pause)
	if !ok {
		return nil, false
	}
	m, err := thermal.ParseMoment(rest)
	if err != nil {
		d.reportError(n, err)
		return nil, false
	}
	if m.Offset = math.Copysign(x, m.Offset); x == 0 {
		m.Offset = 0
	}
	m.Text = n.text
	return &m, true
}

// cutMoment cuts the duration off a moment that counts from another, and leaves one
// that counts from it by a second.
func cutMoment(text string) (offset, rest string, ok bool) {
	i := strings.Index(text+" ", " after ")
	if j := strings.Index(text+" ", " before "); i < 0 || j >= 0 && j < i {
		i = j
	}
	if i < 0 {
		return "", "", false
	}
	return text[:i], "1 s" + text[i:], true
}

// openCrystals are crystals of a study that differ from member to member.
type openCrystals struct {
	decoder  decoder // that read them
	nodes    []*node
	open     []bool             // of each
	base     []Crystal          // as they are in the middle of the first family
	measured map[*node]*Element // of them, by its traverse
}

// openCrystals reads every [[crystal]], and gives them to the families if there are
// braces in them.
func (d *decoder) openCrystals(root *node, s *Study) {
	d.fill = &filling{middle: true}
	if len(s.Families) > 0 {
		d.fill.names, d.fill.values, d.fill.blind = s.Families[0].names, s.Families[0].middle, s.Families[0].used == nil
	}
	before := d.faults
	s.Crystals = d.crystals(root)
	holes := d.fill.holes
	d.fill = nil
	d.openEverywhere(holes, s)
	if d.faults == before {
		d.unused(s.Families)
	}
	if d.faults > 0 || len(holes) == 0 {
		return
	}
	all := &openCrystals{decoder: *d, nodes: root.get("crystal").items, base: s.Crystals, measured: map[*node]*Element{}}
	for i := range s.Crystals {
		c := &s.Crystals[i]
		all.open = append(all.open, c.open(all.nodes[i], holes))
		for j, n := range all.nodes[i].get("element").items {
			all.measured[n.get("traverse")] = &c.Elements[j]
		}
	}
	for i := range s.Families {
		f := &s.Families[i]
		f.crystals, f.known = all, map[*node]parsed{}
		for _, h := range holes {
			e, m, _ := f.names.parse(h.text)
			f.known[h.n] = parsed{e, m}
		}
	}
	d.noteHoles(holes, s)
}

// noteHoles says what of crystals is open.
func (d *decoder) noteHoles(holes []crystalHole, s *Study) {
	for _, h := range holes {
		d.noteOnce("%s = %q on line %d differs from member to member; where none is meant it is taken in the middle of family %q", h.n.field, h.n.text, h.n.line, s.Families[0].Name)
	}
}

// open notes what of the crystal's elements is open, and reports whether anything is.
func (c *Crystal) open(n *node, holes []crystalHole) bool {
	var any bool
	elements := n.get("element").items
	for _, h := range holes {
		if !n.has(h.n) {
			continue
		}
		any = true
		for j := range c.Elements {
			if e := &c.Elements[j]; e.Open == "" && (elements[j].has(h.n) || !n.get("element").has(h.n)) {
				e.Open = openPlace(h.n.field)
			}
		}
	}
	return any
}

// has reports whether a node is n or inside it.
func (n *node) has(other *node) bool {
	if n == other {
		return true
	}
	return slices.ContainsFunc(n.items, func(item *node) bool { return item.has(other) }) ||
		slices.ContainsFunc(n.keys, func(k key) bool { return k.value.has(other) })
}

// openEverywhere reports braces in crystals that do not stand for something on every
// path, and notes which values they use.
func (d *decoder) openEverywhere(holes []crystalHole, s *Study) {
	if len(holes) > 0 && len(s.Paths) > 0 && len(s.Families) > 0 {
		d.report(holes[0].n, fmt.Sprintf("open, but path %q is written out", s.Paths[0].Name),
			"write a value; or make the paths a family, in which it may have choices")
	}
	for i := range s.Families {
		f := &s.Families[i]
		for _, h := range holes {
			e, m, refused := f.names.parse(h.text)
			switch {
			case i > 0 && refused != nil:
				d.report(h.n, fmt.Sprintf("family %q: %s", f.Name, refused.Problem), "a value in a crystal must vary in every family")
			case i > 0 && !m.like(h.is):
				d.report(h.n, fmt.Sprintf("%s in family %q, but %s in %q", h.is, s.Families[0].Name, m, f.Name), "want one kind")
			}
			if refused == nil {
				e.mark(f.used)
			}
		}
	}
}

// unused reports values that nothing uses.
func (d *decoder) unused(families []Family) {
	for i := range families {
		f := &families[i]
		for k, used := range f.used {
			if v := &f.Values[k]; !used {
				d.report(f.vary.get(v.Name), "nothing uses the value", fmt.Sprintf("write \"{%s}\" in a leg or a crystal, or leave it out", v.Name))
			}
		}
	}
}

// mark notes which values the expression speaks of.
func (e *expression) mark(used []bool) {
	for _, t := range e.terms {
		for _, k := range t.of {
			used[k] = true
		}
	}
}

// remeasured gives an element the traverse that it has already, in the unit that decides
// its own.
func (d *decoder) remeasured(n *node, e *Element, u *units) {
	of := d.fill.measured[n]
	t := *of.Traverse
	e.Tilt, e.Origin, e.Scatter, e.Traverse = of.Tilt, of.Origin, of.Scatter, &t
	if !t.Grey {
		u.unit, u.from = t.Unit, n.get("value")
	}
}

// again reports whether a crystal is read for a member, of which nothing is noted.
func (d *decoder) again() bool { return d.fill != nil && d.fill.known != nil }

// at reads the open crystals again with the values of a member. The error is the first
// thing that is wrong with them then.
func (o *openCrystals) at(f *Family, values []float64) ([]Crystal, *thermal.InputError) {
	out := slices.Clone(o.base)
	d := o.decoder
	d.used, d.meant, d.measured = map[string]bool{}, map[string]bool{}, map[string]string{}
	d.slopeSigmas = map[string]slopeSigma{}
	d.notes, d.found, d.faults = nil, nil, 0
	d.fill = &filling{values: values, known: f.known, measured: o.measured}
	seen := map[string]int{}
	for i, n := range o.nodes {
		if !o.open[i] {
			continue
		}
		out[i] = d.crystal(n, seen)
		if d.faults > 0 {
			return nil, d.found[0]
		}
		for j := range out[i].Elements {
			own, of := &out[i].Elements[j], &o.base[i].Elements[j]
			own.Law, own.Open = of.Law, of.Open // of laws nothing may be open
		}
	}
	return out, nil
}
