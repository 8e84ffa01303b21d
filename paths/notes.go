package paths

import (
	"fmt"
	"math"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// Notes says what about the finding the reader must know.
func (f *Finding) Notes() []string {
	var notes []string
	if f.Verdict == Unjudged {
		notes = append(notes, "no degrees of freedom are left: as many values are fitted as there are points that say anything")
	}
	if f.Ranges > 1 {
		notes = append(notes, fmt.Sprintf("%d separate amounts of diffusion agree about equally well; the shift factor is that of the best", f.Ranges))
	}
	return notes
}

// notes says what about the profile the reader must know.
func (r *ProfileResult) notes(path *study.Path) []string {
	var notes []string
	if r.NumErr > errorAim {
		notes = append(notes, fmt.Sprintf("the numerical error reaches %.2g sigma at a point, after refining", r.NumErr))
	}
	if r.BelowZero > 0 {
		notes = append(notes, fmt.Sprintf("a concentration comes out %.2g %s below zero, after refining: do not trust this path", r.BelowZero, r.Element.Unit))
	}
	if !r.Settled {
		notes = append(notes, "the fit of edge, tilt and origin did not settle: chi-square may be a little lower than stated")
	}
	notes = append(notes, lawNotes(r.Crystal, r.Element, path.History)...)
	notes = append(notes, boundaryNotes(r.Crystal, r.Element, path.History)...)
	for _, f := range r.Free {
		switch {
		case math.IsInf(f.Sigma, 1):
			notes = append(notes, fmt.Sprintf("the data do not see %s apart from the other free values", f.Name))
		case f.AtEnd && f.Unit == r.Element.Unit:
			notes = append(notes, fmt.Sprintf("the fit would have %s below zero, where it is held: check zone widths, origin and background", f.Name))
		case f.AtEnd:
			notes = append(notes, fmt.Sprintf("%s is at the end of its range", f.Name))
		}
	}
	return append(notes, reachNotes(r.Crystal, r.LnG+fastest(r.Crystal, r.Element))...)
}

// lawNotes says what about the law and the partition relation, used along what the
// crystal sees of a path, the reader must know.
func lawNotes(c *study.Crystal, e *study.Element, h *thermal.History) []string {
	seen, err := c.Sees(h)
	if err != nil {
		return nil // barred for it
	}
	notes := outOfRange(e, seen)
	for _, caution := range e.Law.CautionsOn(seen) {
		notes = append(notes, lawName(e)+": "+caution)
	}
	for _, p := range e.Partitions() {
		for _, caution := range p.Cautions() {
			notes = append(notes, "partition "+p.Key+": "+caution)
		}
	}
	for _, s := range e.Solubilities() {
		for _, caution := range s.Row.Cautions() {
			notes = append(notes, "solubility "+s.Row.Key+": "+caution)
		}
	}
	notes = append(notes, c.Beyond(e, h)...)
	return append(notes, shapeMoved(c, e, seen)...)
}

// farReach is the part of the way to another face beyond which one dimension
// stops being enough.
const farReach = 0.2

// fastest is ln of the factor by which D exceeds the element's law in the zone
// where it is largest.
func fastest(c *study.Crystal, e *study.Element) float64 {
	_, most := c.Factors(e)
	return math.Log(most)
}

// reachNotes says that diffusion, with the integral exp(lnG) in m2, has gone far
// enough for faces that are not in the model to matter. A ball has none.
func reachNotes(c *study.Crystal, lnG float64) []string {
	var other string
	switch c.Shape {
	case diffusion.Slab:
		other = "another face of the crystal"
	case diffusion.Cylinder:
		other = "an end of the cylinder"
	default:
		return nil
	}
	gone, size := math.Sqrt2*math.Exp(lnG/2), c.Size()-c.R0
	if !(gone > farReach*size) {
		return nil
	}
	return []string{fmt.Sprintf("diffusion has gone %s, %.0f %% of the %s that are modelled; if %s is nearer to the traverse than %s, one dimension is not enough",
		lengthText(gone), 100*gone/size, lengthText(size), other, lengthText(gone/farReach))}
}

// lengthText prints a length, m, in micrometres or millimetres.
func lengthText(x float64) string {
	switch um := x * 1e6; {
	case um < 10:
		return fmt.Sprintf("%.1f um", um)
	case um < 1e3:
		return fmt.Sprintf("%.0f um", um)
	case um < 1e4:
		return fmt.Sprintf("%.1f mm", um/1e3)
	default:
		return fmt.Sprintf("%.0f mm", um/1e3)
	}
}
