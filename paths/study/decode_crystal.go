package study

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
)

// maxZones bounds the zones of a crystal and the rims of an end. Each may become
// a free value, and every free value knows every zone and rim.
const maxZones = 500

// maxElements bounds the elements of all crystals together: each may read a file.
const maxElements = 100

// atom is a length, m, below which nothing in a crystal has a width.
const atom = 1e-10

// crystals reads every [[crystal]].
func (d *decoder) crystals(root *node) []Crystal {
	list := d.need(root, "crystal", "write one [[crystal]] with name, mineral, shape, zones and one [[crystal.element]]")
	var out []Crystal
	seen := map[string]int{}
	tables := d.tables(list, `begin a crystal with "[[crystal]]"`)
	elements := 0
	for _, n := range tables {
		if e := n.get("element"); e != nil {
			elements += len(e.items)
			d.names(e)
		}
	}
	if len(tables) > maxElements || elements > maxElements {
		d.report(list, fmt.Sprintf("more than %d crystals or elements", maxElements), "split the study")
		return nil
	}
	for _, n := range tables {
		out = append(out, d.crystal(n, seen))
	}
	return out
}

// names notes the names of a crystal's elements.
func (d *decoder) names(elements *node) {
	if d.everyone == nil {
		d.everyone = map[string]bool{}
	}
	for _, e := range elements.items {
		if name := e.get("name"); name != nil {
			d.everyone[name.text] = true
		}
	}
}

func (d *decoder) crystal(n *node, seen map[string]int) Crystal {
	d.keys(n, crystalTable)
	c := Crystal{Place: d.place(n)}
	d.hostIs = ""
	if v := d.need(n, "name", `write a name, such as name = "HF-12"`); v != nil {
		var ok bool
		if c.Name, ok = d.name(v, `write a name, such as "HF-12"`); ok {
			d.unique(v, c.Name, seen)
		}
	}
	c.Mineral = d.mineral(n, c.Name)
	c.Shape = d.shape(d.need(n, "shape", `write shape = "slab", "cylinder" or "ball"`))
	c.Zones, c.Hosted = d.zones(n)
	inner := d.inner(n.get("inner"), &c)
	d.hostFile(n.get("host"), &c)
	d.existence(n, &c)
	if v := n.get("grows"); v != nil {
		d.moves(v, &c)
	}
	d.elements(n, &c, inner)
	d.hostLaw(n.get("host_law"), &c)
	d.noteHost(&c, n.get("host") != nil)
	return c
}

// mineral reads the mineral of a crystal and notes one that looks like another
// that the catalogue has laws for.
func (d *decoder) mineral(n *node, crystal string) string {
	v := d.need(n, "mineral", `write the mineral, such as mineral = "quartz"`)
	name, ok := d.name(v, `write it like "quartz"`)
	if d.again() {
		return name
	}
	if near := nearest(name, minerals()); ok && near != "" && !strings.EqualFold(near, name) {
		d.note("%s: the catalogue has no laws for %q; did you mean %q?", crystal, name, near)
	}
	return name
}

// minerals returns those of the catalogue's laws.
func minerals() []string {
	var names []string
	for _, row := range catalogue.All() {
		if !slices.Contains(names, row.Mineral) {
			names = append(names, row.Mineral)
		}
	}
	return names
}

func (d *decoder) shape(n *node) diffusion.Shape {
	const remedy = `write "slab", "cylinder" or "ball"`
	text, ok := d.text(n, remedy)
	if !ok {
		return diffusion.Slab
	}
	var words []string
	for s := diffusion.Slab; s <= diffusion.Ball; s++ {
		if text == s.String() {
			return s
		}
		words = append(words, s.String())
	}
	d.reportWord(n, "no shape of a crystal", words, remedy)
	return diffusion.Slab
}

// reportWord reports a word that is none of the known ones and suggests the
// nearest.
func (d *decoder) reportWord(n *node, problem string, known []string, remedy string) {
	if near := nearest(n.text, known); near != "" {
		remedy = fmt.Sprintf("did you mean %q?", near)
	}
	d.report(n, problem, remedy)
}

// zones reads the zones of a crystal, from the inside outwards, and reports
// whether they have a host.
func (d *decoder) zones(n *node) ([]Zone, bool) {
	const example = `write zones = [ { name = "core", width = "140 um" } ], from the centre outwards`
	var out []Zone
	seen := map[string]int{}
	list := d.need(n, "zones", example)
	if d.tooMany(list, "zones") {
		return nil, false
	}
	tables := d.tables(list, example)
	for _, z := range tables {
		out = append(out, d.zone(z, seen))
		d.added(z, &out[len(out)-1], out[:len(out)-1])
	}
	return out, d.hosted(list, tables)
}

