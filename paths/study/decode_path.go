package study

import (
	"fmt"
	"slices"
	"strings"

	"bankfire/thermal"
)

// maxLegs bounds the legs of all paths of a study together, and with them the
// memory that reading one can take.
const maxLegs = 1_000_000

// legKind is what the study grammar knows about a kind of leg, whose first key
// is the one that names it.
type legKind struct {
	kind           thermal.SpecKind
	needs, options []string
}

func legKinds() []legKind {
	return []legKind{
		{thermal.SpecHold, []string{"hold", "for"}, []string{"name"}},
		{thermal.SpecRamp, []string{"ramp", "for"}, []string{"name", "from"}},
		{thermal.SpecRelax, []string{"relax", "efold", "for"}, []string{"name", "from"}},
		{thermal.SpecReheat, []string{"reheat", "efold"}, []string{"name", "from", "rise", "dwell", "for"}},
		{thermal.SpecSheet, []string{"sheet", "host", "thickness", "position", "kappa", "for"}, []string{"name"}},
		{thermal.SpecTable, []string{"table", "time", "temperature"}, []string{"name", "counts"}},
		{thermal.SpecRepeat, []string{"repeat", "legs"}, []string{"name"}},
		{thermal.SpecPulses, []string{"reheats", "peak", "efold", "for"}, []string{"name", "from", "rise", "dwell"}},
	}
}

func (k legKind) keys() []string { return slices.Concat(k.needs, k.options, []string{"conditions"}) }

// paths reads every [[path]]. The eruption of the study's top level holds for
// those that have none of their own.
func (d *decoder) paths(root *node, seen map[string]int) []Path {
	list := root.get("path")
	if list == nil && root.get("family") != nil {
		return nil
	}
	list = d.need(root, "path", "write at least one [[path]] with name and legs, or a [[family]]")
	var out []Path
	for _, n := range d.tables(list, `begin each path with "[[path]]"`) {
		out = append(out, d.path(n, root.get("eruption"), seen))
	}
	return out
}

func (d *decoder) path(n, eruption *node, seen map[string]int) Path {
	d.keys(n, pathTable)
	p := Path{Place: d.place(n)}
	if v := d.need(n, "name", `write a name, such as name = "kept warm"`); v != nil {
		var ok bool
		if p.Name, ok = d.name(v, `write a name, such as "kept warm"`); ok {
			d.unique(v, p.Name, seen)
		}
	}
	before := d.faults
	specs := d.legList(n, 1)
	if d.faults > before || len(specs) == 0 {
		return p
	}
	p.History = d.history(n, specs)
	if own := n.get("eruption"); own != nil {
		eruption = own
	}
	if p.History != nil {
		d.erupt(p.History, eruption)
		p.Eruption = p.History.Eruption()
	}
	return p
}

// history builds the path's history and reports what only shows there: a first
// ramp without from, too many legs.
func (d *decoder) history(n *node, specs []thermal.Spec) *thermal.History {
	if d.legs > maxLegs {
		return nil // reported with the path that went beyond
	}
	h := new(thermal.History)
	if err := thermal.Build(h, specs); err != nil {
		d.reportError(n, err)
		return nil
	}
	if d.legs += len(h.Legs()); d.legs > maxLegs {
		d.report(n, fmt.Sprintf("the paths up to this one have more than %d legs together", maxLegs),
			"split the study")
		return nil
	}
	return h
}

// legList reads the list of legs of a path or of a repeat, which has the setting
// of the given number.
func (d *decoder) legList(n *node, setting int) []thermal.Spec {
	const example = `write legs = [ { hold = "750 C", for = "800 yr" } ]`
	list := d.need(n, "legs", example)
	var out []thermal.Spec
	for i, leg := range d.tables(list, example) {
		d.open.enter(i)
		out = append(out, d.leg(leg, setting))
		d.open.leave()
	}
	return out
}

func (d *decoder) leg(n *node, setting int) thermal.Spec {
	spec := thermal.Spec{Place: d.place(n)}
	kind, ok := d.legKind(n)
	if !ok {
		return spec
	}
	spec.Kind = kind.kind
	d.known(n, kind.keys())
	for _, name := range kind.needs {
		d.need(n, name, "a "+kind.needs[0]+" leg needs "+strings.Join(kind.needs, ", "))
	}
	for _, k := range n.keys {
		if kind.kind != thermal.SpecPulses || !slices.Contains(eachReheat, k.name) {
			d.legValue(&spec, k.name, k.value)
		}
	}
	setting = d.legConditions(n, setting)
	if kind.kind != thermal.SpecRepeat {
		d.inForce(setting, n, kind)
		spec.Setting = setting
	}
	switch kind.kind {
	case thermal.SpecReheat:
		d.reheat(n, &spec)
	case thermal.SpecSheet:
		spec.Sheet = d.sheet(n, spec.Temp)
	case thermal.SpecTable:
		spec.Rows = d.rows(n)
	case thermal.SpecRepeat:
		if n.get("legs") != nil {
			spec.Legs = d.legList(n, setting)
		}
	case thermal.SpecPulses:
		d.reheats(n, spec.Name)
	}
	return spec
}

