package least_test

import (
	"fmt"
	"math"

	"bankfire/paths/least"
)

// A straight line through three points: the two values enter linearly.
func Example() {
	line := least.Problem{
		Obs: []float64{2, 3, 7}, Sigma: []float64{1, 0.5, 1},
		Linear: []least.Prior{least.None, least.None},
	}
	best := line.Solve(func(dst [][]float64, _ []float64) {
		copy(dst[1], []float64{1, 1, 1})
		copy(dst[2], []float64{1, 2, 3})
	})
	fmt.Printf("%.1f + %.1f x, chi-square %.1f\n", best.Linear[0], best.Linear[1], best.ChiSq)
	// Output: -1.5 + 2.5 x, chi-square 3.0
}

// A decay: its height enters linearly, its rate is bent, and is known to be 0.5
// or so beforehand.
func ExampleProblem_Solve() {
	x := []float64{0, 1, 2, 3, 4}
	decay := least.Problem{
		Obs: []float64{10.1, 6, 3.7, 2.2, 1.4}, Sigma: []float64{0.1, 0.1, 0.1, 0.1, 0.1},
		Linear: []least.Prior{least.None},
		Bent:   []least.Bent{{Prior: least.Prior{Mean: 0.5, Sigma: 0.1}, Lo: 0, Hi: 10, Starts: []float64{1}}},
	}
	best := decay.Solve(func(dst [][]float64, bent []float64) {
		for i, x := range x {
			dst[1][i] = math.Exp(-bent[0] * x)
		}
	})
	fmt.Printf("%.2f exp(-%.3f x), chi-square %.2f\n", best.Linear[0], best.Bent[0], best.ChiSq)
	// Output: 10.07 exp(-0.505 x), chi-square 1.22
}
