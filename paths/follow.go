package paths

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// Course is one path followed through every element of a study.
type Course struct {
	Path     *study.Path
	Elements []ElementCourse
}

// ElementCourse is what one element did along a path. Profiles are cell means
// before the spot, in the element's unit.
type ElementCourse struct {
	Crystal   *study.Crystal
	Element   *study.Element
	Centres   []float64 // m from the crystal's centre
	Start     []float64
	Final     []float64
	NumErr    float64   // largest numerical error of Final, in the element's unit
	LnG       float64   // ln of the diffusion integral of the whole path, m2
	Free      []FreeFit // what the traverse decided, at the end of the path
	Legs      []LegShare
	Snapshots []Snapshot
	WhyG      string // whether the profile knows more of the path than G, and why
	GEnough   bool
	Notes     []string
}

// LegShare is how much of the diffusion one leg, or one named stretch of several,
// did, and at which temperatures.
type LegShare struct {
	Name                 string
	Start, Duration      float64 // s, Start from that of the path; of a leg that began before the crystal, what is left of it
	First, Highest, Last float64 // temperatures, K
	Share                float64 // of G
}

// Snapshot is the profile at one time.
type Snapshot struct {
	Time  float64 // s from the start of the path
	Value []float64
}

// Follow runs one path in detail: every element of every crystal, at the end
// of the path and at the given times, in s from its start. Values left free
// are those that fit the traverse at the end of the path. If ctx is done before
// the last element or time, the error wraps that of ctx.
func Follow(ctx context.Context, s *study.Study, path *study.Path, at []float64) (*Course, error) {
	out := &Course{Path: path}
	for i := range s.Crystals {
		c := path.Crystal(&s.Crystals[i])
		for j := range c.Elements {
			e, err := follow(ctx, c, &c.Elements[j], path, at)
			if err != nil {
				return nil, fmt.Errorf("path %q, %s in %s: %w", path.Name, c.Elements[j].Name, c.Name, err)
			}
			out.Elements = append(out.Elements, *e)
		}
	}
	return out, nil
}

func follow(ctx context.Context, c *study.Crystal, e *study.Element, path *study.Path, at []float64) (*ElementCourse, error) {
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	p, result, err := run(c, e, path)
	if err != nil {
		return nil, err
	}
	out := &ElementCourse{Crystal: c, Element: e, Centres: p.plan().Centres(), LnG: p.runs[0].course.LnG()}
	widths, amounts := middleWidths(&e.Start), amounts{scale: 1, values: make([]float64, len(p.free))}
	if result != nil {
		out.Free, out.Notes = result.Free, result.notes(path)
		fitted := p.fitRun(0, nil)
		widths, _, _ = p.lens.values(fitted.Bent)
		amounts = p.amounts(fitted).stated()
	}
	if result == nil {
		out.Notes = append(lawNotes(c, e, path.History), boundaryNotes(c, e, path.History)...)
		out.Notes = append(out.Notes, reachNotes(c, out.LnG+fastest(c, e))...)
	}
	if e.OnHost() {
		out.Notes = append(out.Notes, hostMoved(c, p.history)...)
	}
	if e.Alternatives != nil {
		out.Notes = append(out.Notes, fmt.Sprintf("%s may have had %d starts; it is followed from the first, %s", e.Name, len(e.Alternatives), e.StartName(0)))
	}
	out.WhyG, out.GEnough = p.plan().GEnough()
	out.Start, out.Final = amounts.of(p.mix(p.starts(), widths)), amounts.of(p.mix(p.columns(0), widths))
	steps, cells := p.errors(widths, amounts)
	for i := range steps {
		out.NumErr = math.Max(out.NumErr, math.Abs(steps[i])+math.Abs(cells[i]))
	}
	begins, err := c.Begins(path.History)
	if err != nil {
		return nil, err
	}
	if begins > 0 {
		out.Notes = append(out.Notes, fmt.Sprintf("%s exists from %s after the start of the path; earlier it is shown as it began", c.Name, thermal.DurationText(begins)))
	}
	out.Notes = append(out.Notes, growthNotes(c, path.History)...)
	out.Legs = legShares(p.history, e.Law.Law)
	for i := range out.Legs {
		out.Legs[i].Start += begins
	}
	for _, t := range at {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		since := max(0, t-begins)
		if t <= path.History.Life() {
			since = min(since, p.history.Life())
		}
		cols, err := p.until(since)
		if err != nil {
			return nil, err
		}
		out.Snapshots = append(out.Snapshots, Snapshot{t, amounts.of(p.mix(cols, widths))})
	}
	return out, nil
}

