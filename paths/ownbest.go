package paths

import (
	"fmt"
	"math"
	"slices"

	"bankfire/paths/least"
	"bankfire/paths/study"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
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
	inflatedTail = 0.99 // tail above which errors are larger than the scatter
	fewRuns      = 0.01 // probability of the runs below which residuals are not random
	placeWindow  = 5    // points over which residuals are averaged to find where they are large
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
	o.Runs = runsProbability(independent(p, at))
	passes := o.Tail >= 1-confidence
	far, r := largest(at.Residuals)
	if alone := Tail(at.ChiSq-r*r, o.Degrees-1) >= 1-confidence; math.Abs(r) > farOut && (passes || alone) {
		o.Outlier = far
		o.say("%s is an outlier, %.1f sigma from the best fit of this profile", o.row(far), math.Abs(r))
	}
	switch {
	case o.Tail > inflatedTail && !slices.Contains(p.Limit, true): // limits add less than they count for
		o.say("errors inflated: the best fit of this profile scatters less than they say (tail %.3f)", o.Tail)
	case !passes && o.Outlier < 0:
		o.say("errors too small or model wrong for this profile: not even its own best fit passes (chi-square %.0f of %d), and the residuals are largest %s",
			o.ChiSq, o.Degrees, o.place(at.Residuals))
	}
	if o.Runs < fewRuns {
		o.say("the residuals of its best fit are not random: they come in runs of one sign (probability %.1g)", o.Runs)
	}
}

// independent returns the residuals of the data that are no limits, made
// independent of each other.
func independent(p *least.Problem, at least.Solution) []float64 {
	r := mat.NewVecDense(len(at.Residuals), slices.Clone(at.Residuals))
	if p.White != nil {
		r.MulVec(p.White, mat.NewVecDense(len(at.Residuals), slices.Clone(at.Residuals)))
	}
	var measured []float64
	for i, v := range r.RawVector().Data {
		if p.Limit == nil || !p.Limit[i] {
			measured = append(measured, v)
		}
	}
	return measured
}

func (o *OwnBest) say(format string, args ...any) {
	o.Findings = append(o.Findings, fmt.Sprintf(format, args...))
}

// row names a point by where it stands in its file.
func (o *OwnBest) row(i int) string {
	t := o.Element.Traverse
	return fmt.Sprintf("line %d of %s", t.Line[i], t.Name)
}

// largest returns the residual of largest size.
func largest(residuals []float64) (i int, r float64) {
	for k, v := range residuals {
		if math.Abs(v) > math.Abs(r) {
			i, r = k, v
		}
	}
	return i, r
}

// place says where the residuals, averaged over some points, are largest: near
// the rim or inside, whichever of rim and zone boundaries is nearer.
func (o *OwnBest) place(residuals []float64) string {
	t := o.Element.Traverse
	worst, at := 0.0, 0.0
	for i := range residuals {
		a, b := max(0, i-placeWindow/2), min(len(residuals), i+placeWindow/2+1)
		sum := 0.0
		for _, r := range residuals[a:b] {
			sum += r
		}
		if mean := math.Abs(sum) / math.Sqrt(float64(b-a)); mean > worst {
			worst, at = mean, t.Position[i]
		}
	}
	size := o.Crystal.Size()
	toRim, toBoundary := math.Abs(size-at), math.Abs(at-o.Crystal.R0)
	r := o.Crystal.R0
	for _, z := range o.Crystal.Zones[:len(o.Crystal.Zones)-1] {
		r += z.Width
		toBoundary = math.Min(toBoundary, math.Abs(at-r))
	}
	where := "inside"
	if toRim < toBoundary {
		where = "at the rim"
	}
	return fmt.Sprintf("%s (%.0f um from the centre)", where, at*1e6)
}

// runsProbability returns the probability that as few runs of one sign as
// these, or fewer, come from random residuals (Wald and Wolfowitz 1940, Ann.
// Math. Stat. 11, 147-162, in its normal approximation with a continuity
// correction). It is 1 where there are too few of either sign to tell.
func runsProbability(residuals []float64) float64 {
	up, down, runs := 0.0, 0.0, 0.0
	last := 0.0
	for _, r := range residuals {
		sign := math.Copysign(1, r)
		if sign > 0 {
			up++
		} else {
			down++
		}
		if sign != last {
			runs++
		}
		last = sign
	}
	if up < fewSigns || down < fewSigns {
		return 1
	}
	n := up + down
	mean := 2*up*down/n + 1
	variance := (mean - 1) * (mean - 2) / (n - 1)
	return distuv.UnitNormal.CDF((runs + 0.5 - mean) / math.Sqrt(variance))
}

// fewSigns is how many residuals of each sign the normal approximation needs.
const fewSigns = 8

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
