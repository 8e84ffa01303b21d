package paths

import (
	"fmt"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// boundaryNotes says, of a crystal that grew along the path, for how long its oldest and
// its youngest boundary existed and which constant temperature would have given each
// its diffusion integral in that time.
func boundaryNotes(c *study.Crystal, e *study.Element, h *thermal.History) []string {
	added, err := c.Added(h)
	if err != nil {
		return nil // barred for it
	}
	var notes []string
	if grown, lost := c.GrownLost(h); grown > 0 || lost > 0 {
		notes = append(notes, fmt.Sprintf("the rim grew by %.4g um and lost %.4g um along the path", grown*1e6, lost*1e6))
	}
	if !c.Staged() {
		return notes
	}
	oldest, youngest := 1, len(added)-1
	notes = append(notes, boundaryNote(c, e, h, added, oldest))
	if added[youngest] > added[oldest] {
		notes = append(notes, boundaryNote(c, e, h, added, youngest))
	}
	return notes
}

// boundaryNote says so of the boundary inside zone i.
func boundaryNote(c *study.Crystal, e *study.Element, h *thermal.History, added []float64, i int) string {
	which := fmt.Sprintf("the boundary of %s and %s", c.Zones[i-1].Name, c.Zones[i].Name)
	begins, err := c.Begins(h)
	if err != nil {
		return which
	}
	seen, err := h.From(max(begins, added[i]))
	if err != nil {
		return which + " formed at the end of the path and saw no diffusion"
	}
	temp := standIn(e.Law.Law, seen, e.Law.Law.LnIntegral(seen, 0, seen.Life()))
	if temp == 0 {
		return fmt.Sprintf("%s existed for %s, in which nothing diffused", which, thermal.DurationText(seen.Life()))
	}
	return fmt.Sprintf("%s existed for %s, in which %.0f C throughout would have diffused as much", which, thermal.DurationText(seen.Life()), temp-thermal.ZeroCelsius)
}

// growthNotes says which zones are not there from the start, for those who look at a
// profile on the way.
func growthNotes(c *study.Crystal, h *thermal.History) []string {
	added, err := c.Added(h)
	if err != nil {
		return nil
	}
	var notes []string
	for i, t := range added {
		if t > 0 {
			notes = append(notes, fmt.Sprintf("%s: %s is added %s after the start of the path; earlier it is shown as it will be", c.Name, c.Zones[i].Name, thermal.DurationText(t)))
		}
	}
	return notes
}