// tooMany reports a list of more than maxZones things.
func (d *decoder) tooMany(n *node, things string) bool {
	if n == nil || len(n.items) <= maxZones {
		return false
	}
	d.report(n, fmt.Sprintf("more than %d %s", maxZones, things), "fewer are enough")
	return true
}

func (d *decoder) zone(n *node, seen map[string]int) Zone {
	d.keys(n, zoneTable)
	z := Zone{Times: 1}
	if v := d.need(n, "name", `write a name, such as name = "core"`); v != nil {
		z.Name = d.zoneName(v, seen)
	}
	w := d.need(n, "width", `write a width, such as width = "140 um"`)
	z.Width, _ = d.quantity(w, width)
	if 0 < z.Width && z.Width < atom {
		d.report(w, "thinner than an atom", "check the unit")
	}
	if v := n.get("host"); v != nil {
		d.zoneHost(v, &z)
	}
	if v := n.get("times"); v != nil {
		z.Times, _ = d.number(v, "write the factor on the diffusivity as a number, such as times = 0.1")
	}
	return z
}

// zoneName reads the name of a zone, which must be told from a value wherever
// either may stand. It is "" if it cannot be used.
func (d *decoder) zoneName(n *node, seen map[string]int) string {
	name, ok := d.name(n, `write a name, such as "core"`)
	switch {
	case !ok:
	case looksLikeValue(name):
		d.report(n, "a zone's name must not begin like a number", fmt.Sprintf("write %q, say", "zone "+name))
	case name == "free" || name == "sealed":
		d.report(n, "a zone cannot have this name, it has a meaning of its own", `write "core", say`)
	default:
		d.unique(n, name, seen)
		return name
	}
	return ""
}

// looksLikeValue reports whether a text is meant as a number with its unit.
func looksLikeValue(text string) bool {
	return text != "" && (text[0] >= '0' && text[0] <= '9' || text[0] == '-' || text[0] == '+' || text[0] == '.')
}

// inner reads what holds at the inner end. It returns the node of the rim,
// which each element reads in its own unit; nil is sealed.
func (d *decoder) inner(n *node, c *Crystal) *node {
	const example = `write inner = { radius = "0 um", rim = "sealed" }`
	if !d.is(n, tableNode, example) {
		return nil
	}
	d.keys(n, innerTable)
	if v := n.get("radius"); v != nil {
		var ok bool
		if c.R0, ok = d.quantity(v, edgeWidth); !ok {
			return nil
		}
	}
	rim := n.get("rim")
	if rim == nil || rim.kind == textNode && rim.text == "sealed" {
		return nil
	}
	if c.R0 == 0 && c.Shape != diffusion.Slab {
		d.report(rim, "the centre of a "+c.Shape.String()+" is sealed by symmetry",
			"leave the rim out, or give the inner radius")
		return nil
	}
	return rim
}

// elements reads every [[crystal.element]].
func (d *decoder) elements(n *node, c *Crystal, inner *node) {
	list := d.need(n, "element", "write one [[crystal.element]] with name, law, start and rim")
	seen := map[string]int{}
	d.copies = nil
	for _, e := range d.tables(list, `begin an element with "[[crystal.element]]"`) {
		c.Elements = append(c.Elements, d.element(e, c, inner, seen))
	}
	for _, copied := range d.copies {
		d.resolve(copied, c)
	}
	d.choosable(list, c)
	d.oneEdge(list, c)
}

// sized reports whether every width could be read.
func (c *Crystal) sized() bool {
	for _, z := range c.Zones {
		if z.Width == 0 {
			return false
		}
	}
	return len(c.Zones) > 0
}

// zoneIndex returns the index of the zone of that name, -1 if there is none.
func zoneIndex(c *Crystal, name string) int {
	for i, z := range c.Zones {
		if z.Name == name {
			return i
		}
	}
	return -1
}

func zoneNames(c *Crystal) []string {
	var names []string
	for _, z := range c.Zones {
		names = append(names, z.Name)
	}
	return names
}

// count writes a number of things: "1 zone", "3 zones".
func count(n int, thing string) string {
	if n != 1 {
		thing += "s"
	}
	return strconv.Itoa(n) + " " + thing
}
