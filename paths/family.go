package paths

import (
	"context"
	"fmt"
	"math"
	"slices"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// FamilyResult is a family weighed.
type FamilyResult struct {
	Family   *study.Family
	Methods  []FamilyMethod // one a measured element; none if every member is barred
	Tally    Tally          // of the members that were screened
	Barred   []FamilyBar    // why members are ruled out, the commonest first
	Path     int            // the place of the best member among the paths of the result
	Elements []FamilyElement
	Summary  FamilySummary
	Shown    Shown // for figures
}

// Best is the member with the lowest chi-square; -1 if all that were screened are barred.
func (f *FamilyResult) Best() int64 { return f.Tally.Best }

// Written are the paths that the study writes out, without the members of families.
func (r *Result) Written() []PathResult {
	n := len(r.Paths)
	for i := range r.Families {
		if r.Families[i].Best() >= 0 {
			n--
		}
	}
	return r.Paths[:n]
}

// FamilyElement is a measured element, as the families have it.
type FamilyElement struct {
	Crystal *study.Crystal
	Element *study.Element
}

// FamilyMethod says how the members were run for an element, and why.
type FamilyMethod struct {
	Table  bool
	Why    string
	NumErr float64 // of a table, the largest numerical error that was audited at data points, for any G that members reach, in sigma
}

// The ways to find what chi-square a member has.
const (
	ByChoice Method = iota // by a table where one serves, else in steps
	ByTable                // by a table of chi-square against G
	InSteps                // by running each member
)

// Method is one of them.
type Method int

// engine gives the members of one family their verdicts.
type engine struct {
	*weighing
	family   *study.Family
	keep     Keep
	tables   []*gTable // one an element; nil if its members are run
	methods  []FamilyMethod
	steps    bool      // at least one element is run
	stepping *stepping // how; nil where members are weighed like paths
}

// engine prepares the screening of a family of which first is the first member that is
// not barred, nil if all are.
func (w *weighing) engine(ctx context.Context, f *study.Family, first *study.Path, by Method, keep Keep) (*engine, error) {
	e := &engine{weighing: w, family: f, keep: keep, tables: make([]*gTable, len(w.elements))}
	if first == nil {
		return e, nil
	}
	why := e.linked()
	alone := why == ""
	if by == InSteps {
		why = "that was asked for"
	}
	e.methods = slices.Repeat([]FamilyMethod{{Why: why}}, len(e.elements))
	reached := e.reached(first)
	for n := range e.elements {
		of := &e.elements[n]
		switch open := of.element.Open; {
		case why != "":
		case open != "":
			e.methods[n].Why = open + " is open in the family"
		default:
			t, reason, err := newTable(ctx, of, first, reached[n], w.study.Confidence)
			if err != nil {
				return nil, fmt.Errorf("%s, %s in %s: %w", first.Name, of.element.Name, of.crystal.Name, err)
			}
			if e.tables[n], e.methods[n].Why = t, reason; t != nil {
				e.methods[n].Table, e.methods[n].NumErr = true, t.numErr
			}
		}
		if by == ByTable && e.tables[n] == nil {
			return nil, noTable(f, of, e.methods[n].Why)
		}
	}
	if e.steps = slices.Contains(e.tables, nil); e.steps && alone {
		var err error
		if e.stepping, err = w.newStepping(ctx, f, e.tables, first); err != nil {
			return nil, err
		}
	}
	return e, nil
}

// probed is how many members are drawn, spread over the family, to see how far apart
// their diffusion integrals lie.
const probed = 1024

// reached are about the lowest and highest ln G of members, of each element.
func (e *engine) reached(first *study.Path) [][2]float64 {
	out := make([][2]float64, len(e.elements))
	see := func(n int, path study.Path) {
		if g := e.lnG(n, &path); !math.IsInf(g, 0) {
			out[n] = [2]float64{math.Min(out[n][0], g), math.Max(out[n][1], g)}
		}
	}
	for n := range out {
		out[n] = noRange()
		see(n, *first)
	}
	var c study.Candidate
	for i := int64(0); i < e.family.Count(); i += max(1, e.family.Count()/probed) {
		if e.family.At(&c, i); c.Barred == "" {
			for n := range out {
				see(n, study.Path{History: &c.History, Crystals: c.Crystals})
			}
		}
	}
	return out
}

// lnG is the logarithm of the diffusion integral of element n along a path, m2.
func (w *weighing) lnG(n int, path *study.Path) float64 {
	h := w.seen(n, path)
	return w.elements[n].element.Law.Law.LnIntegral(h, 0, h.Life())
}

// seen is what the crystal of element n sees of a path that is not barred.
func (w *weighing) seen(n int, path *study.Path) *thermal.History {
	if c := path.Crystal(w.elements[n].crystal); c.Exists != nil {
		if h, err := c.Sees(path.History); err == nil {
			return h
		}
	}
	return path.History
}

// noTable says why a table that is asked for cannot be.
func noTable(f *study.Family, of *element, why string) error {
	return &thermal.InputError{Field: "method", Value: "table",
		Problem: fmt.Sprintf("no table holds %s in %s for family %q: %s", of.element.Name, of.crystal.Name, f.Name, why),
		Remedy:  "leave the method out; members are then run in steps where they must be"}
}

// first is the first member of a family that is not barred; nil if all are.
func (w *weighing) first(ctx context.Context, f *study.Family) (*study.Path, error) {
	var c study.Candidate
	for i := range f.Count() {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		f.At(&c, i)
		if w.study.Bar(&c); c.Barred == "" {
			path := c.Path()
			return &path, nil
		}
	}
	return nil, nil
}

// linked says what elements of a crystal decide together on each path, "" if nothing:
// then no table of one by itself holds it.
func (e *engine) linked() string {
	for place, c := range e.crystals {
		if len(c.Choices()) > 1 {
			return "the start is one of several, from which each path takes one"
		}
		open := map[int]int{} // elements by the number of the width
		for _, n := range e.members(place) {
			for k, width := range e.elements[n].element.Start.Widths() {
				if !width.Fixed() {
					open[k]++
				}
			}
		}
		for _, elements := range open {
			if elements > 1 {
				return "the elements of a crystal have the width of their edges in common"
			}
		}
	}
	return ""
}

// How many members are a unit of work: those that are only looked up, and those that
// are run.
const (
	tableChunk = BlockSize
	stepChunk  = 8
)

// chunk is how many members are a unit of work.
func (e *engine) chunk() int64 {
	if e.steps {
		return stepChunk
	}
	return tableChunk
}

// member is one in the course of being screened.
type member struct {
	Row
	values, above []float64
	life          float64
	numErr        float64 // that was audited, in sigma; NaN if it was not
	barred, why   string
}

// desk is what one worker works with, from member to member.
type desk struct {
	candidates [stepChunk]study.Candidate // those of a chunk that are run, else the first
	lnG        []float64
	runs       *runner // of the family in hand, where its members are run
}

// judge gives each of the members its verdict.
func (e *engine) judge(ctx context.Context, d *desk, members []member) error {
	if e.steps {
		return e.run(ctx, d, members)
	}
	c := &d.candidates[0]
	for i := range members {
		if i%mostUnasked == 0 && ctx.Err() != nil {
			return ctx.Err()
		}
		if m := &members[i]; e.draw(c, m) {
			if err := e.look(c, m, d); err != nil {
				return err
			}
		}
	}
	return nil
}

// mostUnasked is how many members are looked up before it is asked again whether to stop.
const mostUnasked = 64

// draw makes c the member and reports whether it is to be judged: it is not if it is barred.
func (e *engine) draw(c *study.Candidate, m *member) bool {
	e.family.At(c, m.Index)
	e.study.Bar(c)
	copy(m.values, c.Values)
	m.numErr, m.barred, m.why = math.NaN(), c.Barred, c.Why
	if c.Barred != "" {
		m.bar()
		return false
	}
	m.life = c.History.Eruption()
	for k := range e.study.Thresholds {
		m.above[k] = c.History.TimeAbove(e.study.Thresholds[k].Temp)
	}
	return true
}

// look judges a member by the tables.
func (e *engine) look(c *study.Candidate, m *member, d *desk) error {
	d.lnG = e.integrals(d.lnG[:0], c)
	lnG := d.lnG
	if len(e.tables) == 1 {
		f := e.tables[0].find(lnG[0], e.study.Confidence)
		e.found(m, &f, c, lnG)
		return nil
	}
	cs := make([]Curve, len(e.tables))
	each := make([]sampler, len(e.tables))
	for n, t := range e.tables {
		cs[n], each[n] = t.on(lnG[n]), t.sampler(lnG[n])
	}
	if err := sharpen(cs, each); err != nil {
		return fmt.Errorf("%q: %w", c.Path().Name, err)
	}
	f := jointly(cs, alone(cs, e.study.Confidence), e.study.Confidence)
	e.found(m, &f, c, lnG)
	return nil
}

// integrals appends ln G of each element along a member to dst.
func (w *weighing) integrals(dst []float64, c *study.Candidate) []float64 {
	path := study.Path{History: &c.History, Crystals: c.Crystals}
	for n := range w.elements {
		dst = append(dst, w.lnG(n, &path))
	}
	return dst
}

// found notes what was found of the member.
func (e *engine) found(m *member, f *Finding, c *study.Candidate, lnG []float64) {
	m.find(f)
	if m.Verdict != Reproduces {
		m.StandIn = m.StandIn[:0]
		return
	}
	m.StandIn = m.StandIn[:len(e.elements)]
	path := study.Path{History: &c.History, Crystals: c.Crystals}
	for n := range e.elements {
		m.StandIn[n] = standIn(e.elements[n].element.Law.Law, e.seen(n, &path), lnG[n])
	}
}
