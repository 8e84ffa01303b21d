package study

import (
	"errors"
	"fmt"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// Move is a time in which the rim of a crystal moves: outwards, where material is laid
// down at the value of the rim, or inwards, where it goes as it is.
type Move struct {
	Rate        float64 // m/s, negative inwards
	From, Until thermal.Moment
	Place       thermal.Place
}

// Moved returns the moves of the rim on a path, times counted from its start. The error
// is an *thermal.InputError: the path does not have a moment, moves overlap or begin
// before the outermost zone is there, or the rim would have moved through all of that.
func (c *Crystal) Moved(h *thermal.History) ([]diffusion.Move, error) {
	if len(c.Moves) == 0 {
		return nil, nil
	}
	added, err := c.Added(h)
	if err != nil {
		return nil, err
	}
	ready := added[len(added)-1]
	if begins, err := c.Begins(h); err == nil {
		ready = max(ready, begins)
	}
	var out []diffusion.Move
	for i := range c.Moves {
		m := &c.Moves[i]
		var at [2]float64
		for k, moment := range []thermal.Moment{m.From, m.Until} {
			t, err := h.Moment(moment)
			var in *thermal.InputError
			if errors.As(err, &in) {
				return nil, in.At(m.Place)
			}
			at[k] = t
		}
		if at[0] < ready || !(at[1] > at[0]) {
			return nil, m.Place.Error(m.From.Text, fmt.Sprintf("the rim moves until %q, which comes before it, or from a time at which it still moves otherwise or its zone is not there", m.Until.Text), "put from before until, and moves one after the other once all zones are there")
		}
		ready = at[1]
		out = append(out, diffusion.Move{From: at[0], Until: at[1], Rate: m.Rate})
	}
	zone, width := c.Zones[len(c.Zones)-1], 0.0
	for i := len(out) - 1; i >= 0; i-- {
		if width += out[i].Rate * (out[i].Until - out[i].From); !(width < zone.Width) {
			return nil, c.Moves[i].Place.Error(c.Moves[i].From.Text, fmt.Sprintf("the rim grows by %.4g um to its last place, and zone %s is %.4g um wide", width*1e6, zone.Name, zone.Width*1e6), "let it grow less, or the zone be wider: it holds what grows and what it grows on")
		}
	}
	return out, nil
}

// GrownLost is by how much the rim moves outwards and inwards along a path, m.
func (c *Crystal) GrownLost(h *thermal.History) (grown, lost float64) {
	moves, err := c.Moved(h)
	if err != nil {
		return 0, 0
	}
	for _, m := range moves {
		if by := m.Rate * (m.Until - m.From); by > 0 {
			grown += by
		} else {
			lost -= by
		}
	}
	return grown, lost
}

// moves reads how the rim moves.
func (d *decoder) moves(n *node, c *Crystal) {
	const example = `write grows = [ { rate = "5 um/yr", from = "start of wake", until = "end of wake" } ]`
	for _, t := range d.tables(n, example) {
		d.keys(t, growsTable)
		m := Move{Place: d.place(t)}
		if v := d.need(t, "rate", example); v != nil && d.is(v, textNode, example) {
			rate, ok := d.moveRate(v)
			switch {
			case !ok:
			case rate == 0 || !(rate > -exchange.top && rate < exchange.top):
				d.report(v, "no rate at which a rim moves", `write it like "5 um/yr", or "-5 um/yr" where the crystal dissolves`)
			}
			m.Rate = rate
		}
		from, ok1 := d.moveMoment(d.need(t, "from", example), c)
		until, ok2 := d.moveMoment(d.need(t, "until", example), c)
		if ok1 && ok2 {
			m.From, m.Until = *from, *until
			c.Moves = append(c.Moves, m)
		}
	}
}

// moveRate reads a velocity of either sign.
func (d *decoder) moveRate(n *node) (float64, bool) {
	if d.isOpen(n) {
		rate, m, ok := d.filled(n, n.text)
		if ok && !m.like(measure{dim: thermal.Velocity}) {
			d.report(n, fmt.Sprintf("%s where %s belongs", m, measure{dim: thermal.Velocity}), `want something like "5 um/yr"`)
			return 0, false
		}
		return rate, ok
	}
	rate, err := thermal.ParseQuantity(n.text, thermal.Velocity)
	if err != nil {
		d.reportError(n, err)
		return 0, false
	}
	return rate, true
}

func (d *decoder) moveMoment(v *node, c *Crystal) (*thermal.Moment, bool) {
	if v == nil {
		return nil, false
	}
	return d.zoneMoment(v, c.Zones)
}
