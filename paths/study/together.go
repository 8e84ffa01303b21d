package study

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"bankfire/thermal"
)

// together checks what only shows when paths, crystals and limits meet.
func (d *decoder) together(s *Study) {
	all := slices.Concat(s.Paths, d.probes(s.Families))
	for i := range s.Crystals {
		c := &s.Crystals[i]
		before := d.faults
		d.exists(all, c)
		if d.faults > before && (c.Staged() || len(c.Moves) > 0) {
			continue // its rims would say so again
		}
		for j := range c.Elements {
			e := &c.Elements[j]
			for i := range e.Inner {
				d.moments(all, c, e, func(c *Crystal) []Rim { return c.Elements[j].Inner[:i+1] })
			}
			for i := range e.Rims {
				d.moments(all, c, e, func(c *Crystal) []Rim { return c.Elements[j].Rims[:i+1] })
			}
			for k := range s.Paths {
				d.meet(c, e, &all[k])
			}
		}
	}
	copy(s.Paths, all)
	d.shares(s)
	for i := range s.Limits.Between {
		d.interval(all, len(s.Paths), &s.Limits.Between[i])
	}
}

// interval notes how many paths a limit between two moments concerns, of the first
// few that are written out. One that concerns none is a problem.
func (d *decoder) interval(paths []Path, written int, l *Interval) {
	before := d.faults
	for _, m := range []thermal.Moment{l.From, l.To} {
		d.lacking(paths, func(p *Path) *thermal.InputError {
			_, err := p.History.Moment(m)
			return inputError(err, l.Place)
		})
	}
	concerned, ofWritten := 0, 0
	for i := range paths {
		if l.concerns(paths[i].History) {
			concerned++
			if i < written {
				ofWritten++
			}
		}
	}
	switch {
	case d.faults > before || concerned > 0 && ofWritten == written:
	case concerned == 0:
		d.add(l.Place.Error("", fmt.Sprintf("no path has the legs of both %q and %q", l.From.Text, l.To.Text), "check the names of the legs"))
	default:
		d.note("the limit from %q to %q concerns %d of the %d paths: the others do not have its legs", l.From.Text, l.To.Text, ofWritten, written)
	}
}

// moments bars the paths that do not have the moment of the last of some rims, or have
// it before that of the rim it follows. A rim that holds on no path is a problem.
func (d *decoder) moments(paths []Path, c *Crystal, e *Element, upTo func(c *Crystal) []Rim) {
	rims := upTo(c)
	i := len(rims) - 1
	if i == 0 || rims[i].Assumed {
		return // holds from the start, or goes with a zone
	}
	for p, why := range d.lacking(paths, func(p *Path) *thermal.InputError {
		own := p.Crystal(c)
		if _, err := own.Added(p.History); err != nil {
			return nil // barred for it
		}
		return after(upTo(own), i, p.History)
	}) {
		p.bar(c, fmt.Sprintf("the rim of %s in %s from %q: %s", e.Name, c.Name, rims[i].From.Text, why.Problem))
	}
}

// after checks the moment of rim i on a path, and that it comes after the one
// before it if that is on the path as well.
func after(rims []Rim, i int, h *thermal.History) *thermal.InputError {
	from, err := rims[i].from(h)
	if err != nil {
		return inputError(err, rims[i].Place)
	}
	if before, err := rims[i-1].from(h); err == nil && !rims[i-1].Assumed && !(from > before) {
		return rims[i].Place.Error(rims[i].From.Text, "does not come after the rim before it", "list rims in the order of time")
	}
	return nil
}

// inputError is the *thermal.InputError in err, at a place if it has none; nil
// if there is none.
func inputError(err error, at thermal.Place) *thermal.InputError {
	var in *thermal.InputError
	if errors.As(err, &in) && in.File == "" {
		return in.At(at)
	}
	return in
}

// lacking returns the paths that fail a check. If all of them do, the study is
// wrong: the first is reported, and none returned.
func (d *decoder) lacking(paths []Path, check func(p *Path) *thermal.InputError) map[*Path]*thermal.InputError {
	failed := map[*Path]*thermal.InputError{}
	for i := range paths {
		if e := check(&paths[i]); e != nil {
			failed[&paths[i]] = e
		}
	}
	if len(failed) < len(paths) {
		return failed
	}
	on := *failed[&paths[0]]
	on.Problem += fmt.Sprintf(" (path %q", paths[0].Name)
	if len(paths) > 1 {
		on.Problem += ", and it is no better on any other"
	}
	on.Problem += ")"
	d.add(&on)
	return nil
}

// meet checks one element on one path.
func (d *decoder) meet(c *Crystal, e *Element, p *Path) {
	seen, err := c.Sees(p.History)
	if err != nil {
		return // barred for it
	}
	if in := inputError(c.holds(e, p.History), e.Place); in != nil && !p.bars(c) {
		on := *in
		on.Problem += fmt.Sprintf(" (path %q)", p.Name)
		d.add(&on)
	}
	if in := c.cold(e, p.Name, seen); in != nil {
		d.add(in)
	}
	legs := seen.Legs()
	for i := range legs {
		if legs[i].Kind != thermal.Table {
			continue
		}
		for _, a := range e.Law.Law.In(legs[i].Setting).Terms {
			d.coarse(e, p, legs[i].Rows, a.E)
		}
	}
}

// coarse notes a table whose rows are too far apart for the law.
func (d *decoder) coarse(e *Element, p *Path, rows *thermal.Rows, energy float64) {
	if step, ratio, coarse := rows.Coarse(energy); coarse {
		d.note("path %q: its table is coarse: straight lines between its rows may put the diffusion of %s off by a factor of %.3g, most from %s to %s after its first row",
			p.Name, e.Name, ratio, years(rows.Time[step]), years(rows.Time[step+1]))
	}
}

// maxLnK bounds ln K along a path.
const maxLnK = 200

// cold says of a path that, where the crystal sees it, it is so cold that K of an element is out of all bounds.
func (c *Crystal) cold(e *Element, name string, seen *thermal.History) *thermal.InputError {
	if e.Partition == nil {
		return nil
	}
	lowest, _ := seen.Range()
	for i, z := range c.Zones {
		least, most := c.HostRange(i)
		for _, x := range []float64{least, most} {
			if lnK := e.Partition.LnK(x, lowest); !(math.Abs(lnK) <= maxLnK) {
				return e.Place.Error("", fmt.Sprintf("its partition relation gives K = exp(%.3g) in zone %s at the coldest of path %q", lnK, z.Name, name),
					"check A and B, or leave the coldest leg out")
			}
		}
	}
	return nil
}
