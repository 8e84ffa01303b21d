package numeric

import "math"

// eulerGamma is the Euler-Mascheroni constant (Abramowitz and Stegun 1964, Table 1.1).
const eulerGamma = 0.57721566490153286060651209008240243

// E1 is the exponential integral
//
//	E1(x) = int_x^inf exp(-u)/u du
//
// for x >= 0; +Inf at 0 and NaN below. It underflows beyond x = 738; E1Scaled does not.
// Source: Abramowitz and Stegun (1964), 5.1.1, 5.1.11 and 5.1.22.
func E1(x float64) float64 {
	if x <= 1 {
		return e1Series(x)
	}
	return math.Exp(-x) * e1Fraction(x)
}

// E1Scaled is exp(x) E1(x) for x >= 0, which falls like 1/x: +Inf at 0, 0 at +Inf and NaN below 0.
func E1Scaled(x float64) float64 {
	if x <= 1 {
		return math.Exp(x) * e1Series(x)
	}
	return e1Fraction(x)
}

// Ei is the exponential integral
//
//	Ei(x) = -int_-x^inf exp(-u)/u du  (principal value),
//
// with Ei(-x) = -E1(x), -Inf at 0, +Inf beyond x = 716. Near its root at 0.3725 it is good to 2e-16, not relatively.
// Source: Abramowitz and Stegun (1964), 5.1.2, 5.1.10 and 5.1.51.
func Ei(x float64) float64 {
	switch {
	case x < 0:
		return -E1(-x)
	case x == 0:
		return math.Inf(-1)
	case x > eiAsymptotic:
		return eiTail(x)
	}
	return eulerGamma + math.Log(x) + eiSeries(x)
}

// eiAsymptotic is where the smallest term of the asymptotic series, about exp(-x), has fallen below 1e-17.
const eiAsymptotic = 40

// e1Series is -gamma - ln x - sum_k (-x)^k/(k k!), for x up to 1.
func e1Series(x float64) float64 {
	return -eulerGamma - math.Log(x) - eiSeries(-x)
}

// eiSeries is sum_{k>=1} x^k/(k k!), for x from -1 to eiAsymptotic.
func eiSeries(x float64) float64 {
	sum, power := 0.0, 1.0
	for k := 1.0; ; k++ {
		power *= x / k
		term := power / k
		if sum+term == sum || math.IsNaN(term) {
			return sum + term
		}
		sum += term
	}
}

// eiTail is exp(x)/x sum_k k!/x^k for x > eiAsymptotic, up to its smallest term.
func eiTail(x float64) float64 {
	if math.IsInf(x, 1) {
		return x
	}
	sum, term := 1.0, 1.0
	for k := 1.0; k < x && sum+term*k/x != sum; k++ {
		term *= k / x
		sum += term
	}
	half := math.Exp(x / 2) // twice the half, since exp(x)/x overflows later than exp(x)
	return half / x * sum * half
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
