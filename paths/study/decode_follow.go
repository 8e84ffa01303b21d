package study

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// following reads a rim in equilibrium with what is outside at every temperature:
// with a melt by a partition relation, or saturated by a solubility relation.
func (d *decoder) following(n *node, r *Rim, u *units) {
	r.Kind = diffusion.Prescribed
	v := n.get("following")
	const example = `write { following = "sr-blundy1991", melt = "90 ppm" }, a key or the name of a [[partition]], or { following = "ti-quartz-huang2012" }`
	key, ok := d.text(v, example)
	if !ok {
		return
	}
	if row, err := catalogue.FindSolubility(key); err == nil {
		for _, name := range []string{"melt", "temperature", "value", "unit"} {
			if w := n.get(name); w != nil {
				d.report(w, key+" knows what the crystal takes up without it", "leave it out")
			}
		}
		if s := d.solubility(v, row, u, d.inUse()); s != nil {
			r.Following = &Following{Solubility: s}
		}
		return
	}
	relation, ok := d.followed(v, key)
	if !ok {
		return
	}
	f, before := &Following{Partition: &relation}, d.faults
	if melt := d.need(n, "melt", example); melt != nil {
		d.melt(n, melt, f, u)
	}
	if d.faults == before {
		r.Following = f
	}
}

// followed returns the partition relation of that name, which a rim follows, or
// suggests the nearest of all relations.
func (d *decoder) followed(n *node, key string) (Partition, bool) {
	_, own := d.partitions[key]
	if _, err := catalogue.FindPartition(key); own || err == nil {
		return d.relation(n, key)
	}
	known := slices.Sorted(maps.Keys(d.partitions))
	for _, p := range catalogue.Partitions() {
		known = append(known, p.Key)
	}
	for _, s := range catalogue.Solubilities() {
		known = append(known, s.Key)
	}
	d.reportWord(n, "no partition relation, solubility relation or [[partition]] of this study", known, "known are "+strings.Join(known, ", "))
	return Partition{}, false
}

// melt reads what a melt has: a value, or a table against temperature.
func (d *decoder) melt(n, melt *node, f *Following, u *units) {
	const example = `write it like melt = "90 ppm"; a file needs its columns too: melt = "sr-melt.csv", temperature = "T [C]", value = "Sr [ppm]"`
	_, _, notAValue := thermal.ParseConcentration(melt.text)
	switch columns := n.get("temperature") != nil || n.get("value") != nil; {
	case columns && melt.kind == textNode && notAValue == nil:
		d.report(melt, "a value, and columns of a file beside it", "leave temperature and value out, or name the file")
		return
	case columns:
		f.Table = d.byTemperature(n, melt, u)
		return
	case melt.kind == textNode && melt.text != "free" && !looksLikeValue(melt.text) && !d.isOpen(melt):
		d.report(melt, "neither a value nor a file with its columns", example)
		return
	}
	value := d.amount(melt, u, d.concentrationUnit(n.get("unit")))
	if value.open() {
		d.report(melt, "what the melt has must be known exactly", example)
	}
	f.Melt = value.Value
}

// solubility reads a relation of the catalogue under the conditions of settings, by
// their numbers, in the unit of the element. It is nil if that fails.
func (d *decoder) solubility(n *node, row *catalogue.Solubility, u *units, settings []int) *Solubility {
	perPPM, ok := d.unitFactor(n, u, "ppm")
	if !d.saturates(n, row, settings) || !ok {
		return nil
	}
	s := &Solubility{Row: row, Contents: map[int]catalogue.Content{}, PerPPM: perPPM}
	for _, i := range settings {
		content, err := row.At(d.settings[i-1].Conditions.Given)
		if err != nil {
			d.reportError(n, err)
			return nil
		}
		s.Contents[i] = content
	}
	return s
}

// saturates reports every condition of the relation that the settings do not give,
// and notes a pressure for which it was not made.
func (d *decoder) saturates(n *node, row *catalogue.Solubility, settings []int) bool {
	before := d.faults
	for _, name := range row.Needs() {
		d.used[name] = true
		switch all, some := d.give(settings, name); {
		case some && !all:
			d.lacks(name, row.Key)
		case !all:
			d.report(n, "depends on "+name+", not given in this study", "write [conditions] and below it "+name+" = "+conditionExample(name))
		}
	}
	for _, i := range settings {
		if p, given := d.settings[i-1].Conditions.Given[catalogue.Pressure]; given && row.PMax > 0 {
			d.used[catalogue.Pressure] = true
			d.notePressure(row, p)
		} else if row.PMax > 0 && d.faults == before {
			d.noteOnce("no pressure given: %s was calibrated at %s", row.Key, pressureRange(row))
		}
	}
	return d.faults == before
}

func (d *decoder) notePressure(row *catalogue.Solubility, p float64) {
	const slack = 1e-9
	switch {
	case p < row.PMin*(1-slack):
		d.noteOnce("%s is used at %s, %s below its calibrated %s", row.Key, kilobars(p), kilobars(row.PMin-p), pressureRange(row))
	case p > row.PMax*(1+slack):
		d.noteOnce("%s is used at %s, %s above its calibrated %s", row.Key, kilobars(p), kilobars(p-row.PMax), pressureRange(row))
	}
}

func pressureRange(row *catalogue.Solubility) string {
	if row.PMin == row.PMax {
		return kilobars(row.PMin)
	}
	return fmt.Sprintf("%.4g to %s", row.PMin/kilobar, kilobars(row.PMax))
}

