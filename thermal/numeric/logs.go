package numeric

import "math"

// LnAdd is ln(e^a + e^b) without under- or overflow. -Inf stands for nothing added.
func LnAdd(a, b float64) float64 {
	if a < b {
		a, b = b, a
	}
	if math.IsInf(a, 0) {
		return a // both -Inf, or at least one +Inf; a - b would be NaN
	}
	return a + math.Log1p(math.Exp(b-a))
}

// LnSub is ln(e^a - e^b) for a >= b without under- or overflow; -Inf where a = b, NaN where a < b.
// The relative error of e^a - e^b is that of a and b, times e^a/(e^a - e^b).
func LnSub(a, b float64) float64 {
	switch {
	case a == b:
		return math.Inf(-1)
	case math.IsInf(a, 1) && b < a:
		return a
	case math.IsInf(b, -1):
		return a
	case b-a > -math.Ln2: // of the two forms, the one whose argument does not cancel
		return a + math.Log(-math.Expm1(b-a))
	}
	return a + math.Log1p(-math.Exp(b-a))
}
