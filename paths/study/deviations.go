package study

import (
	"fmt"
	"math"
	"slices"
)

// Deviation is a constant that is known with an error and whose deviation does more to
// a profile, or to several in different measure, than one of ln D or E of its law does.
// Those that are equal are one, shared by all elements that rest on it.
type Deviation struct {
	Of   string // the law or partition relation: its key, or "the law of Sr in HF-P3"
	What Constant
}

// Constant says which constant of a law or relation it is.
type Constant int

// The constants, in the order in which they are listed.
const (
	HostSlope  Constant = iota // of ln D against the composition of the host
	OwnSlope                   // of ln D against the element's own value
	PartitionA                 // of R T ln K = A X + B, that in the host At held
	PartitionB
)

func (c Constant) String() string {
	return [...]string{"composition slope", "own composition slope", "A", "B"}[c]
}

// MostDeviation is by how many standard deviations constants may be off that a study
// is checked for.
const MostDeviation = 3.0

// Deviations are those of the constants that the element's profile depends on, in the
// order of its law and its partition relations.
func (c *Crystal) Deviations(e *Element) []Deviation {
	var out []Deviation
	law := &e.Law
	of := law.Key
	if of == "" {
		of = fmt.Sprintf("the law of %s in %s", e.Name, c.Name)
	}
	if law.HostSlopeSigma > 0 && c.Hosted {
		slope := of
		if law.SlopeOf != "" {
			slope = law.SlopeOf
		}
		out = append(out, Deviation{slope, HostSlope})
	}
	if law.OwnSlopeSigma != 0 {
		out = append(out, Deviation{of, OwnSlope})
	}
	for _, p := range e.Partitions() {
		grown, drift := c.fixedBy(e, p.Key)
		if p.SigmaA > 0 && (grown || drift) {
			out = append(out, Deviation{p.Key, PartitionA})
		}
		if p.SigmaB > 0 && grown {
			out = append(out, Deviation{p.Key, PartitionB})
		}
	}
	return out
}

// OnlyMultiplies reports whether a deviation does no more to a profile in the crystal
// than a factor on D.
func (c *Crystal) OnlyMultiplies(d Deviation) bool {
	lo, hi := c.hosts()
	return d.What == HostSlope && lo == hi
}

// fixedBy reports what a partition relation does to the element: whether it says with
// which values zones started or rims are in equilibrium, and whether it makes the
// element drift in a host that is not the same everywhere.
func (c *Crystal) fixedBy(e *Element, key string) (values, drift bool) {
	if e.Partition != nil && e.Partition.Key == key {
		lo, hi := c.hosts()
		values, drift = e.Start.Melts != nil, lo < hi
	}
	for _, rims := range [][]Rim{e.Inner, e.Rims} {
		for i := range rims {
			if f := rims[i].Following; f != nil && f.Partition != nil && f.Partition.Key == key {
				values = true
			}
		}
	}
	return values, drift
}

// hosts are the least and the largest composition of the host.
func (c *Crystal) hosts() (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for i := range c.Zones {
		least, most := c.HostRange(i)
		lo, hi = min(lo, least), max(hi, most)
	}
	return lo, hi
}

// Deviated returns the element with constants off by so many standard deviations z, and
// ln of what that makes of D in the middle between the extremes of its host and of its
// own value: what it does beyond that is not the same everywhere.
func (c *Crystal) Deviated(e *Element, of []Deviation, z []float64) (out *Element, lnD float64) {
	off := *e
	lo, hi := c.hosts()
	least, most := c.values(e)
	for k, d := range of {
		switch d.What {
		case HostSlope:
			by := z[k] * e.Law.HostSlopeSigma
			off.Law.HostSlope += by
			off.Law.Law = scaled(off.Law.Law, -by*e.Law.HeldAbove)
			lnD += by * ((lo+hi)/2 - e.Law.HostAt - e.Law.HeldAbove)
		case OwnSlope:
			by := z[k] * e.Law.OwnSlopeSigma
			off.Law.OwnSlope += by
			lnD += by * ((least+most)/2 - e.Law.OwnAt)
		case PartitionA, PartitionB:
			off.repartition(d, z[k])
		}
	}
	return &off, lnD
}

// repartition moves a constant of a partition relation, and with it what the element
// started with and what its rims follow.
func (e *Element) repartition(d Deviation, z float64) {
	moved := func(p *Partition) *Partition {
		if p == nil || p.Key != d.Of {
			return p
		}
		q := *p
		if d.What == PartitionA {
			q.A += z * p.SigmaA
			q.B -= z * p.SigmaA * p.At
		} else {
			q.B += z * p.SigmaB
		}
		return &q
	}
	before := e.Partition
	e.Partition = moved(before)
	if e.Start.Melts != nil {
		e.Start.Zones = slices.Clone(e.Start.Zones)
		for i, m := range e.Start.Melts {
			times := math.Exp(e.Partition.LnK(m.Host, m.Temp) - before.LnK(m.Host, m.Temp))
			e.Start.Zones[i].Value *= times
			e.Start.Zones[i].Sigma *= times
		}
	}
	for _, rims := range []*[]Rim{&e.Inner, &e.Rims} {
		*rims = slices.Clone(*rims)
		for i := range *rims {
			if f := (*rims)[i].Following; f != nil && f.Partition != nil {
				g := *f
				g.Partition = moved(f.Partition)
				(*rims)[i].Following = &g
			}
		}
	}
}
