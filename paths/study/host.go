package study

import (
	"fmt"
	"hash/fnv"
	"math"
	"math/rand/v2"
	"slices"
	"strconv"

	"bankfire/paths/traverse"
)

// Host is a measured profile of the composition of a crystal's host, smoothed by
// a spline of a stated width across all zones; see traverse.Smooth.
type Host struct {
	Position []float64 // m from the crystal's centre, ascending, three or more
	Value    []float64 // mole fractions
	Sigma    []float64 // one standard deviation of each; nil if the study states none
	Width    float64   // full width at half maximum of what it is smoothed by, m
	spline   *traverse.Spline
}

// NewHost smooths a profile.
func NewHost(position, value, sigma []float64, width float64) *Host {
	return &Host{position, value, sigma, width, traverse.Smooth(position, value, width)}
}

// At returns the composition of the host at r, m from the crystal's centre. Beyond
// the measured points it is constant.
func (h *Host) At(r float64) float64 { return h.spline.At(r) }

// HostAt returns the composition of the host at r, m from the centre; at a boundary
// that of the zone outside it.
func (c *Crystal) HostAt(r float64) float64 {
	if c.Host != nil {
		return c.Host.At(r)
	}
	outer := c.R0
	for i := range c.Zones {
		if outer += c.Zones[i].Width; r < outer {
			return c.Zones[i].Host
		}
	}
	return c.Zones[len(c.Zones)-1].Host
}

// middle is the distance of the middle of zone i from the centre, m.
func (c *Crystal) middle(i int) float64 {
	r := c.R0
	for _, z := range c.Zones[:i] {
		r += z.Width
	}
	return r + c.Zones[i].Width/2
}

// form is what a start in equilibrium with a melt makes of the plateau of zone i: K in
// the host at r over K in the host for which the plateau is stated. It is nil where
// the host is that one everywhere.
func (c *Crystal) form(e *Element, i int) func(r float64) float64 {
	if e.Start.Melts == nil {
		return nil
	}
	m := e.Start.Melts[i]
	over := func(x float64) float64 { return math.Exp(e.Partition.LnK(x, m.Temp) - e.Partition.LnK(m.Host, m.Temp)) }
	switch x := c.Zones[i].Host; {
	case c.Host != nil:
		return func(r float64) float64 { return over(c.Host.At(r)) }
	case x != m.Host: // drawn anew
		return func(float64) float64 { return over(x) }
	}
	return nil
}

// HostRange returns the least and the largest composition of the host in zone i.
func (c *Crystal) HostRange(i int) (least, most float64) {
	if c.Host == nil {
		return c.Zones[i].Host, c.Zones[i].Host
	}
	inner := c.R0
	for _, z := range c.Zones[:i] {
		inner += z.Width
	}
	return c.Host.spline.Range(inner, inner+c.Zones[i].Width)
}

// HostText is the composition of the host in zone i for people: "0.55", "0.55 +- 0.02",
// "0.35 to 0.55".
func (c *Crystal) HostText(i int) string {
	if c.Host != nil {
		least, most := c.HostRange(i)
		return fmt.Sprintf("%.3g to %.3g", least, most)
	}
	text := strconv.FormatFloat(c.Zones[i].Host, 'g', -1, 64)
	if sigma := c.Zones[i].HostSigma; sigma > 0 {
		text += fmt.Sprintf(" +- %.2g", sigma)
	}
	return text
}

// OnHost reports whether what the element does depends on the host.
func (e *Element) OnHost() bool { return e.Partitions() != nil || e.Law.onAHost() }

// mostRedrawn is how many parts of a spline's error are drawn at most: it is enough
// for a traverse of some 30 widths.
const mostRedrawn = 64

// Redrawn returns crystals that differ in their hosts, each drawn from what was
// measured and its errors; none if no error is stated. They are as many as there are
// independent parts of the host that may be off, see modes. The deviates of the parts
// are made orthogonal over the draws, so that the mean square of what they do is the
// stated variance itself and not an estimate of it. They depend on the crystal alone.
func (c *Crystal) Redrawn() []*Crystal {
	modes, _ := c.modes()
	out := make([]*Crystal, len(modes))
	seed := fnv.New64a()
	seed.Write([]byte(c.Name))
	for k, by := range deviates(rand.New(rand.NewPCG(seed.Sum64(), 0)), len(modes)) {
		drawn := *c
		if c.Host != nil {
			value := slices.Clone(c.Host.Value)
			add(value, modes, by)
			drawn.Host = NewHost(c.Host.Position, value, c.Host.Sigma, c.Host.Width)
		} else {
			value := make([]float64, len(c.Zones))
			add(value, modes, by)
			drawn.Zones = slices.Clone(c.Zones)
			for i, x := range value {
				drawn.Zones[i].Host += x
			}
		}
		out[k] = &drawn
	}
	return out
}

// add adds the modes by so many times each.
func add(dst []float64, modes [][]float64, by []float64) {
	for j, mode := range modes {
		for i, x := range mode {
			dst[i] += by[j] * x
		}
	}
}

// modes are by how much the host's values may be off independently of each other,
// each with a standard deviation of 1: those of one zone, or of the points of a spline,
// of which a part of the variance may be left out; see traverse.Modes.
func (c *Crystal) modes() (modes [][]float64, left float64) {
	switch h := c.Host; {
	case h == nil:
		for i, z := range c.Zones {
			if z.HostSigma > 0 {
				mode := make([]float64, len(c.Zones))
				mode[i] = z.HostSigma
				modes = append(modes, mode)
			}
		}
	case h.Sigma != nil:
		return traverse.Modes(h.Position, h.Sigma, h.Width, mostRedrawn)
	}
	return modes, 0
}

// deviates returns n draws of n standard normal deviates each, made orthogonal to each
// other over the draws, with a mean square of 1.
func deviates(rng *rand.Rand, n int) [][]float64 {
	draws := make([][]float64, n)
	for k := range draws {
		draws[k] = make([]float64, n)
		for j := range draws[k] {
			draws[k][j] = rng.NormFloat64()
		}
	}
	for j := range n { // Gram and Schmidt
		for i := range j {
			along := over(draws, i, j)
			for k := range draws {
				draws[k][j] -= along * draws[k][i]
			}
		}
		size := math.Sqrt(over(draws, j, j))
		for k := range draws {
			draws[k][j] /= size
		}
	}
	return draws
}

// over is the mean over the draws of the product of deviates i and j.
func over(draws [][]float64, i, j int) float64 {
	sum := 0.0
	for k := range draws {
		sum += draws[k][i] * draws[k][j]
	}
	return sum / float64(len(draws))
}
