package study

import (
	"errors"
	"fmt"
	"slices"
	"sort"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// Problem returns the element in the crystal as the solver wants it, on one
// path. What the traverse has to decide is solved along: every free plateau or
// rim value, and every one with a standard deviation, is a column of
// Problem.Free, described by the FreeValue of the same index. The problem itself
// has a free value at 0 and one with a prior at the middle of its prior, so that
// the profile is
//
//	profile = answer + sum of (value - base) x column,  base 0 or Prior.Value.
//
// Edges have their middle widths: where a width is not Fixed, set Edge of the zones
// that have it, the last left out, to the one wanted.
//
// An element whose law depends on the element itself has no free values, and
// Problem.Own.
//
// Moments of rims are resolved on the path, of which the problem is what the
// crystal sees: its times count from where Sees begins. The error is a
// *thermal.InputError at the rim whose moment the path does not have, or whose file
// does not cover the time it is in force, or that of Begins.
func (c *Crystal) Problem(e *Element, h *thermal.History) (*diffusion.Problem, []FreeValue, error) {
	b := builder{c: c, e: e, h: h}
	out := &diffusion.Problem{Shape: c.Shape, R0: c.R0, Zones: b.zones(), Law: e.Law.Law, Spread: c.Spread(e), Own: e.Law.own()}
	if c.Host != nil {
		out.Host = c.Host.At
	}
	if e.Partition != nil {
		out.LnK = e.Partition.LnK
	}
	begins, err := c.Begins(h)
	if err != nil {
		return nil, nil, err
	}
	added, err := c.Added(h)
	if err != nil {
		return nil, nil, err
	}
	for i, t := range added {
		out.Zones[i].Added = max(0, t-begins)
	}
	if out.Moves, err = c.Moved(h); err != nil {
		return nil, nil, err
	}
	for i := range out.Moves {
		out.Moves[i].From -= begins
		out.Moves[i].Until -= begins
	}
	if out.Inner, out.Outer, err = b.rims(); err != nil {
		return nil, nil, err
	}
	countFrom(begins, out.Inner)
	countFrom(begins, out.Outer)
	b.zoneValues()
	b.rimValues("inner rim", e.Inner, b.inner, func(basis *diffusion.Basis) []float64 { return basis.Inner })
	b.rimValues("rim", e.Rims, b.outer, func(basis *diffusion.Basis) []float64 { return basis.Outer })
	out.Free = b.basis
	if s := e.Start.Scaled; s != nil && s.Width > 0 {
		out.Profile = s.between(s.Lowest.base(), s.Highest.base())
	}
	return out, b.free, nil
}

// countFrom makes the times of rims count from begins, s. What came before is then
// at negative times.
func countFrom(begins float64, rims []diffusion.Rim) {
	if begins == 0 {
		return
	}
	for i := range rims {
		rims[i].From -= begins
		if g := rims[i].Given; g != nil {
			rims[i].Given = &diffusion.Given{
				At:     func(t float64) float64 { return g.At(begins + t) },
				Breaks: minus(begins, g.Breaks), Jumps: minus(begins, g.Jumps),
			}
		}
	}
}

func minus(t float64, times []float64) []float64 {
	out := make([]float64, len(times))
	for i := range times {
		out[i] = times[i] - t
	}
	return out
}

// holds reports, as Problem does, the rim that cannot be placed on the path.
func (c *Crystal) holds(e *Element, h *thermal.History) error {
	b := builder{c: c, e: e, h: h}
	_, _, err := b.rims()
	return err
}

// builder collects the columns of a problem.
type builder struct {
	c     *Crystal
	e     *Element
	h     *thermal.History
	inner []inStage // the rims of the problem
	outer []inStage
	basis []diffusion.Basis
	free  []FreeValue
}

func (b *builder) zones() []diffusion.Zone {
	zones := make([]diffusion.Zone, len(b.c.Zones))
	r := b.c.R0
	for i, z := range b.c.Zones {
		r += z.Width
		zones[i] = diffusion.Zone{Outer: r, Start: b.e.Start.base(i), Times: b.c.Factor(b.e, i), Host: z.Host, Form: b.c.form(b.e, i)}
		if i < len(zones)-1 {
			widths := b.e.Start.Widths()
			zones[i].Edge = widths[min(i, len(widths)-1)].Middle()
		}
	}
	return zones
}

// base is the value that a problem is set up with.
func (p Plateau) base() float64 {
	if p.Free {
		return 0
	}
	return p.Value
}

// base is the plateau of zone i that a problem is set up with.
func (s *Start) base(i int) float64 {
	if s.Scaled == nil {
		return s.Zones[i].base()
	}
	return s.Scaled.plateau(i, s.Scaled.Lowest.base(), s.Scaled.Highest.base())
}

// open reports whether the traverse has a say in the value.
func (p Plateau) open() bool { return p.Free || p.Sigma > 0 }

// column adds a column of zeros for an open value and returns it.
func (b *builder) column(name string, p Plateau) *diffusion.Basis {
	b.basis = append(b.basis, diffusion.Basis{
		Start: make([]float64, len(b.c.Zones)),
		Inner: make([]float64, len(b.inner)),
		Outer: make([]float64, len(b.outer)),
	})
	f := FreeValue{Name: name, HasPrior: !p.Free}
	if f.HasPrior {
		f.Prior = thermal.Uncertain{Value: p.Value, Sigma: p.Sigma}
	}
	b.free = append(b.free, f)
	return &b.basis[len(b.basis)-1]
}

// zoneValues adds a column for every open plateau: the start of its zone and
// the rims held at it.
func (b *builder) zoneValues() {
	if b.e.Start.Scaled != nil {
		b.scaledValues()
		return
	}
	for i, p := range b.e.Start.Zones {
		if !p.open() {
			continue
		}
		col := b.column(b.c.Zones[i].Name, p)
		col.Start[i] = 1
		tie := func(zone int, r float64) float64 {
			if zone != i {
				return 0
			}
			return b.tie(i, r)
		}
		b.markTied(col, tie)
	}
}

// scaledValues adds a column for each end of a scaled start that is open: what of its
// shape goes with it, and the rims held at a zone of it.
func (b *builder) scaledValues() {
	s := b.e.Start.Scaled
	for k, p := range s.ends() {
		if !p.open() {
			continue
		}
		lowest, highest := float64(1-k), float64(k)
		col := b.column(s.endName(k), p)
		for i := range col.Start {
			col.Start[i] = s.plateau(i, lowest, highest)
		}
		if s.Width > 0 {
			col.Profile = s.between(lowest, highest)
		}
		b.markTied(col, func(zone int, r float64) float64 { return b.c.scaledAt(s, zone, r, lowest, highest) })
	}
}

// markTied puts into the column what rims that are held at a zone have of its value,
// tie by the zone and where the rim is.
func (b *builder) markTied(col *diffusion.Basis, tie func(zone int, r float64) float64) {
	mark := func(dst []float64, list []Rim, held []inStage) {
		for k, at := range held {
			if r := &list[at.rim]; r.Kind == diffusion.Held && r.Zone >= 0 {
				dst[k] = tie(r.Zone, at.r)
			}
		}
	}
	mark(col.Inner, b.e.Inner, b.inner)
	mark(col.Outer, b.e.Rims, b.outer)
}

// rimValues adds a column for every open value at which a rim is held or with which
// it exchanges.
func (b *builder) rimValues(name string, rims []Rim, held []inStage, end func(*diffusion.Basis) []float64) {
	for len(rims) > 0 && rims[0].Assumed { // has no value of its own, and the user no number for it
		rims = rims[1:]
		held = slices.Clone(held)
		for k := range held {
			held[k].rim--
		}
	}
	for i, r := range rims {
		if !r.valued() || !r.Value.open() {
			continue
		}
		full := name
		if len(rims) > 1 {
			full = fmt.Sprintf("%s %d", name, i+1)
		}
		column := end(b.column(full, r.Value))
		for k, at := range held {
			if at.rim == i {
				column[k] = 1
			}
		}
	}
}

// rims resolves the moments of both ends on the path.
func (b *builder) rims() (inner, outer []diffusion.Rim, err error) {
	stages, err := b.c.stages(b.h)
	if err != nil {
		return nil, nil, err
	}
	if b.inner, err = b.inStages(b.e.Inner, []outermost{{r: b.c.R0}}); err != nil {
		return nil, nil, err
	}
	if b.outer, err = b.inStages(b.e.Rims, stages); err != nil {
		return nil, nil, err
	}
	if inner, err = b.rimsOf(b.e.Inner, b.inner); err != nil {
		return nil, nil, err
	}
	outer, err = b.rimsOf(b.e.Rims, b.outer)
	return inner, outer, err
}

// from is the time, s, from which a rim is in force on a path.
func (r *Rim) from(h *thermal.History) (float64, error) {
	if r.From == nil {
		return 0, nil
	}
	t, err := h.Moment(*r.From)
	var in *thermal.InputError
	if errors.As(err, &in) {
		return 0, in.At(r.Place)
	}
	return t, err
}

// value is what a rim at r is held at, or exchanges with, in the problem.
func (b *builder) value(rim *Rim, r float64) float64 {
	if s := b.e.Start.Scaled; s != nil && rim.Zone >= 0 {
		return b.c.scaledAt(s, rim.Zone, r, s.Lowest.base(), s.Highest.base())
	}
	if rim.Zone >= 0 {
		return b.e.Start.Zones[rim.Zone].base() * b.tie(rim.Zone, r)
	}
	return rim.Value.base()
}

// tie is what a rim at r that is tied to a zone has of its plateau.
func (b *builder) tie(zone int, r float64) float64 {
	if form := b.c.form(b.e, zone); form != nil {
		return form(r)
	}
	return 1
}

// given turns a series into a function of the time since the start of the
// path. It must cover the span from one time to another.
func (b *builder) given(s *Series, from, until float64) (*diffusion.Given, error) {
	t := make([]float64, len(s.Time))
	for i := range t {
		t[i] = s.Time[i]
		if s.BeforeEruption {
			t[i] += b.h.Eruption()
		}
	}
	if slack := 1e-9 * until; from < until && (t[0] > from+slack || t[len(t)-1] < until-slack) {
		return nil, s.Place.Error("", fmt.Sprintf("holds times from %s to %s only, but the path needs %s to %s",
			years(t[0]), years(t[len(t)-1]), years(from), years(until)), "add rows at both ends")
	}
	g := &diffusion.Given{At: func(x float64) float64 { return interpolate(t, s.Value, x) }}
	for i := 0; i < len(t); {
		j := i + 1
		for j < len(t) && t[j] == t[i] {
			j++
		}
		if j > i+1 {
			g.Jumps = append(g.Jumps, t[i])
		} else {
			g.Breaks = append(g.Breaks, t[i])
		}
		i = j
	}
	return g, nil
}

// interpolate returns the value at x, linear between the rows and constant
// beyond them.
func interpolate(t, v []float64, x float64) float64 {
	i := sort.SearchFloat64s(t, x) // the first row not before x
	switch {
	case i == 0:
		return v[0]
	case i == len(t):
		return v[len(v)-1]
	}
	w := (x - t[i-1]) / (t[i] - t[i-1])
	return float64((1-w)*v[i-1]) + float64(w*v[i])
}

func years(t float64) string { return fmt.Sprintf("%.6g yr", t/thermal.Year) }
