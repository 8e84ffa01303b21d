package study

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"
	"unicode"

	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// maxPartition bounds A and B of a partition relation, J/mol: at 1000 K it is
// K = e^60.
const maxPartition = 5e5

// ownPartitions reads every [[partition]] of the study.
func (d *decoder) ownPartitions(n *node) {
	if n == nil {
		return
	}
	seen := map[string]int{}
	for _, t := range d.tables(n, `begin each partition relation with "[[partition]]"`) {
		d.keys(t, partitionTable)
		const example = `write R T ln K = A X + B as A = "-26.7 kJ/mol" and B = "26.7 kJ/mol"`
		var p Partition
		p.A, p.SigmaA = d.signedEnergy(d.need(t, "A", example), example)
		p.B, p.SigmaB = d.signedEnergy(d.need(t, "B", example), example)
		if at := t.get("at"); at != nil {
			p.At = d.host(at)
		}
		v := d.need(t, "name", `write a name, such as name = "kx"`)
		if v == nil {
			continue
		}
		name, ok := d.name(v, `write a name, such as "kx"`)
		if !ok {
			continue
		}
		if _, err := catalogue.FindPartition(name); err == nil {
			d.report(v, "a partition relation of the catalogue has this key", "choose another name")
		}
		if _, err := catalogue.FindSolubility(name); err == nil {
			d.report(v, "a solubility relation of the catalogue has this key", "choose another name")
		}
		d.unique(v, name, seen)
		p.Key = name
		d.partitions[name] = p
	}
}

// signedEnergy reads a molar energy of either sign, J/mol, perhaps with its error.
func (d *decoder) signedEnergy(n *node, remedy string) (value, sigma float64) {
	if n == nil {
		return 0, 0
	}
	if n.kind == numberNode {
		d.report(n, "a number without a unit", remedy)
		return 0, 0
	}
	if !d.is(n, textNode, remedy) {
		return 0, 0
	}
	x, err := thermal.ParseUncertain(n.text, thermal.MolarEnergy)
	switch {
	case err != nil:
		d.reportError(n, err)
		return 0, 0
	case !(math.Abs(x.Value)+MostDeviation*x.Sigma <= maxPartition):
		d.report(n, fmt.Sprintf("more than %g kJ/mol%s", maxPartition/1e3, withDeviation(x.Sigma)), "check the unit")
		return 0, 0
	}
	return x.Value, x.Sigma
}

// withDeviation adds to a limit that the value is over it with its error.
func withDeviation(sigma float64) string {
	if sigma == 0 {
		return ""
	}
	return fmt.Sprintf(" with %g standard deviations", MostDeviation)
}

// partition reads the partition relation of an element: a key of the catalogue or
// the name of a [[partition]]. It is nil if there is none.
func (d *decoder) partition(n *node, c *Crystal, e *Element) *Partition {
	if n == nil {
		return nil
	}
	key, ok := d.text(n, `write a key such as "sr-blundy1991", or the name of a [[partition]]`)
	if !ok {
		return nil
	}
	p, ok := d.relation(n, key)
	if !ok {
		return nil
	}
	switch {
	case !c.Hosted && len(c.Zones) > 0:
		d.report(n, "a partition relation needs the host's composition", hostRemedy)
	case e.Traverse != nil && e.Traverse.Grey:
		d.report(n, "relative values have no zero, which an element that follows its host must have", "give the traverse in a unit of concentration, or leave partition out")
	}
	d.notePartition(&p, c, e)
	return &p
}

// relation returns the relation with a key of the catalogue, or the [[partition]]
// of that name.
func (d *decoder) relation(n *node, key string) (Partition, bool) {
	if p, own := d.partitions[key]; own {
		return p, true
	}
	row, err := catalogue.FindPartition(key)
	if err != nil {
		d.unknownPartition(n, key, err)
		return Partition{}, false
	}
	p := Partition{Key: key, Row: row, A: row.A, B: row.B, SigmaA: row.SigmaA, SigmaB: row.SigmaB}
	if row.RangeKnown() {
		p.At = (row.XMin + row.XMax) / 2
	}
	return p, true
}

// hostRemedy says how a host is given.
const hostRemedy = "give every zone of the crystal its host, such as host = 0.55"

func (d *decoder) unknownPartition(n *node, key string, err error) {
	if near := nearest(key, slices.Sorted(maps.Keys(d.partitions))); near != "" {
		d.report(n, "neither in the catalogue nor a [[partition]] of this study", fmt.Sprintf("did you mean %q?", near))
		return
	}
	if _, saturates := catalogue.FindSolubility(key); saturates == nil {
		d.report(n, "a solubility relation, not a partition relation", fmt.Sprintf("write it under start, solubility = %q, or as a rim, { following = %q }; leave partition out", key, key))
		return
	}
	d.reportError(n, err)
}

// notePartition notes a relation of the catalogue that is used for what it was
// not made for.
func (d *decoder) notePartition(p *Partition, c *Crystal, e *Element) {
	if p.Row == nil {
		return
	}
	if !startsWithSymbol(e.Name, p.Row.Element) {
		d.note("%s: partition %s is for %s: is it the right one?", e.Name, p.Key, p.Row.Element)
	}
	if otherThan(p.Row.Mineral, c) {
		d.note("%s: partition %s is for %s, but the crystal %s is %s: is it the right one?", e.Name, p.Key, p.Row.Mineral, c.Name, c.Mineral)
	}
	for i, z := range c.Zones {
		least, most := c.HostRange(i)
		if p.Row.RangeKnown() && (least < p.Row.XMin || most > p.Row.XMax) {
			d.note("%s: partition %s was calibrated for %s %g to %g, but zone %s has %s",
				e.Name, p.Key, p.Row.Host, p.Row.XMin, p.Row.XMax, z.Name, c.HostText(i))
		}
	}
}

// otherThan reports whether the crystal is of another mineral, unless that is
// mistyped.
func otherThan(mineral string, c *Crystal) bool {
	return !strings.EqualFold(mineral, c.Mineral) && nearest(c.Mineral, minerals()) != mineral
}

// startsWithSymbol reports whether a name begins with the symbol of an element:
// "Sr", "Sr (LA)" and "87Sr", but not "Srx", with Sr.
func startsWithSymbol(name, symbol string) bool {
	rest, ok := strings.CutPrefix(strings.TrimLeftFunc(name, unicode.IsDigit), symbol)
	return ok && !(rest != "" && unicode.IsLower([]rune(rest)[0]))
}
