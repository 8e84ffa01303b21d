package paths

import (
	"fmt"
	"math"
	"slices"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// shapeMoved says that the element whose measured shape this one starts with would have
// moved itself, along what the crystal sees of a path: by sqrt(2 G) where it moves
// fastest.
func shapeMoved(c *study.Crystal, e *study.Element, seen *thermal.History) []string {
	s := e.Start.Scaled
	if s == nil {
		return nil
	}
	i := slices.IndexFunc(c.Elements, func(of study.Element) bool { return of.Name == s.Of })
	if i < 0 {
		return nil
	}
	of := &c.Elements[i]
	gone := math.Sqrt2 * math.Exp((of.Law.Law.LnIntegral(seen, 0, seen.Life())+fastest(c, of))/2)
	size, what := s.Width, "the width of its spline"
	if size == 0 {
		size = math.Inf(1)
		for _, z := range c.Zones {
			if z.Width < size {
				size, what = z.Width, "the width of zone "+z.Name
			}
		}
	}
	if !(gone > hostMatters*size) {
		return nil
	}
	return []string{fmt.Sprintf("%s starts with the shape that %s has now, but that would have moved %s: more than a fifth of %s, %s",
		e.Name, of.Name, lengthText(gone), lengthText(size), what)}
}
