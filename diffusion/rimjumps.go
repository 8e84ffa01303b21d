package diffusion

import (
	"math"
	"math/cmplx"
)

// A rim of mass transfer is known on both sides too. With b = k h/D of its cell and
// p the transform of gamma, q = sqrt(p), a surface that begins to exchange with 1
// makes the mean of the first cell
//
//	(b/(b + q)) (1 - exp(-q))/(q p)
//
// (Carslaw and Jaeger 1959, section 2.7; Crank 1975, section 3.3.2). On an even grid it is, with beta = b/(1 + b/2) for the half cell
// and r + 1/r - 2 = p for the decay from cell to cell,
//
//	beta/(p (p + beta + 1 - r)).

// outside is what an end of the crystal is open to: a value behind an exchange of
// b = k h/D, infinite where the end is held, 0 where it is sealed.
type outside struct{ value, b float64 }

// surface returns what the end holds while the cell beside it holds c.
func (o outside) surface(c float64) float64 { return o.value - (o.value-c)*2/(2+o.b) }

// lets returns the flux that comes in meanwhile, in units of D C/h.
func (o outside) lets(c float64) float64 { return (o.value - c) * 2 / (1 + 2/o.b) }

// since returns the jump of the value outside that would change the flux as much as
// the end does by becoming o, which exchanges, after it was another.
func (o outside) since(before outside, c float64) float64 {
	if !(o.b > 0) {
		return 0
	}
	return o.value - before.surface(c) - before.lets(c)/o.b
}

// exchanges reports whether an end does in the span.
func (s *span) exchanges() bool { return s.inner.exchange.fine != nil || s.outer.exchange.fine != nil }

// sum returns the integral of k dt over solve k, m.
func (x *exchange) sum(k int) float64 {
	sum := 0.0
	for _, q := range x.fine[k] {
		sum += q.k
	}
	return sum
}

// noteEnds notes what the cells at both ends hold before a solve in which one of
// these exchanges.
func (f *Field) noteEnds(sp *span, c []float64) {
	if sp.exchanges() {
		f.atEnds = append(f.atEnds, [2]float64{c[0], c[len(c)-1]})
	}
}

// exchangeLag is how much less than it should the first cell has changed after gamma,
// by Talbot's contour (Abate and Valko 2004, Int. J. Numer. Meth. Engng 60, 979-993).
func exchangeLag(b, gamma float64) float64 {
	switch {
	case !(gamma > talbotHead) || !(b > 0) || gamma > talbotTail:
		return 0
	case b > asHeld:
		return 2 * lag(0, gamma)
	}
	scale := 2 * talbotPoints / (5 * gamma)
	sum := 0.5 * math.Exp(scale*gamma) * real(lagTransform(b, complex(scale, 0)))
	for i := 1; i < talbotPoints; i++ {
		theta := float64(i) * math.Pi / talbotPoints
		cot := 1 / math.Tan(theta)
		at := complex(scale*theta*cot, scale*theta)
		turn := complex(1, theta+(theta*cot-1)*cot)
		sum += real(cmplx.Exp(at*complex(gamma, 0)) * lagTransform(b, at) * turn)
	}
	return sum * scale / talbotPoints
}

const (
	// talbotPoints make the inverse right to some 1e-7.
	talbotPoints = 12
	// talbotTail is where nothing is left: the lag has fallen to 1e-5 or less.
	talbotTail = 1e4
	// talbotHead is before anything has come in.
	talbotHead = 1e-20
	// asHeld is a b beyond which the end is as good as held.
	asHeld = 1e9
)

// lagTransform is the transform of what should be less what the grid does.
func lagTransform(b float64, p complex128) complex128 {
	q := cmplx.Sqrt(p)
	beta := complex(b/(1+b/2), 0)
	should := complex(b, 0) / (complex(b, 0) + q) * (1 - cmplx.Exp(-q)) / q
	stays := (q*cmplx.Sqrt(p+4) - p) / 2 // 1 - r
	return (should - beta/(p+beta+stays)) / p
}
