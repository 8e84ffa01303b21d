package study

import (
	"fmt"
	"math"

	"bankfire/diffusion"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// following reads a rim in equilibrium with a melt, K of a partition relation
// times what the melt has.
func (d *decoder) following(n *node, r *Rim, u *units) {
	r.Kind = diffusion.Prescribed
	v := n.get("following")
	const example = `write { following = "sr-blundy1991", melt = "90 ppm" }, a key or the name of a [[partition]]`
	key, ok := d.text(v, example)
	if !ok {
		return
	}
	relation, ok := d.relation(v, key)
	melt := d.need(n, "melt", example)
	if melt == nil {
		return
	}
	value := d.amount(melt, u, d.concentrationUnit(n.get("unit")))
	if value.open() {
		d.report(melt, "what the melt has must be known exactly", `write it like melt = "90 ppm"`)
	}
	if ok {
		r.Following = &Following{Partition: relation, Melt: value.Value}
	}
}

// followers gives the rims at an end that follow a relation the host of the zone
// there, and checks that it fits the element.
func (d *decoder) followers(rims []Rim, zone int, c *Crystal, e *Element) {
	for i := range rims {
		f, at := rims[i].Following, rims[i].Place
		switch {
		case f == nil || zone < 0:
			continue
		case !c.Hosted:
			d.add(at.Error("", "a rim that follows a partition relation needs the host's composition", hostRemedy))
		case e.Traverse != nil && e.Traverse.Grey:
			d.add(at.Error("", "relative values cannot follow a melt", "give the traverse in a unit of concentration"))
		case e.Law.OwnSlope != 0:
			d.add(at.Error("", "D depends on "+e.Name+" itself, so that its rim must be known without a path", `write held = "90 ppm", or given = "rim.csv"`))
		}
		f.Host = c.Zones[zone].Host
		d.notePartition(&f.Partition, c, e)
	}
}

// at is the value of the rim at a temperature, K.
func (f *Following) at(temp float64) float64 {
	return f.Melt * math.Exp(f.Partition.LnK(f.Host, temp))
}

// follow turns a rim that follows a relation into a function of time.
func (b *builder) follow(r *Rim) (*diffusion.Given, error) {
	f, h := r.Following, b.h
	lo, hi := h.Range()
	for _, temp := range []float64{lo, hi} {
		if x := f.at(temp); !(x <= traverse.Whole(b.e.Unit)) {
			return nil, r.Place.Error("", fmt.Sprintf("is in equilibrium with the melt at %.3g %s at %.0f C, more than all there is", x, b.e.Unit, temp-thermal.ZeroCelsius),
				"check the relation and the melt")
		}
	}
	g := &diffusion.Given{At: func(t float64) float64 {
		_, after := h.At(t)
		return f.at(after)
	}}
	for _, t := range h.Breaks(nil) {
		if before, after := h.At(t); before != after {
			g.Jumps = append(g.Jumps, t)
		} else {
			g.Breaks = append(g.Breaks, t)
		}
	}
	return g, nil
}
