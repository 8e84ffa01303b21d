package thermal

import "math"

// relaxIntegrals are int_a^(a+s) T^-k exp(-e/T) dx for k = 0 and 1 along T = ambient + (first - ambient) exp(-x), x in
// e-fold times. Almost all of the work is the same for both.
//
// With w = (T - ambient)/T, from w0 to w1, u = e/ambient and dx = -dw/(w (1 - w)) the exponent is linear, -e/T = u w - u, and
//
//	I = ambient^-k e^-u int_w1^w0 (1 - w)^k e^(u w) / (w (1 - w)) dw
//	  = ambient^-k e^-u {s + int_w1^w0 [(1 - w)^k e^(u w) - 1] / (w (1 - w)) dw}.
//
// The first form serves short parts, and those where the exponent at w is far below that at 0; the second, in which w = 0,
// the ambient temperature, is no pole, keeps the long stay there apart. Both are sums of the exponential integrals E1(e/T)
// and Ei(u w), which cancel on short parts and overflow on long ones, so they are integrated by Gauss-Legendre panels,
// starting where the exponent is largest.
func relaxIntegrals(e, first, ambient, a, s float64) [2]scaled {
	u := e / ambient
	off := first - ambient
	if a > 0 {
		off *= math.Exp(-a)
	}
	if math.Abs(off)*(1+math.Abs(u)) < arrived*ambient {
		return [2]scaled{holdIntegral(e, 0, ambient, s), holdIntegral(e, 1, ambient, s)}
	}
	lost := passed(s) * off
	w0, w1 := off/(ambient+off), (off-lost)/(ambient+off-lost)
	width := lost / (ambient + off) * (1 - w1) // w0 - w1 without cancellation
	m, ln := relaxation{u}.integral(w0, w1, width, s)
	return [2]scaled{{m.k0, ln - u}, {m.k1 / ambient, ln - u}}
}

// passed is 1 - exp(-s), by the slower function only where the faster would cancel.
func passed(s float64) float64 {
	if s < math.Ln2 {
		return -math.Expm1(-s)
	}
	return 1 - math.Exp(-s)
}

// arrived is how near T/ambient must be to 1, over the exponent, to be it: half an ulp is 1e-16.
const arrived = 1e-18

// relaxation is what the integrand knows: u = e/ambient.
type relaxation struct{ u float64 }

// twin is a value for k = 0 and one for k = 1.
type twin struct{ k0, k1 float64 }

// plus is s + f a, for both.
func (a twin) plus(s, f float64) twin { return twin{s + f*a.k0, s + f*a.k1} }

// integral is the one over w, the time s included, as m exp(ln). width is w0 - w1.
func (r relaxation) integral(w0, w1, width, s float64) (m twin, ln float64) {
	short := math.Abs(w1) > math.Abs(w0)/2
	if r.u*w0 < 0 { // the exponent rises towards the ambient temperature
		return r.rising(w0, w1, width, s, short)
	}
	ln = r.u * w0
	if short {
		return r.march(w0, -width, ln, 0).plus(0, -1), ln
	}
	return r.march(w0, -width, ln, math.Exp(-ln)).plus(s*math.Exp(-ln), -1), ln
}

// Where the exponent at the late end of a relaxation lies below that of the ambient temperature by more than farBelow, the
// first form is used; where that at its early end does not lie below by nearBelow, the second; else the part is cut at
// cutBelow.
const farBelow, cutBelow, nearBelow = -1, -2, -3

// rising is integral where the exponent rises towards the ambient temperature.
func (r relaxation) rising(w0, w1, width, s float64, short bool) (m twin, ln float64) {
	switch ln = r.u * w1; {
	case short || ln <= farBelow:
		return r.march(w1, width, ln, 0), ln
	case r.u*w0 >= nearBelow:
		return r.march(w1, width, 0, 1).plus(s, 1), 0
	}
	cut := cutBelow / r.u
	early := math.Log(w0 / cut * ((1 - cut) / (1 - w0))) // time from w0 to the cut
	near, far := r.march(w1, cut-w1, 0, 1).plus(s-early, 1), r.march(cut, w0-cut, 0, 0)
	return twin{near.k0 + far.k0, near.k1 + far.k1}, 0
}

// march is
//
//	int_from^(from+width) [(1 - w)^k e^(u w - ln) - base] / (w (1 - w)) dw
//
// in panels that start at from, where u w is largest and about ln, and stop where nothing is left. base is e^-ln, or 0, and
// then w = 0 is a pole.
func (r relaxation) march(from, width, ln, base float64) (sum twin) {
	at, left := from, width
	for left != 0 && r.u*(at-from) >= -negligible {
		step := r.step(at, left, base == 0)
		mean := r.panel(at, step, ln, base)
		sum.k0, sum.k1 = sum.k0+step*mean.k0, sum.k1+step*mean.k1
		at, left = at+step, left-step
	}
	return sum
}

// step is the width of the panel at w with left still to do.
func (r relaxation) step(w, left float64, pole bool) float64 {
	most := min(math.Abs(left), widest/math.Abs(r.u), clearOf(1-w, left < 0))
	if pole {
		most = min(most, clearOf(math.Abs(w), left*w > 0))
	}
	return math.Copysign(most, left)
}

// clearOf is how wide a panel may be that begins at a distance from a pole, so that all of it is at least half its width away.
func clearOf(distance float64, away bool) float64 {
	if away {
		return 2 * distance
	}
	return distance * 2 / 3
}

// panel is the mean of the integrand of march from w to w + step.
func (r relaxation) panel(w, step, ln, base float64) twin {
	room := 1 - max(w, w+step)
	if base == 0 {
		room = min(room, math.Abs(w), math.Abs(w+step))
	}
	sum0, sum1, middle := 0.0, 0.0, w+step/2
	centre := math.Exp(r.u*middle - ln)
	for _, n := range gauss(math.Abs(r.u*step), room/math.Abs(step)) {
		x := n.x * step
		f := math.Exp(r.u * x)
		near, far := middle-x, middle+x
		atNear, atFar := centre/f-base, centre*f-base
		nearPoles, farPoles := near-near*near, far-far*far
		weight := n.w / (nearPoles * farPoles)
		sum0 += weight * (atNear*farPoles + atFar*nearPoles)
		sum1 += weight * ((atNear-near*(atNear+base))*farPoles + (atFar-far*(atFar+base))*nearPoles)
	}
	return twin{sum0, sum1}
}
