package diffusion

import (
	"math"
	"slices"

	"bankfire/thermal"
)

// What is in equilibrium with its surroundings at the temperature of the moment has
// often a value exp(a - b/T). Weighted by D its mean is a ratio of two integrals of
// the same form, the one above with other constants, in closed form both.

// mean returns the mean of exp(LnA - E/T) over the piece, weighted by D.
func (p *piece) mean(value Arrhenius) float64 {
	switch {
	case p.leg.Kind == thermal.Hold:
		return value.at(p.leg.T0)
	case p.empty(): // any value near it will do
		return value.at(p.leg.At(p.from))
	}
	return math.Exp(p.law.lnAlong(p.leg, value, p.from, p.to) - p.ln)
}

// at returns exp(LnA - E/T) at a temperature, K.
func (a Arrhenius) at(temp float64) float64 { return math.Exp(a.LnA - a.E/temp) }

// eventsOn returns the times, s, after 0 at which the solution is damped anew along
// a history: the plan's, and those at which the temperature jumps, and with it a rim
// or, in a zoned host, the equilibrium at every boundary. dst is used again.
func (p *Plan) eventsOn(dst []float64, h *thermal.History) []float64 {
	inner, outer := p.problem.Inner, p.problem.Outer
	if p.host == nil && !slices.ContainsFunc(inner, Rim.jumps) && !slices.ContainsFunc(outer, Rim.jumps) {
		return append(dst[:0], p.events...)
	}
	dst = h.Jumps(dst[:0], evenJump)
	dst = slices.DeleteFunc(dst, func(t float64) bool { return p.host == nil && !jumpsAt(inner, t) && !jumpsAt(outer, t) })
	dst = append(dst, p.events...)
	slices.Sort(dst)
	return slices.Compact(dst)
}

// evenJump is the part of the range of 1/T that is no jump of a rim or a host: a
// step may cross it like any other change, since the waves between cells that it makes
// are no larger a part of what the rim does along the path.
const evenJump = 1e-4

// jumps reports whether the rim does so with temperature: its value or what it
// exchanges with does, or how fast it exchanges.
func (r Rim) jumps() bool { return r.Equilibrium != nil && r.Given == nil || r.Kind == Transfer }

// jumpsAt reports whether the rim in force from t on jumps with temperature.
func jumpsAt(rims []Rim, t float64) bool {
	e := endingAt(rims, t)
	return e.open && rims[e.rim].jumps()
}
