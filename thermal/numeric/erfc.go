package numeric

import "math"

// fractionFrom is where ErfcScaled and Ierfc change from their closed forms, of which Ierfc loses 2 x^2 of an ulp by
// cancellation, to the continued fraction, which needs some 250/x^2 terms.
const fractionFrom = 1.5

// ErfcScaled is exp(x^2) erfc(x), which falls like 1/(x sqrt(pi)); +Inf below x = -26.6.
// Source: Abramowitz and Stegun (1964), 7.1.14.
func ErfcScaled(x float64) float64 {
	switch {
	case x < 0:
		return 2*expSquare(x) - ErfcScaled(-x)
	case !(x >= fractionFrom): // NaN too
		return expSquare(x) * math.Erfc(x)
	}
	return 2 / math.SqrtPi * ratioProduct(x, 0)
}

// Ierfc is the integral of the complementary error function,
//
//	ierfc(x) = int_x^inf erfc(u) du = exp(-x^2)/sqrt(pi) - x erfc(x).
//
// Source: Carslaw and Jaeger (1959), Appendix II (9); Abramowitz and Stegun (1964), 7.2.
func Ierfc(x float64) float64 {
	if !(x >= fractionFrom) { // NaN too
		return expMinusSquare(x)/math.SqrtPi - x*math.Erfc(x)
	}
	return 2 / math.SqrtPi * expMinusSquare(x) * ratioProduct(x, 1)
}

// ratioProduct is i^n erfc(x) / i^-1 erfc(x) for x >= fractionFrom and n = 0, 1, the product of the ratios
//
//	r_k = i^k erfc(x) / i^(k-1) erfc(x) = 1/(2 x + 2 (k+1) r_(k+1)),
//
// with i^-1 erfc(x) = 2 exp(-x^2)/sqrt(pi). The recurrence (Abramowitz and Stegun 1964, 7.2.5) is run downwards, where
// i^k erfc is the solution that grows (Gautschi 1961, Math. Comp. 15, 227-232); 16 + 250/x^2 terms leave 3e-18.
func ratioProduct(x float64, n int) float64 {
	r, product := 0.0, 1.0
	for k := 16 + int(250/(x*x)); k >= 0; k-- {
		r = 1 / (2*x + 2*float64(k+1)*r)
		if k <= n {
			product *= r
		}
	}
	return product
}

// expSquare is exp(x^2), with the rounding of the square put back.
func expSquare(x float64) float64 {
	square, rest := squared(x)
	return math.Exp(square) * (1 + rest)
}

// expMinusSquare is exp(-x^2), with the rounding of the square put back.
func expMinusSquare(x float64) float64 {
	square, rest := squared(x)
	return math.Exp(-square) * (1 - rest)
}

// squared is x^2 and what its rounding left out. The rest is 0 where the square is so large that it would be lost.
func squared(x float64) (square, rest float64) {
	square = x * x
	if square > 1e4 { // exp(+-1e4) is Inf or 0 in any case, and the rest may be Inf - Inf
		return square, 0
	}
	return square, math.FMA(x, x, -square)
}
