package thermal

import (
	"math"

	"bankfire/thermal/numeric"
)

// Sheet is a flat intrusion, a dike or a sill, that loses its heat by conduction to a host of the same thermal
// diffusivity, without latent heat. At the distance x from its middle plane and the time t after its emplacement
//
//	T = Host + (Magma - Host)/2 {erf((a - x)/(2 sqrt(Kappa t))) + erf((a + x)/(2 sqrt(Kappa t)))},  a = Thickness/2.
//
// Inside it cools, at the contact it stands at the mean first, outside it is heated and then cools.
// Source: Carslaw and Jaeger (1959), section 2.2 (4).
type Sheet struct {
	Magma, Host float64 // temperatures before emplacement, K; Magma not below Host
	Thickness   float64 // m
	Position    float64 // distance from the middle plane, m; either side
	Kappa       float64 // thermal diffusivity, m2/s
}

// At is the temperature, K, at t seconds after emplacement; at t <= 0 the limit as t falls to 0.
func (s *Sheet) At(t float64) float64 {
	near, far := s.distances()
	if t <= 0 {
		return s.Host + (s.Magma-s.Host)*early(near)
	}
	return s.Host + (s.Magma-s.Host)*share(near, far, 0.5/math.Sqrt(s.Kappa)/math.Sqrt(t))
}

// distances are a - |x|, positive inside the intrusion, and a + |x|, m.
func (s *Sheet) distances() (near, far float64) {
	half, x := s.Thickness/2, math.Abs(s.Position)
	return half - x, half + x
}

// share is (T - Host)/(Magma - Host) for z = 1/(2 sqrt(kappa t)), 1/m.
func share(near, far, z float64) float64 {
	if near == far {
		return math.Erf(near * z)
	}
	if near < 0 { // the difference of two numbers close to 1
		return (math.Erfc(-near*z) - math.Erfc(far*z)) / 2
	}
	return (math.Erf(near*z) + math.Erf(far*z)) / 2
}

// early is share as t falls to 0.
func early(near float64) float64 {
	switch {
	case near > 0:
		return 1
	case near < 0:
		return 0
	}
	return 0.5
}

// erfcGone is where erfc, 4e-20, no longer changes a temperature or anything made from it.
const erfcGone = 6.5

// still is the time until which the temperature stays at that of t = 0, s.
func (s *Sheet) still() float64 {
	near, far := s.distances()
	front := math.Abs(near)
	if front == 0 {
		front = far
	}
	return front / erfcGone * (front / erfcGone) / (4 * s.Kappa)
}

// peak is the time of the highest temperature, s: 0 inside and at the contact, else where dT/dt = 0,
//
//	t = a x/(kappa ln((x + a)/(x - a))).
func (s *Sheet) peak() float64 {
	near, far := s.distances()
	if near >= 0 {
		return 0
	}
	return (far + near) / 2 * (far - near) / 2 / (s.Kappa * math.Log1p((far+near)/-near))
}

// span is the lowest and the highest temperature between two times, K.
func (s *Sheet) span(t0, t1 float64) (lo, hi float64) {
	peak := max(t0, min(s.peak(), t1))
	return min(s.At(t0), s.At(t1)), s.At(peak)
}

// above is the one stretch of time, s, within which the temperature is above temp, K.
func (s *Sheet) above(temp, until float64) (from, to float64) {
	if temp < s.Host || (temp == s.Host && s.Host < s.Magma) {
		return 0, until
	}
	peak := min(s.peak(), until)
	if !(s.At(peak) > temp) {
		return 0, 0
	}
	from, to = 0, until
	if !(s.At(0) > temp) {
		from = s.reaches(temp, min(s.still(), peak), peak)
	}
	if !(s.At(until) > temp) {
		to = s.reaches(temp, max(s.still(), peak), until)
	}
	return from, to
}

// reaches is the time between t0 and t1, on opposite sides of temp, at which the temperature is temp, s. The root is
// sought in ln t, along which the curve bends least.
func (s *Sheet) reaches(temp, t0, t1 float64) float64 {
	lnT, err := numeric.Root(func(lnT float64) float64 { return s.At(math.Exp(lnT)) - temp }, math.Log(t0), math.Log(t1), 0)
	if err != nil { // both ends on one side by rounding: temp is that of the end which is nearer to it
		if math.Abs(s.At(t0)-temp) < math.Abs(s.At(t1)-temp) {
			return t0
		}
		return t1
	}
	return math.Exp(lnT)
}

