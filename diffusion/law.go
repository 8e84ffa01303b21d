package diffusion

import (
	"fmt"
	"math"
	"slices"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// Arrhenius is one term of a diffusivity,
//
//	D(T) = exp(LnA - E/T),
//
// with LnA the natural logarithm of a diffusivity in m2/s and E the activation
// energy divided by the gas constant, in K; or what else goes with temperature
// like this, with LnA in the logarithm of its own unit.
type Arrhenius struct{ LnA, E float64 }

// Law is the diffusivity of an element as a function of temperature, the sum
// of its terms. Everything that is not temperature (pressure, direction, the
// state of a buffer) has been put into the constants before: where it changes
// from leg to leg, or the law from one temperature to the next, each term has a
// window in which it acts.
type Law struct {
	Terms []Arrhenius
	Where []thermal.Window // of each term; nil is that all act always
}

// NewLaw returns the law D = d0 exp(-energy/(R T)), d0 in m2/s and energy in
// J/mol. A d0 of zero is a crystal in which nothing moves.
func NewLaw(d0, energy float64) Law {
	return Law{Terms: []Arrhenius{{LnA: math.Log(d0), E: energy / thermal.GasConstant}}}
}

// check reports a term that is no diffusivity. An LnA of -Inf is one: nothing
// moves.
func (l Law) check() error {
	for i, a := range l.Terms {
		if err := a.check(); err != nil {
			return fmt.Errorf("diffusion: term %d of the law has %w", i, err)
		}
	}
	if l.Where != nil && len(l.Where) != len(l.Terms) {
		return fmt.Errorf("diffusion: %d windows for %d terms of the law", len(l.Where), len(l.Terms))
	}
	for i, w := range l.Where {
		if !finite(w.Above) || !finite(w.Below) || w.Below != 0 && !(w.Above < w.Below) {
			return fmt.Errorf("diffusion: term %d of the law acts above %g and up to %g K", i, w.Above, w.Below)
		}
	}
	return nil
}

// check reports constants that make no number. An LnA of -Inf does: 0.
func (a Arrhenius) check() error {
	if math.IsNaN(a.LnA) || math.IsInf(a.LnA, 1) || !finite(a.E) {
		return fmt.Errorf("ln A %g and E/R %g K", a.LnA, a.E)
	}
	return nil
}

// LnD returns ln D, D in m2/s, at temp in K. It panics if D depends on the
// setting, see In.
func (l Law) LnD(temp float64) float64 {
	sum := math.Inf(-1)
	for i, a := range l.Terms {
		if l.Where != nil {
			if l.Where[i].Setting != 0 {
				panic("diffusion: D of a law that depends on the setting")
			}
			if !l.Where[i].Holds(0, temp) {
				continue
			}
		}
		sum = numeric.LnAdd(sum, a.LnA-a.E/temp)
	}
	return sum
}

// In returns the law in legs of one setting: without the terms that do not act
// there.
func (l Law) In(setting int) Law {
	return l.only(func(w thermal.Window) (thermal.Window, bool) {
		in := w.Setting == 0 || w.Setting == setting
		w.Setting = 0
		return w, in
	})
}

// only returns the law with the windows that choose returns, without the terms
// whose window it refuses.
func (l Law) only(choose func(w thermal.Window) (thermal.Window, bool)) Law {
	if l.Where == nil {
		return l
	}
	var out Law
	for i, w := range l.Where {
		if w, ok := choose(w); ok {
			out.Terms, out.Where = append(out.Terms, l.Terms[i]), append(out.Where, w)
		}
	}
	if !slices.ContainsFunc(out.Where, func(w thermal.Window) bool { return w != thermal.Window{} }) {
		out.Where = nil
	}
	return out
}

// over returns the law between two times between which it does not change, see
// breaks: the terms that act there, at any temperature.
func (l Law) over(h *thermal.History, t0, t1 float64) Law {
	if l.Where == nil {
		return l
	}
	middle := t0 + (t1-t0)/2
	temp, _ := h.At(middle)
	return l.acting(h.Setting(middle), temp)
}

// acting returns the terms that act in legs of one setting at a temperature, K, as
// a law for any.
func (l Law) acting(setting int, temp float64) Law {
	return l.only(func(w thermal.Window) (thermal.Window, bool) {
		return thermal.Window{}, w.Holds(setting, temp)
	})
}

// breaks returns the times, s, at which D along the history or its slope may
// break: those of the history and those at which a term begins or ceases to act,
// ascending and each once.
func (l Law) breaks(h *thermal.History) []float64 {
	times := h.Breaks(nil)
	if l.Where == nil {
		return times
	}
	var bounds []float64
	for _, w := range l.Where {
		bounds = append(bounds, w.Above, w.Below)
	}
	slices.Sort(bounds)
	for _, temp := range slices.Compact(bounds) {
		times = h.Passes(times, temp)
	}
	slices.Sort(times)
	return slices.Compact(times)
}

// integrals is what has integrals of T^-k exp(-E/T) dt: a leg or a history.
type integrals interface {
	LnArrhenius(e float64, k int, t0, t1 float64) float64
}

// lnAlong returns the logarithm of
//
//	integral of D exp(by.LnA - by.E/T) dt
//
// from t0 to t1, s, of a law without windows: such a factor only shifts the
// constants of each term.
func (l Law) lnAlong(path integrals, by Arrhenius, t0, t1 float64) float64 {
	sum := math.Inf(-1)
	for _, a := range l.Terms {
		if lnA := a.LnA + by.LnA; !math.IsInf(lnA, -1) {
			sum = numeric.LnAdd(sum, lnA+path.LnArrhenius(a.E+by.E, 0, t0, t1))
		}
	}
	return sum
}

// LnIntegral returns the logarithm of the diffusion integral
//
//	G = integral of D(T(t)) dt from t0 to t1,  m2,
//
// along the history, t0 and t1 in s. It is -Inf where nothing diffuses.
func (l Law) LnIntegral(h *thermal.History, t0, t1 float64) float64 {
	if l.Where == nil {
		return l.lnAlong(h, Arrhenius{}, t0, t1)
	}
	sum := math.Inf(-1)
	for i, a := range l.Terms {
		if !math.IsInf(a.LnA, -1) {
			sum = numeric.LnAdd(sum, a.LnA+h.LnArrheniusIn(a.E, 0, l.Where[i], t0, t1))
		}
	}
	return sum
}

// LnIntegralAbove returns the logarithm of the part of the diffusion integral G
// that the history does while it is hotter than temp, in K, from its start to
// its end. It is -Inf where it never is, or where nothing diffuses.
func (l Law) LnIntegralAbove(h *thermal.History, temp float64) float64 {
	hot := Law{Terms: l.Terms, Where: make([]thermal.Window, len(l.Terms))}
	copy(hot.Where, l.Where)
	for i := range hot.Where {
		w := &hot.Where[i]
		if w.Above = math.Max(w.Above, temp); w.Below != 0 && !(w.Above < w.Below) {
			w.Below = w.Above // nowhere
		}
	}
	return hot.LnIntegral(h, 0, h.Life())
}