// legKind finds the one key of a leg that says what kind it is.
func (d *decoder) legKind(n *node) (legKind, bool) {
	var found []legKind
	var words []string
	for _, kind := range legKinds() {
		if kind.kind != thermal.SpecPulses || d.open != nil {
			words = append(words, kind.needs[0])
		}
		if n.get(kind.needs[0]) != nil {
			found = append(found, kind)
		}
	}
	switch len(found) {
	case 1:
		return found[0], true
	case 0:
		d.noKind(n, words)
	default:
		d.report(n, fmt.Sprintf("%s and %s in one leg", found[0].needs[0], found[1].needs[0]),
			"make them two legs")
	}
	return legKind{}, false
}

func (d *decoder) noKind(n *node, words []string) {
	for i := range n.keys {
		if near := nearest(n.keys[i].name, words); near != "" {
			d.reportKey(n, &n.keys[i], "unknown key", fmt.Sprintf("did you mean %q?", near))
			return
		}
	}
	d.report(n, "a leg of no kind", "give it one of "+strings.Join(words, ", "))
}

// legValue reads a key that has one meaning in every kind of leg.
func (d *decoder) legValue(spec *thermal.Spec, name string, v *node) {
	switch name {
	case "hold", "ramp", "relax", "reheat", "sheet":
		spec.Temp, _ = d.quantity(v, temperature)
	case "from":
		spec.From, _ = d.quantity(v, temperature)
	case "for":
		spec.For, _ = d.quantity(v, duration)
	case "efold":
		spec.Efold, _ = d.quantity(v, duration)
	case "rise":
		spec.Rise, _ = d.quantity(v, pause)
	case "dwell":
		spec.Dwell, _ = d.quantity(v, pause)
	case "name":
		spec.Name = d.legName(v)
	case "repeat":
		spec.Times = d.times(v)
	}
}

// legName reads the name of a leg, with which moments name it.
func (d *decoder) legName(n *node) string {
	name, _ := d.name(n, `write a name, such as "wake 1"`)
	if name == "path" {
		d.report(n, `a leg cannot have this name: "end of path" is that of the whole path`, `write "wake 1", say`)
	}
	return name
}

// reheat reports one that ends before it relaxes.
func (d *decoder) reheat(n *node, spec *thermal.Spec) {
	if hot := spec.Rise + spec.Dwell; d.open == nil && spec.For > 0 && spec.For < hot {
		d.report(n.get("for"), "shorter than rise and dwell together, "+span(hot), "for counts the whole reheat: write more, or leave it out")
	}
}

func (d *decoder) times(v *node) int {
	const remedy = "write how many times, such as repeat = 3"
	if d.isOpen(v) {
		n, _ := d.hole(v, times)
		return int(n)
	}
	if !d.is(v, numberNode, remedy) {
		return 0
	}
	switch {
	case !v.whole || v.number < 1:
		d.report(v, "not a whole number of at least 1", remedy)
	case v.number > thermal.MaxLegs:
		d.report(v, fmt.Sprintf("a path has at most %d legs", thermal.MaxLegs), "repeat fewer times")
	default:
		return int(v.number)
	}
	return 0
}

func (d *decoder) sheet(n *node, magma float64) *thermal.Sheet {
	s := thermal.Sheet{Magma: magma}
	s.Host, _ = d.quantity(n.get("host"), temperature)
	s.Thickness, _ = d.quantity(n.get("thickness"), thickness)
	s.Position, _ = d.quantity(n.get("position"), fromMiddle)
	s.Kappa, _ = d.quantity(n.get("kappa"), heat)
	return &s
}

// erupt sets the eruption of a path where the study gives one; else it is the
// end.
func (d *decoder) erupt(h *thermal.History, v *node) {
	if v == nil {
		return
	}
	text, ok := d.text(v, `write a moment, such as "end of wake 2" or "4 kyr after start"`)
	if !ok || d.braced(v) {
		return
	}
	m, err := thermal.ParseEruption(text)
	t := 0.0
	if err == nil {
		t, err = h.Moment(m)
	}
	if err == nil {
		err = h.SetEruption(t)
	}
	if err != nil {
		d.reportError(v, err)
	}
}
