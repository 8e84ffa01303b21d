package paths

import (
	"fmt"
	"math"

	"bankfire/paths/least"
	"bankfire/paths/study"
)

// OwnBest is the best fit of one profile by itself: the best amount of
// diffusion along the path that fits it best, with everything else free that
// the study leaves free. What it cannot fit no path can be blamed for.
type OwnBest struct {
	Crystal  *study.Crystal
	Element  *study.Element
	Path     *study.Path // along which it was found
	Shift    float64     // the multiplier on D there
	ChiSq    float64
	Degrees  int
	Tail     float64
	Runs     float64 // probability of so few runs of one sign among random residuals
	Scatter  float64 // extra scatter that was added to the errors, in the element's unit
	Outlier  int     // index of a point that stands out, -1 if none
	Findings []string
}

// What stands out in an own best fit.
const (
	farOut       = 4.0  // sigma, beyond which one point in 15,000 lies by chance
	company      = 0.3  // mean of the next two residuals, as a part of a point's own, above which it does not stand alone
	inflatedTail = 0.99 // tail above which errors are larger than the scatter
	fewRuns      = 0.01 // probability of the runs below which residuals are not random
	placeWindow  = 5    // points over which residuals are averaged to find where they are large
	farMean      = 3.0  // standard errors beyond which such a mean is not random
)

// examine says what the own best fit of the problem shows, at the given
// confidence. With no degrees of freedom left it has nothing to say.
func (o *OwnBest) examine(p *least.Problem, at least.Solution, confidence float64) {
	o.ChiSq, o.Tail, o.Runs, o.Outlier = at.ChiSq, Tail(at.ChiSq, o.Degrees), 1, -1
	if p.White != nil {
		o.say("its spots overlap, so the errors of neighbouring points are taken to be correlated; if they are counting errors, write overlap = \"independent\" in the traverse")
	}
	if o.Degrees < 1 {
		return
	}
	s := newScores(p, at)
	o.Runs = runsProbability(s.independent)
	chiSq, degrees := o.ChiSq, o.Degrees // without what is an outlier
	if far, by := s.outlier(chiSq, degrees, confidence); far >= 0 {
		o.Outlier = far
		o.say("%s is an outlier, %.1f sigma from what the other points of this profile say%s", o.row(far), by, o.orRim(far))
		chiSq, degrees = chiSq-by*by, degrees-1
	}
	switch tail := Tail(chiSq, degrees); {
	case tail > inflatedTail:
		o.say("errors inflated: the best fit of this profile scatters less than they say (tail %.3f)", tail)
	case !(tail >= 1-confidence):
		o.fails(s, chiSq, degrees)
	}
	if o.Runs < fewRuns {
		o.say("the residuals of its best fit are not random: they come in runs of one sign (probability %.1g)", o.Runs)
	}
}

// passes reports whether the own best fit passes at the confidence.
func (o *OwnBest) passes(confidence float64) bool { return o.Tail >= 1-confidence }

// fails says that not even the own best fit passes, and what its residuals look
// like.
func (o *OwnBest) fails(s *scores, chiSq float64, degrees int) {
	without := ""
	if o.Outlier >= 0 {
		without = ", without the outlier"
	}
	looks := fmt.Sprintf("the residuals look random, as if the errors were %.1f times what is stated", math.Sqrt(chiSq/float64(max(degrees, 1))))
	if i, mean := s.place(o.Outlier); o.Runs < fewRuns || math.Abs(mean) > farMean*math.Max(1, s.scale()) {
		side := "above"
		if mean < 0 {
			side = "below"
		}
		looks = fmt.Sprintf("the residuals are largest %s, where the data lie %s it", o.where(i), side)
	}
	o.say("errors too small or model wrong for this profile: not even its own best fit passes (chi-square %.0f of %d%s), and %s", chiSq, degrees, without, looks)
}

func (o *OwnBest) say(format string, args ...any) {
	o.Findings = append(o.Findings, fmt.Sprintf(format, args...))
}

// row names a point by where it stands in its file.
func (o *OwnBest) row(i int) string {
	t := o.Element.Traverse
	return fmt.Sprintf("line %d of %s", t.Line[i], t.Name)
}

// orRim says what else may be wrong with point i if the traverse ends there, at
// the rim.
func (o *OwnBest) orRim(i int) string {
	if last := len(o.Element.Traverse.Position) - 1; (i == 0 || i == last) && o.atRim(i) {
		return "; as the last one before the rim, it may also mean that the rim is not as stated"
	}
	return ""
}

// where says whether point i is at the rim or inside.
func (o *OwnBest) where(i int) string {
	where := "inside"
	if o.atRim(i) {
		where = "at the rim"
	}
	return fmt.Sprintf("%s (%.0f um from the centre)", where, o.Element.Traverse.Position[i]*1e6)
}

// atRim reports whether point i is nearer to the rim than to the inner end and
// all zone boundaries.
func (o *OwnBest) atRim(i int) bool {
	at := o.Element.Traverse.Position[i]
	size := o.Crystal.Size()
	toRim, toBoundary := math.Abs(size-at), math.Abs(at-o.Crystal.R0)
	r := o.Crystal.R0
	for _, z := range o.Crystal.Zones[:len(o.Crystal.Zones)-1] {
		r += z.Width
		toBoundary = math.Min(toBoundary, math.Abs(at-r))
	}
	return toRim < toBoundary
}

// knowing says at which ends the profile knows nothing of the amount of
// diffusion: where no diffusion at all, or diffusion without end, fits.
func (o *OwnBest) knowing(c *Curve, confidence float64) {
	fits := func(chiSq float64) bool {
		return Tail(chiSq, o.Degrees+1) >= 1-confidence && chiSq-o.ChiSq <= Critical(0.95, 1)
	}
	still, full := fits(c.Still), fits(c.Full)
	switch {
	case still && full:
		o.say("no information: this profile fits without any diffusion as well as after diffusion without end")
	case still:
		o.say("this profile fits without any diffusion, start edge and spot included: it gives only an upper limit on the amount of diffusion")
	case full:
		o.say("this profile fits after diffusion without end: it gives only a lower limit on the amount of diffusion")
	}
}
