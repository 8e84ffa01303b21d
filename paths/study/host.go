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

// HostText is the composition of the host in zone i for people: "0.55", "0.35 to 0.55".
func (c *Crystal) HostText(i int) string {
	least, most := c.HostRange(i)
	if c.Host == nil {
		return strconv.FormatFloat(least, 'g', -1, 64)
	}
	return fmt.Sprintf("%.3g to %.3g", least, most)
}

// OnHost reports whether what the element does depends on the host.
func (e *Element) OnHost() bool { return e.Partitions() != nil || e.Law.HostSlope != 0 }

// Redrawn returns n crystals that differ in their hosts, each drawn from what was
// measured and its errors: every point of a smoothed profile, the value of every
// zone of one in steps. It is nil where no error is stated. The draws depend on the
// crystal and n alone. Where there are no more than n values with errors, the draws
// are made orthogonal, so that their mean square is the stated variance itself and
// not an estimate of it.
func (c *Crystal) Redrawn(n int) []*Crystal {
	if !c.hostUncertain() {
		return nil
	}
	seed := fnv.New64a()
	seed.Write([]byte(c.Name))
	rng := rand.New(rand.NewPCG(seed.Sum64(), uint64(n)))
	values := len(c.Zones)
	if c.Host != nil {
		values = len(c.Host.Value)
	}
	out := make([]*Crystal, n)
	for k, noise := range deviates(rng, n, values) {
		drawn := *c
		if c.Host != nil {
			drawn.Host = c.Host.moved(noise)
		} else {
			drawn.Zones = slices.Clone(c.Zones)
			for i := range drawn.Zones {
				drawn.Zones[i].Host += drawn.Zones[i].HostSigma * noise[i]
			}
		}
		out[k] = &drawn
	}
	return out
}

func (c *Crystal) hostUncertain() bool {
	if c.Host != nil {
		return c.Host.Sigma != nil
	}
	return slices.ContainsFunc(c.Zones, func(z Zone) bool { return z.HostSigma > 0 })
}

// moved returns the profile with every point moved by so many standard deviations.
func (h *Host) moved(by []float64) *Host {
	value := slices.Clone(h.Value)
	for i := range value {
		value[i] += h.Sigma[i] * by[i]
	}
	return NewHost(h.Position, value, h.Sigma, h.Width)
}

// deviates returns n draws of so many standard normal deviates. If these are no more
// than n, they are then made orthogonal to each other over the draws, with a mean
// square of 1.
func deviates(rng *rand.Rand, n, values int) [][]float64 {
	draws := make([][]float64, n)
	for k := range draws {
		draws[k] = make([]float64, values)
	}
	for j := range values {
		for k := range draws {
			draws[k][j] = rng.NormFloat64()
		}
		if values > n {
			continue
		}
		square := 0.0
		for i := range j + 1 { // Gram and Schmidt; the last round is the length
			square = 0
			for k := range draws {
				square += draws[k][i] * draws[k][j]
			}
			if i < j {
				for k := range draws {
					draws[k][j] -= square / float64(n) * draws[k][i]
				}
			}
		}
		for k := range draws {
			draws[k][j] *= math.Sqrt(float64(n) / square)
		}
	}
	return draws
}
