package thermal

import (
	"fmt"
	"math"

	"bankfire/thermal/numeric"
)

// LnArrhenius is the logarithm of
//
//	int_t0^t1 T^-k exp(-e/T) dt,  k = 0 or 1,
//
// along the part of the leg between t0 and t1 (s from its start; what lies outside the leg counts nothing), T in K, e =
// E/R in K, positive, zero or negative, up to 1e5 in size (831 kJ/mol). The integral is in s, or s/K for k = 1; its
// logarithm is -Inf for an empty part. The relative error of the integral is below 2e-14, and 1e-11 along a sheet, besides
// the rounding of e/T.
//
// A hold and a ramp are closed forms (see e2Scaled), a ramp over which e/T changes little and a relaxation are
// Gauss-Legendre panels in 1/T, in which the exponent is linear; a table is a sum of ramps, a sheet adaptive
// Gauss-Kronrod quadrature in ln t. Everything is scaled by the largest exponent, so nothing under- or overflows.
//
// LnArrhenius panics unless k is 0 or 1. It does not allocate.
func (l *Leg) LnArrhenius(e float64, k int, t0, t1 float64) float64 {
	checkPower(k)
	return l.arrhenius(e, k, t0, t1).log()
}

// LnArrheniusCold is LnArrhenius for k = 0, and the mean of 1/T, 1/K, in which a time counts as exp(-e/T): the integral for k =
// 1 over that for k = 0, at little more than the cost of one where the leg is hold, ramp or relax. On an empty part the mean is
// 1/T where that begins.
func (l *Leg) LnArrheniusCold(e, t0, t1 float64) (ln, coldness float64) {
	t0, t1 = max(t0, 0), min(t1, l.length())
	if !(t0 < t1) {
		return math.Inf(-1), 1 / l.At(t0)
	}
	var whole, cold scaled
	switch l.Kind {
	case Hold:
		return holdIntegral(e, 0, l.T0, t1-t0).log(), 1 / l.T0
	case Ramp:
		whole, cold = rampIntegrals(e, l.ramp(t0), l.ramp(t1), t1-t0)
	case Relax:
		both := relaxIntegrals(e, l.T0, l.T1, t0/l.Tau, (t1-t0)/l.Tau)
		whole, cold = both[0].times(l.Tau), both[1].times(l.Tau)
	default:
		whole, cold = l.arrhenius(e, 0, t0, t1), l.arrhenius(e, 1, t0, t1)
	}
	coldness = cold.m / whole.m
	if cold.ln != whole.ln {
		coldness *= math.Exp(cold.ln - whole.ln)
	}
	return whole.log(), coldness
}

// LnArrhenius is the logarithm of int_t0^t1 T^-k exp(-e/T) dt along the part of the path between t0 and t1 (s from its
// start; what lies outside the path counts nothing). See Leg.LnArrhenius. Since it is a sum over legs, a leg of ten days
// in a path of a million years counts in full. It does not allocate.
func (h *History) LnArrhenius(e float64, k int, t0, t1 float64) float64 {
	checkPower(k)
	return h.sum(t0, t1, func(l *Leg, from, to float64) scaled { return l.arrhenius(e, k, from, to) })
}

// sum is the logarithm of the sum of what part says of the legs between t0 and t1, s, where its times count from the start of
// the leg. It asks once about legs that come again whole.
func (h *History) sum(t0, t1 float64, part func(l *Leg, from, to float64) scaled) float64 {
	var sum scaled
	var last [memory]scaled // of the legs before, by place
	first := h.leg(t0)
	whole := first // the first leg that is not cut
	if first < len(h.legs) && h.starts[first] < t0 {
		whole++
	}
	for i := first; i < len(h.legs) && h.starts[i] < t1; i++ {
		to := math.Inf(1) // whole legs by their own length: starts are rounded
		if t1 < h.starts[i+1] {
			to = t1 - h.starts[i]
		}
		this, back := &last[i%memory], h.again[i]
		if back > 0 && i-back >= whole && math.IsInf(to, 1) {
			*this = last[(i-back)%memory]
		} else {
			*this = part(&h.legs[i], t0-h.starts[i], to)
		}
		*this = sum.add(*this)
	}
	return sum.log()
}

func checkPower(k int) {
	if k != 0 && k != 1 {
		panic(fmt.Sprintf("thermal: integral of T^-%d exp(-e/T), want a power of 0 or 1", k))
	}
}

// scaled is the number m exp(ln), with m of ordinary size. The zero value is 0.
type scaled struct{ m, ln float64 }

