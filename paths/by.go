package paths

import (
	"slices"

	"bankfire/paths/study"
)

// By is what deviations of constants other than ln D and E make of the curve of a
// profile, z of each in standard deviations. Read at
//
//	x = LnM + shift by the law + sum of Shift z,
//
// chi-square is that of the curve, and on top of it the sum over the terms of
//
//	Value z_K^P z_L^Q,
//
// in x cubic Hermite polynomials and beyond the knots constant. No z is looked at
// beyond +- mostDeviation.
type By struct {
	Of    []study.Deviation
	Shift []float64 // by how much one standard deviation of each moves the profile along LnM
	LnM   []float64 // knots, ascending, at least three; none where the deviations do no more
	Terms []ByTerm
}

// ByTerm is one term of By.
type ByTerm struct {
	K, L, P, Q   int       // of deviations K and L; Q is 0 where it is of K alone
	Value, Slope []float64 // at the knots
}

// mostDeviation is how many standard deviations of a constant are looked at.
const mostDeviation = study.MostDeviation

// pull is chi-square of a profile at deviations z, those of ln D and E of its law, if
// it has one with errors, and then those of By, with its derivatives by them.
type pull struct {
	value      float64
	z, grad    []float64
	bend       []float64 // second derivatives, row by row
	along      []float64 // derivatives of where the curve is read
	steepening []float64 // of the slope of the curve where it is read
}

func (p *pull) reset(n int) {
	for _, s := range []*[]float64{&p.z, &p.grad, &p.along, &p.steepening} {
		*s = slices.Grow((*s)[:0], n)[:n]
	}
	p.bend = slices.Grow(p.bend[:0], n*n)[:n*n]
}

// split divides deviations into those of the law and those of By.
func (c *Curve) split(z []float64) (law, off []float64) {
	if c.Law == 0 {
		return nil, z
	}
	return z[:2], z[2:]
}

// shift returns by how much deviations move the profile along LnM.
func (c *Curve) shift(z []float64, law *LawPrior) float64 {
	own, off := c.split(z)
	x := 0.0
	if law != nil {
		e := own[1] * law.E
		x = own[0]*law.LnD + e*(c.ByE[0]+e*c.ByE[1]/2)
	}
	for k, z := range off {
		x += c.By.Shift[k] * z
	}
	return x
}

// along appends to dst the derivatives of the shift by its deviations where these
// are 0.
func (c *Curve) along(dst []float64, law *LawPrior) []float64 {
	if law != nil {
		dst = append(dst, law.LnD, law.E*c.ByE[0])
	}
	if c.By != nil {
		dst = append(dst, c.By.Shift...)
	}
	return dst
}

// leant returns chi-square at deviations.
func (c *Curve) leant(z []float64, law *LawPrior) float64 {
	_, off := c.split(z)
	return c.with(c.shift(z, law), off)
}

// with returns chi-square read at x with constants off.
func (c *Curve) with(x float64, off []float64) float64 {
	value := c.At(x)
	if c.By == nil {
		return value
	}
	for k := range c.By.Terms {
		t := &c.By.Terms[k]
		v, _, _ := hermite(c.By.LnM, t.Value, t.Slope, x)
		m := t.monomial(off)
		value += v * m.value
	}
	return value
}

// read reads a curve at the deviations z.
func (p *pull) read(c *Curve, law *LawPrior) {
	n := len(p.z)
	p.along = c.along(p.along[:0], law)
	if law != nil {
		p.along[1] += law.E * law.E * p.z[1] * c.ByE[1]
	}
	clear(p.grad)
	clear(p.bend)
	clear(p.steepening)
	x := c.shift(p.z, law)
	value, slope, bend := c.bend(x)
	if c.By != nil {
		_, off := c.split(p.z)
		first := n - len(off)
		for k := range c.By.Terms {
			t := &c.By.Terms[k]
			v, s, b := hermite(c.By.LnM, t.Value, t.Slope, x)
			m := t.monomial(off)
			value, slope, bend = value+v*m.value, slope+s*m.value, bend+b*m.value
			p.add(first+t.K, first+t.L, v, s, &m)
		}
	}
	p.value = value
	for i, u := range p.along {
		p.grad[i] += slope * u
		for j, w := range p.along {
			p.bend[i*n+j] += bend*u*w + u*p.steepening[j] + w*p.steepening[i]
		}
	}
	if law != nil {
		p.bend[n+1] += slope * c.ByE[1] * law.E * law.E
	}
}

// add adds a term of deviations k and l with its value and slope where it is read.
func (p *pull) add(k, l int, value, slope float64, m *monomial) {
	n := len(p.z)
	p.grad[k] += value * m.k
	p.steepening[k] += slope * m.k
	p.bend[k*n+k] += value * m.kk
	if l == k {
		return
	}
	p.grad[l] += value * m.l
	p.steepening[l] += slope * m.l
	p.bend[l*n+l] += value * m.ll
	p.bend[k*n+l] += value * m.kl
	p.bend[l*n+k] += value * m.kl
}

// monomial is z_K^P z_L^Q with its first and second derivatives.
type monomial struct{ value, k, l, kk, kl, ll float64 }

func (t *ByTerm) monomial(z []float64) monomial {
	a, da, dda := power(z[t.K], t.P)
	b, db, ddb := power(z[t.L], t.Q)
	return monomial{a * b, da * b, a * db, dda * b, da * db, a * ddb}
}

// power returns z^n with its first and second derivatives.
func power(z float64, n int) (value, first, second float64) {
	value = 1
	for range n {
		second = second*z + 2*first
		first = first*z + value
		value *= z
	}
	return value, first, second
}
