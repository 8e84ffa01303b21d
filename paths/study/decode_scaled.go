package study

import (
	"fmt"
	"math"
	"slices"

	"bankfire/paths/traverse"
)

// scaledStart is a start that waits for the element whose shape it has.
type scaledStart struct {
	n  *node // of the start
	of *Scaled
	by string // the element that starts with it
}

// scaled reads a start with the shape of another element of the crystal. That is
// looked up when all elements of it are known.
func (d *decoder) scaled(n *node, s *Start, e *Element, u *units) {
	clear(s.Zones)
	out := &Scaled{}
	out.Of, _ = d.text(n.get("scaled"), `name another element of the crystal, such as scaled = "P"`)
	unit := d.concentrationUnit(n.get("unit"))
	end := func(key string) Plateau {
		v := n.get(key)
		switch {
		case v != nil:
			return d.amount(v, u, unit)
		case !u.measured:
			d.need(n, key, fmt.Sprintf("there is no traverse to fit it to: write the value where %s is %s, such as %s = \"58 ppm\"", out.Of, key, key))
		}
		return Plateau{Free: true}
	}
	out.Lowest, out.Highest = end("lowest"), end("highest")
	out.Width = d.smoothing(n)
	if edge := n.get("edge"); edge != nil && out.Width > 0 {
		d.report(edge, "a start by a spline has no edges", `leave it out, or write smooth = "steps"`)
	}
	s.Scaled = out
	d.copies = append(d.copies, scaledStart{n, out, e.Name})
}

// resolve gives a scaled start the shape of the element that it names.
func (d *decoder) resolve(s scaledStart, c *Crystal) {
	of := d.sourceOf(s, c)
	if of == nil || d.faults > 0 || !c.sized() {
		return
	}
	position, value := c.placed(of)
	s.of.Position, s.of.Value = position, value
	wide := s.n.get("width")
	switch {
	case s.of.Width == 0:
		s.of.steps = d.zoneSteps(s, c)
	case d.splines(position, s.n.get("scaled"), wide, s.of.Width):
		s.of.spline = traverse.Smooth(position, value, s.of.Width)
		s.of.least, s.of.most = s.of.spline.Range(c.R0, c.Size())
		d.varies(s, s.of.most-s.of.least, of.Traverse)
		d.noteSpline(s, c)
	}
	if !of.Origin.Fixed() || !of.Tilt.Fixed() {
		d.note("%s: the shape of %s is taken with its origin and tilt in the middle of what they may be", s.by, of.Name)
	}
}

// sourceOf returns the element whose shape a start has; nil if that cannot be one.
func (d *decoder) sourceOf(s scaledStart, c *Crystal) *Element {
	const remedy = "name an element of the same crystal that hardly diffused and has a traverse"
	v := s.n.get("scaled")
	if s.of.Of == "" {
		return nil
	}
	i := slices.IndexFunc(c.Elements, func(e Element) bool { return e.Name == s.of.Of })
	if i < 0 {
		d.noSource(v, s, c, remedy)
		return nil
	}
	of := &c.Elements[i]
	switch {
	case of.Name == s.by:
		d.report(v, "the element itself", remedy)
	case of.Start.Scaled != nil || slices.ContainsFunc(of.Alternatives, func(a Start) bool { return a.Scaled != nil }):
		d.report(v, "starts as a scaled copy itself", remedy)
	case of.Traverse == nil:
		d.report(v, "has no traverse, so that its shape is not known", remedy)
	case slices.Contains(of.Traverse.Limit, true):
		d.report(v, "has values below detection, which say nothing of its shape", `leave them out of its traverse: below = "skip"`)
	default:
		return of
	}
	return nil
}

