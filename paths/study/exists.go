package study

import (
	"errors"
	"fmt"

	"bankfire/thermal"
)

// Bar is why one crystal cannot have seen a path, or why none can.
type Bar struct {
	Crystal string // its name, "" where it is all of them
	Why     string
}

// Begins is the time, s from the start of a path, from which the crystal exists
// and sees it. The error is an *thermal.InputError about a moment that the path
// does not have, or that is its end.
func (c *Crystal) Begins(h *thermal.History) (float64, error) {
	if c.Exists == nil {
		return 0, nil
	}
	event := *c.Exists
	event.Offset = 0
	if t, err := h.Moment(event); err == nil && t+c.Exists.Offset >= h.Life()*(1-limitSlack) {
		return 0, c.ExistsPlace.Error(c.Exists.Text, "the path ends before that", "make the path longer, or the moment earlier")
	}
	t, err := h.Moment(*c.Exists)
	var in *thermal.InputError
	if errors.As(err, &in) {
		return 0, in.At(c.ExistsPlace)
	}
	return t, err
}

// Sees is the part of a path that the crystal sees: all of it, or what comes after
// the moment from which it exists, with times that count from there. The error is
// that of Begins.
func (c *Crystal) Sees(h *thermal.History) (*thermal.History, error) {
	t, err := c.Begins(h)
	if err != nil {
		return nil, err
	}
	return h.From(t)
}

// dissolved says why the crystal would have dissolved on a path, which it has
// seen.
func (c *Crystal) dissolved(seen *thermal.History) []string {
	if c.Dissolves == nil {
		return nil
	}
	var why []string
	for _, how := range c.Dissolves.broken(seen) {
		why = append(why, fmt.Sprintf("%s dissolves: %s", c.Name, how))
	}
	return why
}

// bar adds why the crystal cannot have seen the path.
func (p *Path) bar(c *Crystal, why string) { p.Barred = append(p.Barred, Bar{c.Name, why}) }

// bars reports whether the crystal cannot have seen the path.
func (p *Path) bars(c *Crystal) bool {
	for _, b := range p.Barred {
		if b.Crystal == c.Name {
			return true
		}
	}
	return false
}

// exists bars the paths that end before the crystal or a zone of it exists, or do not
// have the moment, and those on which it dissolves. A crystal or a zone that exists on
// no path is a problem.
func (d *decoder) exists(paths []Path, c *Crystal) {
	if c.Exists != nil {
		for p, why := range d.lacking(paths, func(p *Path) *thermal.InputError {
			_, err := p.Crystal(c).Begins(p.History)
			return inputError(err, c.ExistsPlace)
		}) {
			p.bar(c, fmt.Sprintf("%s exists from %q: %s", c.Name, c.Exists.Text, why.Problem))
		}
	}
	for p, why := range d.lacking(paths, func(p *Path) *thermal.InputError {
		if p.bars(c) {
			return nil
		}
		own := p.Crystal(c)
		_, err := own.Added(p.History)
		if err == nil {
			_, err = own.Moved(p.History)
		}
		return inputError(err, c.Place)
	}) {
		p.bar(c, fmt.Sprintf("%s: %s (%s)", c.Name, why.Problem, why.Value))
	}
	for i := range paths {
		own := paths[i].Crystal(c)
		seen, err := own.Sees(paths[i].History)
		if err != nil {
			continue
		}
		if t, _ := own.Begins(paths[i].History); t > paths[i].Eruption {
			d.note("%s exists only after the eruption of path %q: is exists_from the right moment?", c.Name, paths[i].Name)
		}
		for _, why := range own.dissolved(seen) {
			paths[i].bar(c, why)
		}
	}
}

// existence reads from when on a crystal exists and when it dissolves.
func (d *decoder) existence(n *node, c *Crystal) {
	if v := n.get("exists_from"); v != nil {
		c.Exists, _ = d.pathMoment(v)
		c.ExistsPlace = d.place(v)
	}
	const example = `write dissolves = { above = "790 C", longer = "2 yr" }`
	v := n.get("dissolves")
	if !d.is(v, tableNode, example) {
		return
	}
	d.keys(v, dissolvesTable)
	l := TimeLimit{Stretch: true, Place: d.place(v)}
	l.Temp, _ = d.quantity(d.need(v, "above", example), temperature)
	l.Most, _ = d.quantity(d.need(v, "longer", example), pause)
	c.Dissolves = &l
}
