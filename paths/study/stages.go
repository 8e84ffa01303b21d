package study

import (
	"errors"
	"fmt"
	"strings"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// Staged reports whether zones of the crystal are added along a path.
func (c *Crystal) Staged() bool { return c.Zones[len(c.Zones)-1].Added != nil }

// Added is when each zone was added, s from the start of a path: 0 if it was there. The
// error is an *thermal.InputError about a moment that the path does not have, or that
// comes before the zone inside is there.
func (c *Crystal) Added(h *thermal.History) ([]float64, error) {
	out := make([]float64, len(c.Zones))
	for i := range c.Zones {
		z := &c.Zones[i]
		if z.Added == nil {
			continue
		}
		event := *z.Added
		event.Offset = 0
		if t, err := h.Moment(event); err == nil && t+z.Added.Offset > h.Life()*(1+limitSlack) {
			return nil, z.AddedPlace.Error(z.Added.Text, "the path ends before zone "+z.Name, "make the path longer, or the moment earlier")
		}
		t, err := h.Moment(*z.Added)
		var in *thermal.InputError
		if errors.As(err, &in) {
			return nil, in.At(z.AddedPlace)
		}
		if err != nil {
			return nil, err
		}
		if out[i] = t; i > 0 && t < out[i-1] {
			return nil, z.AddedPlace.Error(z.Added.Text, fmt.Sprintf("zone %s comes before %s, on which it lies", z.Name, c.Zones[i-1].Name), "zones grow outwards: put its moment later")
		}
	}
	begins, err := c.Begins(h)
	for i := 0; err == nil && i < len(out); i++ {
		if z := &c.Zones[i]; z.Added != nil && out[i] < begins {
			return nil, z.AddedPlace.Error(z.Added.Text, "zone "+z.Name+" comes before the crystal exists", "leave added out, or put its moment later")
		}
	}
	return out, err
}

// outermost is a stretch of a path in which one zone is outermost.
type outermost struct {
	zone int
	from float64 // s from the start of the path
	r    float64 // of the rim, m
}

// stages are those stretches, in the order of time.
func (c *Crystal) stages(h *thermal.History) ([]outermost, error) {
	added, err := c.Added(h)
	if err != nil {
		return nil, err
	}
	var out []outermost
	r := c.R0
	for i, t := range added {
		r += c.Zones[i].Width
		if n := len(out); n > 0 && out[n-1].from == t {
			out = out[:n-1]
		}
		out = append(out, outermost{i, t, r})
	}
	return out, nil
}

// hostIn is the composition of the host at r in a zone or at its boundary.
func (c *Crystal) hostIn(zone int, r float64) float64 {
	if c.Host != nil {
		return c.Host.At(r)
	}
	return c.Zones[zone].Host
}

// added reads when a zone was added.
func (d *decoder) added(n *node, z *Zone, inside []Zone) {
	v := n.get("added")
	if v == nil {
		if k := len(inside); k > 0 && inside[k-1].Added != nil {
			d.report(n, "lies on a zone that was added, and does not say when it was added itself", fmt.Sprintf(`write added = "%s added", if both were at once, or a later moment`, inside[k-1].Name))
		}
		return
	}
	if len(inside) == 0 {
		d.report(v, "the first zone is there from the start", "leave added out; a crystal that exists only from a moment on has exists_from")
		return
	}
	z.Added, _ = d.zoneMoment(v, inside)
	z.AddedPlace = d.place(v)
}

// zoneMoment reads a moment that may count from the addition of one of the zones. It
// returns one that counts from the path.
func (d *decoder) zoneMoment(v *node, zones []Zone) (*thermal.Moment, bool) {
	m, ok := d.moment(v)
	if !ok || m.Kind != thermal.Added {
		return m, ok
	}
	var names []string
	for i := range zones {
		z := &zones[i]
		if z.Name != m.Name {
			names = append(names, z.Name)
			continue
		}
		out := thermal.Moment{Offset: m.Offset, Text: m.Text}
		if z.Added != nil {
			out.Kind, out.Name = z.Added.Kind, z.Added.Name
			out.Offset += z.Added.Offset
		}
		return &out, true
	}
	remedy := "write another moment, such as \"3 yr before eruption\""
	if near := nearest(m.Name, names); near != "" {
		remedy = fmt.Sprintf("did you mean %q?", near+" added")
	}
	d.report(v, fmt.Sprintf("no zone %q was added before", m.Name), remedy)
	return nil, false
}

// complete says what held before the first rim of the list is in force: while each
// zone was outermost its own plateau. A rim that is tied to a zone is in force when
// that was added.
func (d *decoder) complete(rims []Rim, c *Crystal, element string) []Rim {
	if len(rims) == 0 || len(c.Zones) == 0 || !c.Staged() {
		return rims
	}
	first, before := &rims[0], len(c.Zones)
	if first.From == nil && first.Zone >= 0 {
		first.From, before = c.Zones[first.Zone].Added, first.Zone
	}
	if first.From == nil {
		return rims
	}
	var assumed []Rim
	var names []string
	for i := range before {
		if i+1 < len(c.Zones) && c.Zones[i+1].Added == nil {
			continue // never outermost
		}
		r := tied(i, first.Place)
		r.From, r.Assumed = c.Zones[i].Added, true
		assumed, names = append(assumed, r), append(names, c.Zones[i].Name)
	}
	which := ""
	if before < len(c.Zones) {
		which = ": " + strings.Join(names, ", then ")
	}
	d.note("%s in %s: no rim given for before %q, taken to be held at the plateau of the zone that was outermost%s", element, c.Name, first.From.Text, which)
	return append(assumed, rims...)
}

// inStage is a rim of a list while one zone is outermost.
type inStage struct {
	rim  int // in the list
	zone int // that is outermost
	from float64
	r    float64
}

// inStages cuts the rims of a list at the stages of the crystal. Those that are
// assumed give way to what comes later.
func (b *builder) inStages(list []Rim, stages []outermost) ([]inStage, error) {
	var out []inStage
	before := 0.0 // when the last that holds began
	for i := range list {
		from, err := list[i].from(b.h)
		if err != nil {
			return nil, err
		}
		until, err := b.until(list, i)
		if err != nil {
			return nil, err
		}
		if list[i].Assumed && until <= from {
			continue
		}
		if len(out) > 0 && !(from > before) {
			return nil, list[i].Place.Error(list[i].From.Text, "does not come after the rim before it", "list rims in the order of time")
		}
		before = from
		for s, st := range stages {
			begins, ends := max(from, st.from), until
			if s+1 < len(stages) {
				ends = min(until, stages[s+1].from)
			}
			if begins < ends || i == len(list)-1 && s == len(stages)-1 {
				out = append(out, inStage{i, st.zone, begins, st.r})
			}
		}
	}
	return out, nil
}

// until is when rim i of a list holds no more, s: when the next one begins, or for one
// that is assumed any later one. No path has a time past that of the last.
func (b *builder) until(list []Rim, i int) (float64, error) {
	until := 2 * b.h.Life()
	for k := i + 1; k < len(list); k++ {
		from, err := list[k].from(b.h)
		if err != nil {
			return 0, err
		}
		if until = min(until, from); !list[i].Assumed {
			break
		}
	}
	return until, nil
}

// rimsOf returns those of the problem.
func (b *builder) rimsOf(list []Rim, held []inStage) ([]diffusion.Rim, error) {
	begins, err := b.c.Begins(b.h)
	if err != nil {
		return nil, err
	}
	var out []diffusion.Rim
	for k, at := range held {
		rim := &list[at.rim]
		from, until := max(at.from, begins), b.h.Life()
		if k+1 < len(held) {
			until = min(until, held[k+1].from)
		}
		dst := diffusion.Rim{Kind: rim.Kind, From: at.from, Value: b.value(rim, at.r), Rate: rim.Rate}
		switch {
		case rim.Following != nil:
			err = b.follow(&dst, rim, b.c.hostIn(at.zone, at.r), from, until)
		case rim.Given != nil:
			dst.Given, err = b.given(rim.Given, from, until)
		}
		if err != nil {
			return nil, err
		}
		out = append(out, dst)
	}
	return out, nil
}
