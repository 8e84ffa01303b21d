package diffusion

import (
	"fmt"
	"math"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// Arrhenius is one term of a diffusivity,
//
//	D(T) = exp(LnA - E/T),
//
// with LnA the natural logarithm of a diffusivity in m2/s and E the activation
// energy divided by the gas constant, in K.
type Arrhenius struct{ LnA, E float64 }

// Law is the diffusivity of an element as a function of temperature, the sum
// of its terms. Everything that is not temperature (pressure, direction, the
// state of a buffer) has been put into the constants before.
type Law struct{ Terms []Arrhenius }

// NewLaw returns the law D = d0 exp(-energy/(R T)), d0 in m2/s and energy in
// J/mol. A d0 of zero is a crystal in which nothing moves.
func NewLaw(d0, energy float64) Law {
	return Law{Terms: []Arrhenius{{LnA: math.Log(d0), E: energy / thermal.GasConstant}}}
}

// check reports a term that is no diffusivity. An LnA of -Inf is one: nothing
// moves.
func (l Law) check() error {
	for i, a := range l.Terms {
		if math.IsNaN(a.LnA) || math.IsInf(a.LnA, 1) || !finite(a.E) {
			return fmt.Errorf("diffusion: term %d of the law has ln A %g and E/R %g K", i, a.LnA, a.E)
		}
	}
	return nil
}

// LnD returns ln D, D in m2/s, at temp in K.
func (l Law) LnD(temp float64) float64 {
	sum := math.Inf(-1)
	for _, a := range l.Terms {
		sum = numeric.LnAdd(sum, a.LnA-a.E/temp)
	}
	return sum
}

// LnIntegral returns the logarithm of the diffusion integral
//
//	G = integral of D(T(t)) dt from t0 to t1,  m2,
//
// along the history, t0 and t1 in s. It is -Inf where nothing diffuses.
func (l Law) LnIntegral(h *thermal.History, t0, t1 float64) float64 {
	sum := math.Inf(-1)
	for _, a := range l.Terms {
		if !math.IsInf(a.LnA, -1) {
			sum = numeric.LnAdd(sum, a.LnA+h.LnArrhenius(a.E, 0, t0, t1))
		}
	}
	return sum
}

// LnIntegralAbove returns the logarithm of the part of the diffusion integral G
// that the history does while it is hotter than temp, in K, from its start to
// its end. It is -Inf where it never is, or where nothing diffuses.
func (l Law) LnIntegralAbove(h *thermal.History, temp float64) float64 {
	sum := math.Inf(-1)
	for _, a := range l.Terms {
		if !math.IsInf(a.LnA, -1) {
			sum = numeric.LnAdd(sum, a.LnA+h.LnArrheniusAbove(a.E, 0, temp))
		}
	}
	return sum
}