// add adds b to a and returns b with the ln of the sum, so that adding it again takes no exponential.
func (a *scaled) add(b scaled) scaled {
	switch {
	case b.m == 0 || math.IsInf(b.ln, -1):
		return b
	case a.m == 0:
		*a = b
		return b
	case b.ln > a.ln:
		a.m, a.ln = a.m*math.Exp(a.ln-b.ln), b.ln
	case b.ln < a.ln:
		b.m, b.ln = b.m*math.Exp(b.ln-a.ln), a.ln
	}
	a.m += b.m
	return b
}

// log is its natural logarithm.
func (a scaled) log() float64 { return math.Log(a.m) + a.ln }

// arrhenius is the integral between t0 and t1 along the leg.
func (l *Leg) arrhenius(e float64, k int, t0, t1 float64) scaled {
	t0, t1 = max(t0, 0), min(t1, l.length())
	switch {
	case !(t0 < t1):
		return scaled{}
	case e == 0 && k == 0:
		return scaled{m: t1 - t0}
	}
	switch l.Kind {
	case Hold:
		return holdIntegral(e, k, l.T0, t1-t0)
	case Ramp:
		return rampIntegral(e, k, l.ramp(t0), l.ramp(t1), t1-t0)
	case Relax:
		return relaxIntegrals(e, l.T0, l.T1, t0/l.Tau, (t1-t0)/l.Tau)[k].times(l.Tau)
	case SheetCooling:
		return l.Sheet.arrhenius(e, k, l.Since+t0, l.Since+t1)
	case Table:
		return l.Rows.arrhenius(e, k, t0, t1)
	}
	panic("thermal: " + l.Kind.String())
}

// times is f a.
func (a scaled) times(f float64) scaled { return scaled{f * a.m, a.ln} }

// holdIntegral is T^-k exp(-e/T) dt.
func holdIntegral(e float64, k int, temp, dt float64) scaled {
	if k == 1 {
		dt /= temp
	}
	return scaled{dt, -e / temp}
}

// narrowRise is the change of e/T along a ramp below which quadrature is used: there the closed form would lose a digit in
// its difference, or two where e2Scaled has lost one already, and four or eight points give the integral to the last digit.
func narrowRise(uHot float64) float64 {
	if uHot < convergentFrom {
		return 0.5
	}
	return 0.1
}

// rampIntegral is the integral along a straight line of temperature from a to b within dt, either way up. With u = e/T
//
//	int exp(-e/T) dt     = dt/(b - a) [T E2(u)] from a to b,
//	int T^-1 exp(-e/T) dt = dt/(b - a) [E1(u)]  from a to b,
//
// both multiplied by exp(u) of the hot end. In E2(u) = exp(-u) - u E1(u) the 1/u of its digits that the difference of the
// bracket T exp(-u) (1 - u e^u E1(u)) would lose are kept.
// Source: Abramowitz and Stegun (1964), 5.1.14 and 5.1.26.
func rampIntegral(e float64, k int, a, b, dt float64) scaled {
	r, wide := newRamped(e, a, b, dt)
	switch {
	case !wide:
		return narrowRamp(e, k, max(a, b), min(a, b), dt)
	case k == 1:
		return r.cold()
	}
	return r.whole()
}

// rampIntegrals are those for k = 0 and k = 1.
func rampIntegrals(e, a, b, dt float64) (whole, cold scaled) {
	r, wide := newRamped(e, a, b, dt)
	if !wide {
		return narrowRamp(e, 0, max(a, b), min(a, b), dt), narrowRamp(e, 1, max(a, b), min(a, b), dt)
	}
	return r.whole(), r.cold()
}

// ramped is what both integrals along a ramp are made of, u and exp(u) E2(u) at both ends, and exp(uHot - uCold).
type ramped struct{ hot, coldEnd, uHot, uCold, fHot, fCold, fall, dt float64 }

// newRamped finds them, unless the ramp is too narrow for them.
func newRamped(e, a, b, dt float64) (r ramped, wide bool) {
	hot, cold := max(a, b), min(a, b)
	rise := e * ((hot - cold) / (hot * cold))
	uHot, uCold := e/hot, e/cold
	if !(rise > narrowRise(uHot)) {
		return r, false
	}
	return ramped{hot, cold, uHot, uCold, e2Scaled(uHot), e2Scaled(uCold), math.Exp(-rise), dt}, true
}

