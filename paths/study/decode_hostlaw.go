package study

import (
	"slices"
	"strings"

	"bankfire/diffusion/catalogue"
)

// hostLaws returns the keys of the laws by which the host of a mineral moves
// itself, the first of which the conditions are known to be taken; nil where there
// is none.
func hostLaws(mineral string) []string {
	switch strings.ToLower(mineral) {
	case "plagioclase":
		return []string{"plagioclase-caalnasi-grove1984"}
	case "olivine":
		return []string{"olivine-femg-dohmen2007-tamed", "olivine-femg-dohmen2007-ped"}
	}
	return nil
}

// hostLaw reads the law by which the host itself moves, or takes that of the
// mineral. It is left out where the host does not matter.
func (d *decoder) hostLaw(n *node, c *Crystal) {
	switch {
	case n != nil && !c.Hosted && len(c.Zones) > 0:
		d.report(n, "this crystal has no host that could move", hostRemedy+", or leave host_law out")
	case !c.Hosted || !slices.ContainsFunc(c.Elements, func(e Element) bool { return e.OnHost() }):
	case n == nil:
		d.mineralsHostLaw(c)
	default:
		d.statedHostLaw(n, c)
	}
}

// itself is the host as an element, whose law depends on it as that of a tracer.
func itself() *Element { return &Element{Name: "its host"} }

func (d *decoder) statedHostLaw(n *node, c *Crystal) {
	const example = `write a key that "bankfire laws" lists, the name of a [[law]], or "none"`
	text, ok := d.text(n, example)
	if !ok || text == "none" {
		return
	}
	before := d.faults
	law := d.law(n, c, itself())
	if law.onItself() {
		d.report(n, "its own is the composition of the host, of which this law has no unit", "write host = { ln_slope = ... } in place of own in the law")
	}
	if d.faults == before {
		d.otherMineral(c, &Element{Name: "the host of " + c.Name, Law: law})
		c.HostLaw = &law
	}
}

// mineralsHostLaw takes the law of the mineral whose conditions all legs have.
func (d *decoder) mineralsHostLaw(c *Crystal) {
	keys := hostLaws(c.Mineral)
	var lacking []string
	for _, key := range keys {
		row, err := catalogue.Find(key)
		if err != nil {
			panic("study: " + err.Error()) // keys of our own
		}
		lacking = slices.DeleteFunc(row.Needs(), func(name string) bool {
			all, _ := d.gives(name)
			return all || name == row.Composition.Variable
		})
		if len(lacking) == 0 {
			law := d.published(nil, row, c, itself())
			c.HostLaw = &law
			return
		}
	}
	if keys != nil {
		d.note("%s: it is not known whether its host would have moved: its own law, %s, depends on %s, not given in this study",
			c.Name, keys[len(keys)-1], strings.Join(lacking, ", "))
	}
}
