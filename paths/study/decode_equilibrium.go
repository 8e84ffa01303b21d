package study

import (
	"fmt"
	"math"

	"bankfire/diffusion/catalogue"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// equilibrium reads a start in equilibrium with a melt by the element's partition
// relation, or at saturation by a solubility relation, each zone at a temperature of
// its own. Errors of melt and temperature become those of the plateaux, to first
// order.
func (d *decoder) equilibrium(n, way *node, s *Start, c *Crystal, e *Element, u *units) {
	before := d.faults
	temps := make([]thermal.Uncertain, len(c.Zones))
	const example = `write one temperature a zone, such as temperature = ["760 C", "790 +- 10 C"]`
	if t := d.need(n, "temperature", example); !d.eachZone(t, c, example, func(i int, v *node) { temps[i] = d.uncertainTemperature(v, example) }) {
		return
	}
	var at func(zone int) Plateau
	if way == n.get("melt") {
		at = d.inMelt(n, way, temps, s, c, e, u)
	} else {
		at = d.saturated(n, way, temps, s, c, e, u)
	}
	if at == nil || d.faults > before {
		return
	}
	for i, z := range c.Zones {
		p := at(i)
		if !(p.Value+p.Sigma <= traverse.Whole(u.unit)) {
			d.report(way, fmt.Sprintf("%s starts in equilibrium at %.3g %s, with its error more than all there is", z.Name, p.Value, u.unit), "check the relation, its melt and the temperatures")
			return
		}
		u.known[p.Value] = true
		s.Zones[i] = p
		where := ""
		if s.Melts != nil && c.Host != nil {
			where = fmt.Sprintf(" in its middle, in host %.3g, and follows its host from there", s.Melts[i].Host)
		}
		d.note("%s: %s starts in equilibrium at %.0f C, at %s%s", e.Name, z.Name, temps[i].Value-thermal.ZeroCelsius, p.text(u.unit), where)
	}
}

// text is a known plateau for people.
func (p Plateau) text(unit string) string {
	if p.Sigma == 0 {
		return fmt.Sprintf("%.4g %s", p.Value, unit)
	}
	return fmt.Sprintf("%.4g +- %.2g %s", p.Value, p.Sigma, unit)
}

// uncertainTemperature reads a temperature, K, with or without an error.
func (d *decoder) uncertainTemperature(n *node, example string) thermal.Uncertain {
	if n.kind == numberNode {
		d.report(n, "a number without a unit", example)
		return thermal.Uncertain{}
	}
	if d.isOpen(n) {
		x, _ := d.filledQuantity(n, n.text, temperature)
		return thermal.Uncertain{Value: x}
	}
	text, ok := d.text(n, example)
	if !ok {
		return thermal.Uncertain{}
	}
	t, err := thermal.ParseUncertain(text, thermal.Temperature)
	switch {
	case err != nil:
		d.reportError(n, err)
	case d.within(n, t.Value, temperature) && t.Sigma > t.Value/4:
		d.report(n, "its error is more than a quarter of the temperature above absolute zero", "check the unit")
	}
	return t
}

// inMelt returns the plateau of each zone in equilibrium with what the melt had, C = K m,
// where a smoothed host varies in it that in its middle:
//
//	(sigma C / C)^2 = (sigma m / m)^2 + (ln K sigma T / T)^2.
func (d *decoder) inMelt(n, melt *node, temps []thermal.Uncertain, s *Start, c *Crystal, e *Element, u *units) func(zone int) Plateau {
	const example = `write one value a zone, such as melt = ["90 +- 15 ppm", "140 ppm"]`
	values := make([]Plateau, len(c.Zones))
	unit := d.concentrationUnit(n.get("unit"))
	ok := d.eachZone(melt, c, example, func(i int, v *node) {
		if values[i] = d.amount(v, u, unit); values[i].Free {
			d.report(v, "what the melt had cannot be free", example+`; or zones = ["free", ...]`)
		}
	})
	switch {
	case !ok:
		return nil
	case e.Partition == nil:
		d.report(melt, "needs the partition relation of the element", `write partition = "sr-blundy1991" beside start, a key or the name of a [[partition]]`)
		return nil
	}
	for i := range c.Zones {
		s.Melts = append(s.Melts, Grown{temps[i].Value, c.HostAt(c.middle(i))})
	}
	return func(i int) Plateau {
		t, m := temps[i], values[i]
		lnK := e.Partition.LnK(s.Melts[i].Host, t.Value)
		k := math.Exp(lnK)
		return Plateau{Value: k * m.Value, Sigma: k * math.Hypot(m.Sigma, m.Value*lnK*t.Sigma/t.Value)}
	}
}

// studySetting is the number of the setting that is [conditions], under which zones
// grow.
const studySetting = 1

// saturated returns the plateau of each zone at saturation.
func (d *decoder) saturated(n, key *node, temps []thermal.Uncertain, s *Start, c *Crystal, e *Element, u *units) func(zone int) Plateau {
	if v := n.get("unit"); v != nil {
		d.report(v, "there are no bare numbers whose unit it could be", "leave it out")
	}
	name, ok := d.text(key, `write a key, such as solubility = "ti-quartz-huang2012"`)
	if !ok {
		return nil
	}
	row, err := catalogue.FindSolubility(name)
	if _, partition := catalogue.FindPartition(name); partition == nil {
		d.report(key, "a partition relation, not a solubility relation", fmt.Sprintf(`write partition = %q beside start, and melt = ["90 ppm", ...] in place of solubility`, name))
		return nil
	}
	if err != nil {
		d.reportError(key, err)
		return nil
	}
	s.Solubility = d.solubility(key, row, u, []int{studySetting})
	if s.Solubility == nil {
		return nil
	}
	d.noteSolubility(row, c, e)
	return func(i int) Plateau {
		t := temps[i]
		if beyond := s.Solubility.beyond(t.Value, t.Value); beyond != "" {
			d.noteOnce("%s: start of %s: %s", e.Name, c.Zones[i].Name, beyond)
		}
		x := s.Solubility.At(studySetting, t.Value)
		return Plateau{Value: x, Sigma: math.Abs(x * s.Solubility.Contents[studySetting].Slope(t.Value) * t.Sigma)}
	}
}