func (r *ramped) whole() scaled {
	return scaled{r.dt / (r.hot - r.coldEnd) * (r.hot*r.fHot - r.coldEnd*r.fCold*r.fall), -r.uHot}
}

func (r *ramped) cold() scaled { // e^u E1(u) = (1 - e^u E2(u))/u
	return scaled{r.dt / (r.hot - r.coldEnd) * (e1From(r.uHot, r.fHot) - e1From(r.uCold, r.fCold)*r.fall), -r.uHot}
}

// convergentFrom is where the convergent in e2Scaled is right to 1.5e-15; beyond it is better.
const convergentFrom = 18

// e2Scaled is exp(u) E2(u) for u >= 0, which falls from 1 like 1/(u + 2). From convergentFrom on it is the tenth convergent of
//
//	1/(u+2 - 1 2/(u+4 - 2 3/(u+6 - ...))),
//
// a ratio of polynomials in z = 1/u with whole positive coefficients (the denominator is 10! z^10 L_10(-u) with the
// associated Laguerre polynomial of order 1). Below, it is 1 - u e^u E1(u).
// Source: Abramowitz and Stegun (1964), 5.1.14 and 5.1.22.
func e2Scaled(u float64) float64 {
	if u < convergentFrom {
		if u == 0 {
			return 1
		}
		return 1 - u*numeric.E1Scaled(u)
	}
	z := 1 / u
	z2 := z * z
	z4 := z2 * z2
	p := (1 + 108*z + (4736+109536*z)*z2) + ((1452780+11250960*z)+(49560480+114989760*z)*z2)*z4 +
		(118956960+36288000*z)*z4*z4
	q := (1 + 110*z + (4950+118800*z)*z2) + ((1663200+13970880*z)+(69854400+199584000*z)*z2)*z4 +
		((299376000+199584000*z)+39916800*z2)*z4*z4
	return z * p / q
}

// e1From is exp(u) E1(u) from f = exp(u) E2(u). It loses a digit below u = 0.1, where E1 is taken itself.
func e1From(u, f float64) float64 {
	if u < 0.5 {
		return numeric.E1Scaled(u)
	}
	return (1 - f) / u
}

// narrowRamp is the integral along a ramp over which e/T rises by at most narrowRise from hot to cold, or falls. In p =
// 1/T, which runs from hot to cold, or from cold to hot where the exponent falls that way by more than 1,
//
//	int T^-k exp(-e/T) dt = dt/(hot - cold) int p^(k-2) exp(-e p) dp,
//
// by Gauss-Legendre panels that keep clear of the pole at p = 0.
func narrowRamp(e float64, k int, hot, cold, dt float64) scaled {
	if hot == cold {
		return holdIntegral(e, k, hot, dt)
	}
	width := (hot - cold) / (hot * cold)
	start := 1 / hot
	if e*width < -1 {
		start, width = 1/cold, -width
	}
	sum, p, left := 0.0, start, width
	for left != 0 && e*(p-start) <= negligible {
		step := rampStep(e, p, left)
		sum += step / width * math.Exp(-e*(p-start)) * rampPanel(e, k, p, step)
		p, left = p+step, left-step
	}
	return scaled{dt / hot / cold * sum, -e * start}
}

// rampStep is the width of the panel at p with left still to do.
func rampStep(e, p, left float64) float64 {
	return math.Copysign(min(math.Abs(left), clearOf(p, left > 0), widest/math.Abs(e)), left)
}

// rampPanel is the mean of p^(k-2) exp(-e (p - at)) from p = at to at + step.
func rampPanel(e float64, k int, at, step float64) float64 {
	sum, middle := 0.0, at+step/2
	for _, n := range gauss(math.Abs(e*step), min(at, at+step)/math.Abs(step)) {
		x := n.x * step
		near, far := middle-x, middle+x
		f := math.Exp(e * x)
		if k == 0 {
			sum += n.w * (f/(near*near) + 1/(f*far*far))
		} else {
			sum += n.w * (f/near + 1/(f*far))
		}
	}
	return sum * math.Exp(-e*step/2)
}

// arrhenius is the integral between t0 and t1 along the table.
func (r *Rows) arrhenius(e float64, k int, t0, t1 float64) scaled {
	var sum scaled
	for i := r.interval(t0); i+1 < len(r.Time) && r.Time[i] < t1; i++ {
		from, to := max(t0, r.Time[i]), min(t1, r.Time[i+1])
		if from < to {
			sum.add(rampIntegral(e, k, r.within(i, from), r.within(i, to), to-from))
		}
	}
	return sum
}
