package numeric

import (
	"fmt"
	"math"
)

// interpolations is how many steps of Root may interpolate. Ordinary functions need 5 to 15 steps; the others are
// halved from then on, so that Root always ends.
const interpolations = 60

// Root finds x between lo and hi with f(x) = 0, where f(lo) and f(hi) have opposite signs (or one is 0). The bracket is
// narrowed to tol plus four ulps of x, by inverse quadratic interpolation where that is safe and by halving elsewhere.
// f may be discontinuous and its values infinite; tol may be 0; lo may lie above hi.
//
// It is an error if f has the same sign at both ends, if f is NaN at a point tried, if an end is not finite, or if tol is
// negative or NaN.
// Source: Chandrupatla (1997), Advances in Engineering Software 28, 145-149.
func Root(f func(float64) float64, lo, hi, tol float64) (float64, error) {
	if width := hi - lo; !(tol >= 0) || math.IsInf(width, 0) || math.IsNaN(width) {
		return 0, fmt.Errorf("numeric: no root from %g to %g within %g: ends must be finite, tol at least 0", lo, hi, tol)
	}
	b := bracket{a: hi, b: lo, fa: f(hi), fb: f(lo)}
	switch {
	case b.fa == 0:
		return hi, nil
	case b.fb == 0:
		return lo, nil
	case !(b.fa < 0 && b.fb > 0) && !(b.fa > 0 && b.fb < 0): // true for NaN
		return 0, fmt.Errorf("numeric: root not bracketed: f(%g) = %g, f(%g) = %g", lo, b.fb, hi, b.fa)
	}
	return b.close(f, tol)
}

// bracket holds a root between a, the newest point, and b. The point before the newest that is not b is c.
type bracket struct{ a, b, c, fa, fb, fc float64 }

// close narrows the bracket until it is within tol.
func (b *bracket) close(f func(float64) float64, tol float64) (float64, error) {
	t := 0.5
	for step := 1; ; step++ {
		x := b.a + t*(b.b-b.a)
		if x == b.a || x == b.b { // nothing lies between
			return b.best(), nil
		}
		fx := f(x)
		if math.IsNaN(fx) {
			return 0, fmt.Errorf("numeric: root between %g and %g: f(%g) is NaN", b.a, b.b, x)
		}
		b.take(x, fx)
		edge := (tol/2 + 4*ulp*math.Abs(b.best())) / math.Abs(b.b-b.a)
		if fx == 0 || edge > 0.5 {
			return b.best(), nil
		}
		t = 0.5
		if step < interpolations {
			t = math.Min(1-edge, math.Max(edge, b.guess()))
		}
	}
}

// ulp is half the distance from 1 to the next number.
const ulp = 0x1p-53

// best is the end of the bracket where f is nearer to 0.
func (b *bracket) best() float64 {
	if math.Abs(b.fa) < math.Abs(b.fb) {
		return b.a
	}
	return b.b
}

// take makes x the newest point of the bracket.
func (b *bracket) take(x, fx float64) {
	if (fx > 0) == (b.fa > 0) {
		b.c, b.fc = b.a, b.fa
	} else {
		b.c, b.fc = b.b, b.fb
		b.b, b.fb = b.a, b.fa
	}
	b.a, b.fa = x, fx
}

// guess is where to look next, as a fraction of the way from a to b: the inverse quadratic through the three points
// where it is monotone between a and b, else the middle. Infinite values lead to the middle.
func (b *bracket) guess() float64 {
	xi := (b.a - b.b) / (b.c - b.b)
	phi := (b.fa - b.fb) / (b.fc - b.fb)
	if !(phi*phi < xi && (1-phi)*(1-phi) < 1-xi) {
		return 0.5
	}
	t := b.fa/(b.fb-b.fa)*b.fc/(b.fb-b.fc) + (b.c-b.a)/(b.b-b.a)*b.fa/(b.fc-b.fa)*b.fb/(b.fc-b.fb)
	if math.IsNaN(t) {
		return 0.5
	}
	return t
}
