package paths

import (
	"fmt"
	"math"

	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// hostMatters is the part of the finest feature of a host by which it may have
// moved without a word: a feature is then a fiftieth wider, as squares add up.
const hostMatters = 0.2

// hostMoved says that the host of the crystal, which is taken to stay as it is,
// would have moved along what it sees of a path by its own law: by sqrt(2 G) where it moves
// fastest. It changes no verdict.
func hostMoved(c *study.Crystal, h *thermal.History) []string {
	if c.HostLaw == nil {
		return nil
	}
	host := &study.Element{Name: "the host", Law: *c.HostLaw}
	gone := math.Sqrt2 * math.Exp((host.Law.Law.LnIntegral(h, 0, h.Life())+fastest(c, host))/2)
	size, what := finestOfHost(c)
	if !(gone > hostMatters*size) {
		return nil
	}
	notes := []string{fmt.Sprintf("the host of %s, taken to stay as it is, would have moved %s by its own law %s: more than a fifth of %s, %s",
		c.Name, lengthText(gone), host.Law.Key, lengthText(size), what)}
	notes = append(notes, outOfRange(host, h)...)
	for _, caution := range host.Law.CautionsOn(h) {
		notes = append(notes, host.Law.Key+": "+caution)
	}
	return notes
}

// finestOfHost returns the least of the lengths over which the host changes or
// could be seen to, m, and which it is.
func finestOfHost(c *study.Crystal) (size float64, what string) {
	size = math.Inf(1)
	see := func(x float64, name string) {
		if x > 0 && x < size {
			size, what = x, name
		}
	}
	for _, z := range c.Zones {
		see(z.Width, "the width of zone "+z.Name)
	}
	if c.Host != nil {
		see(c.Host.Width, "the width of its spline")
	}
	for i := range c.Elements {
		e := &c.Elements[i]
		if !e.OnHost() {
			continue
		}
		for _, width := range middleWidths(&e.Start) {
			see(width, "the edge of "+e.Name)
		}
		if t := e.Traverse; t != nil && t.Spot.Kind != traverse.Point {
			see(fullWidth(t.Spot), "the spot of "+e.Name)
		}
	}
	return size, what
}
