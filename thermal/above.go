package thermal

import "math"

// LnArrheniusAbove is the logarithm of
//
//	int T^-k exp(-e/T) dt over the times at which T > temp,  k = 0 or 1,
//
// along the whole path, also after the eruption: unlike TimeAbove it does not stop there, since a crystal that cools
// still diffuses. T and temp are in K, e = E/R in K; a hold at temp itself is not above it. The logarithm is -Inf where
// the path never is. Legs that cross temp are split where they do, in closed form or, along a sheet, at the roots of its
// closed form; the parts are as exact as those of LnArrhenius. The integral over the times at or below temp is the rest,
//
//	exp(LnArrhenius) - exp(LnArrheniusAbove),
//
// with an error of about 1e-13 of the whole.
//
// LnArrheniusAbove panics unless k is 0 or 1. It does not allocate.
func (h *History) LnArrheniusAbove(e float64, k int, temp float64) float64 {
	checkPower(k)
	var sum scaled
	for i := range h.legs {
		sum.add(h.legs[i].arrheniusAbove(e, k, temp))
	}
	return sum.log()
}

// arrheniusAbove is the integral over the part of the leg that is hotter than temp.
func (l *Leg) arrheniusAbove(e float64, k int, temp float64) scaled {
	switch lo, hi := l.Range(); {
	case !(hi > temp):
		return scaled{}
	case lo > temp:
		return l.arrhenius(e, k, 0, math.Inf(1))
	case l.Kind == Table:
		return l.Rows.arrheniusAbove(e, k, temp, l.length())
	}
	from, to := l.above(temp)
	return l.arrhenius(e, k, from, to)
}

// arrheniusAbove is the integral over the part of the table until the given time, s, that is hotter than temp.
func (r *Rows) arrheniusAbove(e float64, k int, temp, until float64) scaled {
	var sum scaled
	for i := 0; i+1 < len(r.Time) && r.Time[i] < until; i++ {
		if from, to := r.above(i, temp, until); from < to {
			sum.add(rampIntegral(e, k, r.within(i, from), r.within(i, to), to-from))
		}
	}
	return sum
}