// noSource reports a name that no element of the crystal has.
func (d *decoder) noSource(v *node, s scaledStart, c *Crystal, remedy string) {
	if d.everyone[s.of.Of] {
		d.report(v, "an element of another crystal, which need not have been zoned alike", remedy)
		return
	}
	var others []string
	for _, e := range c.Elements {
		if e.Name != s.by {
			others = append(others, e.Name)
		}
	}
	d.reportWord(v, "no element of this crystal has this name", others, remedy)
}

// placed returns the points of an element's traverse by their distance from the
// centre, ascending. Of points that meet there, as on both sides of a centre, it has the
// mean.
func (c *Crystal) placed(e *Element) (position, value []float64) {
	at := make([]float64, len(e.Traverse.Position))
	e.Traverse.Place(at, e.Origin.Middle(), e.Tilt.Middle())
	order := make([]int, len(at))
	for i := range at {
		order[i] = i
		if c.Mirrored(e) {
			at[i] = math.Abs(at[i])
		}
	}
	slices.SortStableFunc(order, func(i, j int) int {
		switch {
		case at[i] < at[j]:
			return -1
		case at[i] > at[j]:
			return 1
		}
		return 0
	})
	met := 0 // points in the last place
	for _, i := range order {
		last := len(position) - 1
		if last >= 0 && at[i]-position[last] <= positionSlack*c.Size() {
			met++
			value[last] += (e.Traverse.Value[i] - value[last]) / float64(met)
			continue
		}
		met = 1
		position, value = append(position, at[i]), append(value, e.Traverse.Value[i])
	}
	return position, value
}

// zoneSteps returns t of each zone from the medians of the points in it.
func (d *decoder) zoneSteps(s scaledStart, c *Crystal) []float64 {
	v := s.n.get("scaled")
	ends := c.pointsUpTo(s.of.Position)
	steps := make([]float64, len(c.Zones))
	for i, z := range c.Zones {
		in := slices.Sorted(slices.Values(s.of.Value[ends[i]:ends[i+1]]))
		if len(in) == 0 {
			d.report(v, fmt.Sprintf("no point of its traverse lies in zone %s", z.Name), `write smooth = "spline" and a width, or give the zones themselves`)
			return nil
		}
		steps[i] = median(in)
	}
	least, most := slices.Min(steps), slices.Max(steps)
	if !(most > least) {
		d.report(v, "is the same in all zones, so that it has no shape", "give the zones themselves")
		return nil
	}
	for i := range steps {
		steps[i] = (steps[i] - least) / (most - least)
	}
	d.note("%s: starts as %s is zoned, in the medians of its points in each zone, taken as exact", s.by, s.of.Of)
	return steps
}

// fewSigmas is how many of its errors a profile must vary by for its shape to be more
// than noise.
const fewSigmas = 5

// varies reports a shape that is none, and notes one that is hardly more than noise.
func (d *decoder) varies(s scaledStart, by float64, t *traverse.Traverse) {
	sigma := median(slices.Sorted(slices.Values(t.Sigma)))
	switch {
	case !(by > 0):
		d.report(s.n.get("scaled"), "is the same all through the crystal, so that it has no shape", "give the zones themselves")
	case by < fewSigmas*sigma:
		d.note("%s: %s, whose shape it starts with, varies by no more than %.2g times its errors", s.by, s.of.Of, by/sigma)
	}
}

// noteSpline notes how the shape was made, and what it does not know.
func (d *decoder) noteSpline(s scaledStart, c *Crystal) {
	position := s.of.Position
	last := len(position) - 1
	d.note("%s: starts as %s is zoned, by a spline through %d points that averages over %.4g um, taken as exact and as blurred as it was measured", s.by, s.of.Of, last+1, s.of.Width*1e6)
	if spacing := (position[last] - position[0]) / float64(last); s.of.Width < perWidth*spacing*(1-positionSlack) {
		d.note("%s: the width of its start, %.4g um, holds few points %.3g um apart, so that it may follow their noise", s.by, s.of.Width*1e6, spacing*1e6)
	}
	d.noteGaps(s.by+": its start", position, s.of.Width, c)
}