func kilobars(p float64) string { return fmt.Sprintf("%.4g kbar", p/kilobar) }

const kilobar = 1e3 * thermal.Bar

// followers gives the rims at r that follow a relation the host there, and checks
// that it fits the element.
func (d *decoder) followers(rims []Rim, r float64, c *Crystal, e *Element) {
	for i := range rims {
		f, at := rims[i].Following, rims[i].Place
		switch {
		case f == nil || len(c.Zones) == 0:
			continue
		case f.Partition != nil && !c.Hosted:
			d.add(at.Error("", "a rim that follows a partition relation needs the host's composition", hostRemedy))
		case f.related() && e.Traverse != nil && e.Traverse.Grey:
			d.add(at.Error("", "relative values cannot follow a relation", "give the traverse in a unit of concentration"))
		case e.Law.onItself():
			d.add(at.Error("", "D depends on "+e.Name+" itself, so that its rim must be known without a path", `write held = "90 ppm", or given = "rim.csv" against time`))
		}
		if f.Partition != nil {
			f.Host = c.HostAt(r)
			d.notePartition(f.Partition, c, e)
		}
		if f.Solubility != nil {
			d.noteSolubility(f.Solubility.Row, c, e)
		}
	}
}

// noteSolubility notes a relation that is used for what it was not made for.
func (d *decoder) noteSolubility(row *catalogue.Solubility, c *Crystal, e *Element) {
	d.noteOnce("%s: solubility by %s, %s%s", e.Name, row.Key, row.Citation, rivals(row))
	if !startsWithSymbol(e.Name, row.Element) {
		d.noteOnce("%s: solubility %s is for %s: is it the right one?", e.Name, row.Key, row.Element)
	}
	if otherThan(row.Mineral, c) {
		d.noteOnce("%s: solubility %s is for %s, but the crystal %s is %s: is it the right one?", e.Name, row.Key, row.Mineral, c.Name, c.Mineral)
	}
}

// rivals says that there are other relations for what this one is for.
func rivals(row *catalogue.Solubility) string {
	n := 0
	for _, s := range catalogue.Solubilities() {
		if s.Mineral == row.Mineral && s.Element == row.Element {
			n++
		}
	}
	if n == 1 {
		return ""
	}
	return fmt.Sprintf(", one of %d published models that differ by up to six times", n)
}

// related reports whether the rim follows a relation, not a table alone.
func (f *Following) related() bool { return f.Partition != nil || f.Solubility != nil }

// follow gives dst what a rim follows: exp(a - b/T) if it is of that form, else a
// function of time. It must be known at all temperatures between the times from and
// until, s. The host is that at the rim, which may be redrawn.
func (b *builder) follow(dst *diffusion.Rim, r *Rim, host, from, until float64) error {
	f := *r.Following
	f.Host = host
	lo, hi := b.h.RangeIn(from, until)
	if f.Table != nil {
		if err := f.Table.covers(lo, hi); err != nil {
			return err
		}
	}
	tried := map[int]bool{}
	for _, leg := range b.h.Legs() {
		if tried[leg.Setting] {
			continue
		}
		tried[leg.Setting] = true
		if err := f.possible(leg.Setting, lo, hi, b.e.Unit, r.Place); err != nil {
			return err
		}
	}
	if a, ok := f.exponential(tried); ok {
		if dst.Equilibrium = &a; dst.Kind != diffusion.Transfer {
			dst.Kind = diffusion.Following
		}
		return nil
	}
	dst.Given = f.along(b.h)
	return nil
}

// exponential returns the value of the rim as exp(LnA - E/T) in legs of all the
// settings; ok is false if it is not exactly of that form.
func (f *Following) exponential(settings map[int]bool) (a diffusion.Arrhenius, ok bool) {
	switch {
	case f.Solubility != nil:
		each := map[catalogue.Content]bool{}
		for setting := range settings {
			each[f.Solubility.Contents[setting]] = true
		}
		for content := range each {
			a, ok = content.Exponential()
			a.LnA += math.Log(f.Solubility.PerPPM)
		}
		return a, ok && len(each) == 1
	case f.Partition != nil && f.Table == nil && f.Melt > 0:
		// LnK goes as 1/T.
		return diffusion.Arrhenius{LnA: math.Log(f.Melt), E: -f.Partition.LnK(f.Host, 1)}, true
	}
	return diffusion.Arrhenius{}, false
}

// along is the value of the rim as a function of time.
func (f *Following) along(h *thermal.History) *diffusion.Given {
	g := &diffusion.Given{At: func(t float64) float64 {
		_, after := h.At(t)
		return f.At(h.Setting(t), after)
	}}
	for _, t := range h.Breaks(nil) {
		before, after := h.At(t)
		if was := h.Setting(math.Nextafter(t, -1)); before != after || f.At(was, before) != f.At(h.Setting(t), after) {
			g.Jumps = append(g.Jumps, t)
		} else {
			g.Breaks = append(g.Breaks, t)
		}
	}
	g.Breaks = append(g.Breaks, f.kinks(h)...)
	return g
}

// kinks are the times at which the temperature passes a row of the table and no leg
// begins or ends.
func (f *Following) kinks(h *thermal.History) []float64 {
	if f.Table == nil {
		return nil
	}
	known := h.Breaks(nil)
	var all, out []float64
	for _, temp := range f.Table.Temp {
		all = h.Passes(all, temp)
	}
	slices.Sort(all)
	for _, t := range slices.Compact(all) {
		if _, is := slices.BinarySearch(known, t); !is {
			out = append(out, t)
		}
	}
	return out
}
