// Package numeric holds the special functions and the root finder that the closed forms of histories and profiles need:
// the exponential integral, the complementary error function and its integral, sums of logarithms, a rule of quadrature,
// a bracketed root.
//
// Where a result would under- or overflow, it is its scaled form that is offered. So the mean of exp(-20/T) over a ramp
// from T = 1 to T = 2 is, with u = 20/T and the antiderivative T exp(-u) (1 - u e^u E1(u)),
//
//	at := func(T float64) float64 { u := 20 / T; return T * math.Exp(-u) * (1 - u*numeric.E1Scaled(u)) }
//	mean := at(2) - at(1)
//
// Arguments outside a function's domain give NaN, as in package math; they are the caller's to exclude.
package numeric
