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
