// Package numeric holds the special functions and the root finder that the closed forms of histories and profiles need:
// exponential integrals, repeated integrals of the error function, sums of logarithms, a bracketed root.
//
// Where a result would under- or overflow, a scaled form is offered beside it. So the mean of exp(-20/T) over a ramp
// from T = 1 to T = 2 is, with u = 20/T and the antiderivative T exp(-u) (1 - u e^u E1(u)),
//
//	at := func(T float64) float64 { u := 20 / T; return T * math.Exp(-u) * (1 - u*numeric.E1Scaled(u)) }
//	mean := at(2) - at(1)
//
// Arguments outside a function's domain give NaN, as in package math; they are the caller's to exclude.
package numeric