// run leaves the audited run of the path as it is in the first fields. Where
// there is a traverse its plan is fine enough for that, and the result is not
// nil.
func run(c *study.Crystal, e *study.Element, path *study.Path) (*profile, *ProfileResult, error) {
	if e.Traverse != nil {
		return audited(&element{crystal: c, element: e}, path, 0)
	}
	p, err := newProfile(&element{crystal: c, element: e}, path, 0)
	if err != nil {
		return nil, nil, err
	}
	return p, nil, p.audit(0)
}

// until runs the path up to time t, s from when the crystal began to exist, and
// returns the columns.
func (p *profile) until(t float64) ([][][]float64, error) {
	cols := make([][][]float64, len(p.runs))
	for i := range p.runs {
		r := &p.runs[i]
		var course diffusion.Course
		if err := r.plan.Course(&course, p.history, t); err != nil {
			return nil, err
		}
		fields := r.fields[1:2]
		if err := r.plan.Run(fields, []diffusion.Job{{Course: &course}}); err != nil {
			return nil, err
		}
		cols[i] = fields[0].Cols
	}
	return cols, nil
}

// legShares returns what each leg did, legs as the user named them and the
// others by their kind.
func legShares(h *thermal.History, law diffusion.Law) []LegShare {
	total := law.LnIntegral(h, 0, h.Life())
	var shares []LegShare
	next := 0
	for _, n := range spans(h) {
		share := LegShare{Name: n.Name, Start: n.Start, Duration: n.End - n.Start}
		_, share.First = h.At(n.Start)
		share.Last, _ = h.At(n.End)
		share.Highest = math.Max(share.First, share.Last)
		for ; next < len(h.Legs()) && h.Start(next) < n.End; next++ {
			if leg := &h.Legs()[next]; leg.For > 0 {
				_, highest := leg.Range()
				share.Highest = math.Max(share.Highest, highest)
			}
		}
		if !math.IsInf(total, -1) {
			share.Share = math.Exp(law.LnIntegral(h, n.Start, n.End) - total)
		}
		shares = append(shares, share)
	}
	return shares
}

// spans cuts the history into the user's named legs and, between them, the
// single legs without a name. Of names within names the innermost count.
func spans(h *thermal.History) []thermal.Named {
	list := innermost(h.Names())
	named := len(list)
	k := 0
	for i, leg := range h.Legs() {
		start, end := h.Start(i), h.Start(i)+leg.For
		for k < named && list[k].End <= start {
			k++
		}
		if k == named || start < list[k].Start || end > list[k].End {
			list = append(list, thermal.Named{Name: fmt.Sprintf("leg %d (%s)", i+1, leg.Kind), Start: start, End: end})
		}
	}
	slices.SortStableFunc(list, func(a, b thermal.Named) int { return cmp.Compare(a.Start, b.Start) })
	return list
}

// innermost returns the stretches that hold no other. They come in the order
// in which they begin, those of a stretch after it.
func innermost(names []thermal.Named) []thermal.Named {
	var list []thermal.Named
	for i, n := range names {
		if i+1 == len(names) || names[i+1].Start >= n.End || names[i+1].End > n.End {
			list = append(list, n)
		}
	}
	return list
}
