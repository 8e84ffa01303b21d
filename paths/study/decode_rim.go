package study

import (
	"fmt"
	"math"
	"slices"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// rimExample says what to write for a rim of the crystal.
func rimExample(c *Crystal, u *units) string {
	zone := "core"
	if n := len(c.Zones); n > 0 && c.Zones[n-1].Name != "" {
		zone = c.Zones[n-1].Name
	}
	return fmt.Sprintf(`write rim = { held = %q }, { held = "90 ppm" }, "sealed" or { given = "rim.csv", time = "t [yr]", value = "%s [ppm]" }`, zone, u.element)
}

// tied returns a rim held at the plateau of a zone.
func tied(zone int, at thermal.Place) Rim {
	return Rim{Kind: diffusion.Held, Zone: zone, Place: at}
}

// rims reads what holds at one end: one rim, or a list of them with the moment
// that each is in force from. Only at the outer end may the first have one.
func (d *decoder) rims(n *node, c *Crystal, u *units, outer bool) []Rim {
	if n == nil {
		return nil
	}
	if n.kind != arrayNode {
		return []Rim{d.rim(n, c, u, true, outer)}
	}
	if len(n.items) == 0 {
		d.report(n, "an empty list", rimExample(c, u))
	}
	if d.tooMany(n, "rims") {
		return nil
	}
	var out []Rim
	for i, item := range n.items {
		out = append(out, d.rim(item, c, u, i == 0, outer))
	}
	return out
}

func (d *decoder) rim(n *node, c *Crystal, u *units, first, outer bool) Rim {
	r := Rim{Kind: diffusion.Sealed, Zone: -1, Place: d.place(n)}
	if n.kind == textNode && n.text == "sealed" {
		if !first {
			d.report(n, "does not say from when it holds", `write { sealed = true, from = "3 yr before eruption" }`)
		}
		return r
	}
	if !d.is(n, tableNode, rimExample(c, u)) {
		return r
	}
	switch {
	case n.get("following") != nil:
		d.keys(n, followingTable)
		d.following(n, &r, u)
		d.lagging(n, &r)
	case n.get("held") != nil:
		d.keys(n, heldTable)
		d.held(n, &r, c, u)
	case n.get("given") != nil:
		d.keys(n, givenTable)
		d.given(n, &r, u)
		d.lagging(n, &r)
	case n.get("transfer") != nil:
		d.keys(n, transferTable)
		d.transfer(n, &r, u)
	case n.get("sealed") != nil:
		d.keys(n, sealedTable)
		if v := n.get("sealed"); d.is(v, boolNode, "write sealed = true") && v.text != "true" {
			d.report(v, "a rim that is not sealed is held or given", rimExample(c, u))
		}
	default:
		d.noRim(n, rimExample(c, u))
	}
	if v := n.get("from"); v != nil {
		r.Place = d.place(v)
	}
	r.From = d.from(n, c, first, first && outer && len(c.Zones) > 0 && c.Staged())
	return r
}

// given reads a rim that a file gives against time or against temperature.
func (d *decoder) given(n *node, r *Rim, u *units) {
	r.Kind = diffusion.Prescribed
	if n.get("temperature") == nil {
		r.Given = d.series(n, u)
		return
	}
	for _, name := range []string{"time", "counts"} {
		if v := n.get(name); v != nil {
			d.report(v, "goes with a file against time, and this one is against temperature", "leave one of them out")
		}
	}
	if t := d.byTemperature(n, n.get("given"), u); t != nil {
		r.Following = &Following{Table: t}
	}
}

// noRim reports a table that is no kind of rim, by the key that is wrong in it if
// there is one.
func (d *decoder) noRim(n *node, example string) {
	var known []string
	for _, kind := range []tableKind{heldTable, givenTable, sealedTable, followingTable, transferTable} {
		for _, key := range tables[kind].Keys {
			if !slices.Contains(known, key) {
				known = append(known, key)
			}
		}
	}
	before := d.faults
	if d.known(n, known); d.faults == before {
		d.report(n, "says neither what it is held at, nor that it is given, sealed, follows a relation or exchanges by transfer", example)
	}
}

// from reads the moment from which a rim holds. The first one has one at most if the
// crystal grew before.
func (d *decoder) from(n *node, c *Crystal, first, grown bool) *thermal.Moment {
	v := n.get("from")
	switch {
	case v == nil && first:
		return nil
	case v == nil:
		d.need(n, "from", `every rim of a list but the first needs the moment it holds from, such as from = "3 yr before eruption"`)
		return nil
	case first && !grown:
		d.report(v, "the first rim holds from the start of the path", "leave from out")
		return nil
	}
	m, _ := d.zoneMoment(v, c.Zones)
	return m
}

// held reads the value at which a rim is held: the name of a zone, free, or a
// value.
func (d *decoder) held(n *node, r *Rim, c *Crystal, u *units) {
	v := n.get("held")
	r.Kind = diffusion.Held
	if v.kind == textNode && v.text != "free" && !looksLikeValue(v.text) && (!d.isOpen(v) || zoneIndex(c, v.text) >= 0) {
		unreadable := zoneIndex(c, "") >= 0 || len(c.Zones) == 0
		if r.Zone = zoneIndex(c, v.text); r.Zone < 0 && !unreadable {
			d.reportWord(v, "no zone has this name", zoneNames(c),
				fmt.Sprintf("write the name of a zone (%q, say) or a value", c.Zones[len(c.Zones)-1].Name))
		}
		return
	}
	r.Value = d.amount(v, u, d.concentrationUnit(n.get("unit")))
}

// transfer reads the value with which a rim would be in equilibrium, and how fast
// it exchanges.
func (d *decoder) transfer(n *node, r *Rim, u *units) {
	r.Value = d.amount(n.get("transfer"), u, d.concentrationUnit(n.get("unit")))
	const example = `write k = { k0 = "1e-3 m/s", E = "200 kJ/mol" }, or k = { k0 = "1e-12 m/s" } for one that stays the same at every temperature`
	d.exchanges(d.need(n, "k", example), r, example)
}

// lagging reads how fast a rim exchanges with what it follows or is given, if it
// does not do so at once.
func (d *decoder) lagging(n *node, r *Rim) {
	if k := n.get("k"); k != nil {
		d.exchanges(k, r, `write k = { k0 = "1e-3 m/s", E = "200 kJ/mol" }, or leave k out for a rim in equilibrium at all times`)
	}
}

// exchanges makes the rim one of transfer with the coefficient k = k0 exp(-E/(R T)).
func (d *decoder) exchanges(k *node, r *Rim, example string) {
	r.Kind = diffusion.Transfer
	if !d.is(k, tableNode, example) {
		return
	}
	d.keys(k, rateTable)
	if k0, ok := d.quantity(d.need(k, "k0", example), exchange); ok {
		r.Rate.LnA = math.Log(k0)
	}
	if e := k.get("E"); e != nil {
		e, _ := d.quantity(e, energy)
		r.Rate.E = e / thermal.GasConstant
	}
}
