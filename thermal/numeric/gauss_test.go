package numeric

import (
	"math"
	"testing"
)

// TestGauss5 integrates x^p over [0, 1], which is 1/(p+1): exactly up to degree 9, not beyond.
func TestGauss5(t *testing.T) {
	const roundOff = 4e-16 // a few ulps of sums of size 1
	for p := range 11 {
		sum := 0.0
		for _, n := range Gauss5() {
			sum += n.W * math.Pow(n.X, float64(p))
		}
		off := math.Abs(sum - 1/float64(p+1))
		if p <= 9 && !(off <= roundOff) {
			t.Errorf("degree %d: off by %g, allowed %g", p, off, roundOff)
		}
		if p == 10 && !(off > 1e-7) { // (5!)^4/(11 (10!)^3) 10! = 1.4e-6
			t.Errorf("degree %d: off by %g only, which five points cannot", p, off)
		}
	}
}
