package paths

import (
	"fmt"
	"math"
	"strings"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// notes says what about the verdict the reader must know.
func (o *Outcome) notes() []string {
	var notes []string
	if o.Ranges > 1 {
		notes = append(notes, fmt.Sprintf("%d separate amounts of diffusion agree about equally well; the shift factor is that of the best", o.Ranges))
	}
	return notes
}

// notes says what about the profile the reader must know.
func (r *ProfileResult) notes(path *study.Path) []string {
	var notes []string
	if r.NumErr > errorAim {
		notes = append(notes, fmt.Sprintf("the numerical error reaches %.2g sigma at a point, after refining", r.NumErr))
	}
	lo, hi := path.History.Range()
	notes = append(notes, outOfRange(&r.Element.Law, lo, hi)...)
	if row := r.Element.Law.Row; row != nil {
		for _, caution := range row.Cautions() {
			notes = append(notes, row.Key+": "+caution)
		}
	}
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
	if reach := r.reach(); reach > farReach {
		notes = append(notes, fmt.Sprintf("diffusion has reached %.0f %% of the crystal's size; where other faces are as near, one dimension is not enough", 100*reach))
	}
	return notes
}

// farReach is the part of the way to another face beyond which one dimension
// stops being enough.
const farReach = 0.2

// reach returns the distance sqrt(2 G) as a part of the crystal's size.
func (r *ProfileResult) reach() float64 {
	return math.Sqrt(2) * math.Exp(r.LnG/2) / (r.Crystal.Size() - r.Crystal.R0)
}

// outOfRange says how far temperatures between lo and hi, in K, leave the
// law's calibrated range, if by half a degree or more.
func outOfRange(law *study.Law, lo, hi float64) []string {
	if law.TMin == 0 && law.TMax == 0 {
		return nil
	}
	name := law.Key
	if name == "" {
		name = "the law"
	}
	var how []string
	if law.TMin-lo >= 0.5 {
		how = append(how, fmt.Sprintf("%.0f C below", law.TMin-lo))
	}
	if hi-law.TMax >= 0.5 {
		how = append(how, fmt.Sprintf("%.0f C above", hi-law.TMax))
	}
	if len(how) == 0 {
		return nil
	}
	return []string{fmt.Sprintf("%s is used up to %s its calibrated range of %.0f to %.0f C",
		name, strings.Join(how, " and "), law.TMin-thermal.ZeroCelsius, law.TMax-thermal.ZeroCelsius)}
}
