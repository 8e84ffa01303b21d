package numeric_test

import (
	"fmt"
	"math"

	"bankfire/thermal/numeric"
)

// The mean of exp(-20/T) over a ramp from T = 1 to T = 2.
func Example() {
	at := func(T float64) float64 { u := 20 / T; return T * math.Exp(-u) * (1 - u*numeric.E1Scaled(u)) }
	fmt.Printf("%.4g\n", at(2)-at(1))
	// Output: 7.66e-06
}

// Where does the mean of a profile erfc(x) over 0 to 1 stand?
func ExampleRoot() {
	mean := numeric.Ierfc(0) - numeric.Ierfc(1)
	x, err := numeric.Root(func(x float64) float64 { return math.Erfc(x) - mean }, 0, 1, 1e-9)
	fmt.Printf("%.6f %v\n", x, err)
	// Output: 0.461545 <nil>
}
