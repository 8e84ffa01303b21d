package numeric

import "math"

// eulerGamma is the Euler-Mascheroni constant (Abramowitz and Stegun 1964, Table 1.1).
const eulerGamma = 0.57721566490153286060651209008240243

// E1Scaled is exp(x) E1(x) for x >= 0, with the exponential integral
//
//	E1(x) = int_x^inf exp(-u)/u du,
//
// which falls like 1/x: +Inf at 0, 0 at +Inf and NaN below 0. E1 itself underflows beyond x = 738.
// Source: Abramowitz and Stegun (1964), 5.1.1, 5.1.11 and 5.1.22.
func E1Scaled(x float64) float64 {
	if x <= 1 {
		return math.Exp(x) * e1Series(x)
	}
	return e1Fraction(x)
}

// e1Series is E1(x) = -gamma - ln x - sum_{k>=1} (-x)^k/(k k!), for x up to 1.
func e1Series(x float64) float64 {
	sum, power := 0.0, 1.0
	for k := 1.0; ; k++ {
		power *= -x / k
		term := power / k
		if sum+term == sum || math.IsNaN(term) {
			return -eulerGamma - math.Log(x) - (sum + term)
		}
		sum += term
	}
}

// e1Fraction is exp(x) E1(x) for x > 1 by the contracted continued fraction
//
//	1/(x+1 - 1^2/(x+3 - 2^2/(x+5 - ...))),
//
// from the tail upwards. Its error falls like exp(-4 sqrt(n x)); n is set so that this is below 1e-17 (39 = 17 ln 10).
func e1Fraction(x float64) float64 {
	n := math.Ceil(4 + 39.0*39/16/x)
	tail := 0.0
	for k := n; k >= 1; k-- {
		tail = k * k / (x + 2*k + 1 - tail)
	}
	return 1 / (x + 1 - tail)
}