// check is nil, or what is wrong with the sheet.
func (s *Sheet) check() *InputError {
	if s == nil {
		return &InputError{Problem: "sheet without its thickness and temperatures", Remedy: "want magma, host, thickness, position, kappa"}
	}
	if p := firstProblem(checkTemperature(s.Magma), checkTemperature(s.Host)); p != nil {
		return p
	}
	switch {
	case s.Magma < s.Host:
		return &InputError{Value: tempText(s.Magma), Problem: "magma colder than its host at " + tempText(s.Host),
			Remedy: "want an intrusion hotter than its host"}
	case !(s.Thickness >= thinnest && s.Thickness <= thickest):
		return &InputError{Problem: "thickness of a sheet that is zero, negative or out of range", Remedy: `want a length like "20 m"`}
	case !(math.Abs(s.Position) <= thickest):
		return &InputError{Problem: "position in a sheet out of range", Remedy: `want the distance from its middle plane, like "3 m"`}
	case !(s.Kappa >= slowest && s.Kappa <= fastest):
		return &InputError{Problem: "thermal diffusivity that is zero, negative or out of range", Remedy: `want one like "1e-6 m2/s"`}
	}
	return nil
}

// Limits of what a sheet may be, far beyond any intrusion and within what float64 can square.
const (
	thinnest, thickest = 1e-9, 1e12  // m
	slowest, fastest   = 1e-20, 1e12 // m2/s
)

// sheetTol is the difference between the Gauss and the Kronrod sum of a panel, relative to the integral so far, at which
// the panel is taken. The error of the latter is about the 1.5th power of it. To sheetTol is added what the rounding of the
// exponent may make, sheetNoise of it. Halving stops at sheetDepth in any case, at 4e-5 in ln t.
const (
	sheetTol   = 1e-7
	sheetNoise = 1e-14
	sheetDepth = 16
)

// arrhenius is the integral between t0 and t1: a hold until the front of cooling or heat arrives, then panels in ln t, a
// factor of 16 each and halved where needed. The hottest time is an end of a panel, so that no peak falls between points.
func (s *Sheet) arrhenius(e float64, k int, t0, t1 float64) scaled {
	c := cooling{sheet: s, e: e, k: k}
	lo, hi := s.span(t0, t1)
	c.ln = max(-e/lo, -e/hi)
	sum, at, peak := 0.0, max(t0, min(s.still(), t1)), s.peak()
	if at > t0 {
		sum = (at - t0) * c.integrand(t0)
	}
	for at < t1 {
		next := 16 * at
		if next > t1/2 {
			next = t1
		}
		if at < peak && peak < next {
			next = peak
		}
		y, width := math.Log(at), math.Log1p((next-at)/at)
		whole, off := c.panel(y, width)
		sum += c.refine(y, width, whole, off, sum+whole, 0)
		at = next
	}
	return scaled{sum, c.ln}
}

// cooling is the integrand along a sheet, divided by exp(ln).
type cooling struct {
	sheet *Sheet
	e, ln float64
	k     int
}

// integrand is T^-k exp(-e/T - ln) at t.
func (c *cooling) integrand(t float64) float64 {
	temp := c.sheet.At(t)
	f := math.Exp(-c.e/temp - c.ln)
	if c.k == 1 {
		f /= temp
	}
	return f
}

// panel is the integral over ln t from y to y + width by 15 points, and by how much 7 of them differ from it.
func (c *cooling) panel(y, width float64) (whole, off float64) {
	var seven float64
	for _, n := range kronrod15 {
		t := math.Exp(y + n.x*width)
		f := t * c.integrand(t)
		whole += n.w * f
		seven += n.gauss * f
	}
	return width * whole, width * math.Abs(whole-seven)
}

// refine halves a panel until it is good enough for an integral of the given size.
func (c *cooling) refine(y, width, whole, off, size float64, depth int) float64 {
	if off <= (sheetTol+sheetNoise*math.Abs(c.ln))*size || depth == sheetDepth {
		return whole
	}
	half := width / 2
	a, offA := c.panel(y, half)
	b, offB := c.panel(y+half, half)
	return c.refine(y, half, a, offA, size, depth+1) + c.refine(y+half, half, b, offB, size, depth+1)
}
