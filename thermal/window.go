package thermal

import "math"

// Window is a part of every path: the times in legs of one setting at which
//
//	Above < T <= Below.
//
// A hold at a bound itself is thus at or below it. The zero value is all times.
type Window struct {
	Setting int     // of the legs; 0 is legs of every setting
	Above   float64 // K; 0 is no bound
	Below   float64 // K; 0 is no bound
}

// Holds reports whether a time in a leg of the given setting, at a temperature, K, is in the window.
func (w Window) Holds(setting int, temp float64) bool {
	return w.in(setting) && temp > w.Above && temp <= w.below()
}

// in reports whether legs of the setting may be in the window.
func (w Window) in(setting int) bool { return w.Setting == 0 || w.Setting == setting }

// below is the upper bound, K.
func (w Window) below() float64 {
	if w.Below == 0 {
		return math.Inf(1)
	}
	return w.Below
}

// LnArrheniusIn is the logarithm of
//
//	int T^-k exp(-e/T) dt over the times between t0 and t1 that are in the window,  k = 0 or 1,
//
// t0 and t1 in s from the start of the path, also after the eruption: a crystal that cools still diffuses. T is in K, e =
// E/R in K. The logarithm is -Inf where the path never is in the window. Legs that cross a bound are split where they do,
// in closed form or, along a sheet, at the roots of its closed form; the parts are as exact as those of LnArrhenius, and
// nothing is found as a difference of integrals. The integrals over windows that meet at a bound add up to that over both
// with an error of about 1e-13 of it.
//
// LnArrheniusIn panics unless k is 0 or 1. It does not allocate.
func (h *History) LnArrheniusIn(e float64, k int, w Window, t0, t1 float64) float64 {
	checkPower(k)
	return h.sum(t0, t1, func(l *Leg, from, to float64) scaled {
		if !w.in(l.Setting) {
			return scaled{}
		}
		return l.arrheniusIn(e, k, w.Above, w.below(), from, to)
	})
}

// arrheniusIn is the integral over the part of the leg between t0 and t1 that is hotter than above and not hotter than below.
func (l *Leg) arrheniusIn(e float64, k int, above, below, t0, t1 float64) scaled {
	switch lo, hi := l.Range(); {
	case !(hi > above && lo <= below):
		return scaled{}
	case lo > above && hi <= below:
		return l.arrhenius(e, k, t0, t1)
	case l.Kind == Table:
		return l.Rows.arrheniusIn(e, k, above, below, max(t0, 0), min(t1, l.length()))
	}
	from, to := l.above(above)
	hot, cool := l.above(below)
	var sum scaled
	for _, part := range outside(hot, cool, from, to) {
		sum.add(l.arrhenius(e, k, max(t0, part[0]), min(t1, part[1])))
	}
	return sum
}

// arrheniusIn is the integral over the part of the table between t0 and t1 that is hotter than above and not hotter than
// below.
func (r *Rows) arrheniusIn(e float64, k int, above, below, t0, t1 float64) scaled {
	var sum scaled
	for i := r.interval(t0); i+1 < len(r.Time) && r.Time[i] < t1; i++ {
		from, to := r.above(i, above, t1)
		hot, cool := r.above(i, below, t1)
		for _, part := range outside(hot, cool, from, to) {
			if a, b := max(t0, part[0]), part[1]; a < b {
				sum.add(rampIntegral(e, k, r.within(i, a), r.within(i, b), b-a))
			}
		}
	}
	return sum
}

// outside is what is left of the stretch from ... to without the one from hot to cool within it, which may be empty: two
// stretches, either of which may be empty.
func outside(hot, cool, from, to float64) [2][2]float64 {
	if !(hot < cool) {
		hot, cool = to, to
	}
	return [2][2]float64{{from, hot}, {cool, to}}
}

// Passes appends to dst the times, s, at which the path passes the temperature temp, K, within a leg, and some of those at
// which it jumps across, which are all in Breaks. They are not sorted, and one may come twice.
func (h *History) Passes(dst []float64, temp float64) []float64 {
	for i := range h.legs {
		l := &h.legs[i]
		if lo, hi := l.Range(); !(hi > temp && lo <= temp) {
			continue
		}
		put := func(from, to float64) {
			end := h.starts[i+1]
			dst = append(dst, min(h.starts[i]+from, end), min(h.starts[i]+to, end))
		}
		if l.Kind == Table {
			for j := 0; j+1 < len(l.Rows.Time) && l.Rows.Time[j] < l.For; j++ {
				from, to := l.Rows.above(j, temp, l.For)
				put(from, to)
			}
			continue
		}
		from, to := l.above(temp)
		put(from, to)
	}
	return dst
}
