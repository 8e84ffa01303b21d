package diffusion

import (
	"math"

	"bankfire/thermal"
)

// A rim of mass transfer lets in
//
//	k (C_eq - C_surface),  k = exp(LnA - E/T) in m/s,
//
// per unit of area, on the total flux. Over one solve that is a conductance
// r^n K times the integral of k dt, in series with the half cell's: D and its
// multiplier scale the latter alone.

// exchange returns the integrals of k dt over the steps, m, and over those of
// the rough schedule.
func (p *Plan) exchange(h *thermal.History, k Arrhenius, times []float64) means {
	fine := make([]float64, len(p.steps))
	for i := range fine {
		if times[i+1] > times[i] {
			fine[i] = math.Exp(k.LnA + h.LnArrhenius(k.E, 0, times[i], times[i+1]))
		}
	}
	return means{fine, p.steps.mergedSums(fine)}
}

// through returns the conductance of a half cell, cond in a solve of length s,
// in series with the exchange of a rim over the same solve; without exchange the
// half cell's alone. area is r^n, and K times it if the problem is coupled.
func (e *ending) through(cond, s, area float64, st step, k int, rough bool) float64 {
	inside := float64(s * cond)
	if e.exchange.fine == nil {
		return inside
	}
	outside := area * e.exchange.of(rough)[k]
	if !st.euler {
		outside /= 2
	}
	if !(inside > 0 && outside > 0) {
		return 0
	}
	return 1 / (1/inside + 1/outside)
}

// area returns r^n.
func (s Shape) area(r float64) float64 { return math.Pow(r, float64(s)) }
