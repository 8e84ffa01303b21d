package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/paths/least"
)

// Of true models chi-square less what its data count is 0 on average, however
// near to the limit of detection they are.
func TestLimitsCountForWhatTheyAdd(t *testing.T) {
	const n, limit, sigma = 400_000, 6.0, 2.0
	for _, z := range []float64{-2, -1, -0.5, 0, 0.5, 1, 2, 4} { // (limit - truth)/sigma
		t.Run(fmt.Sprintf("%g sigma below the limit", z), func(t *testing.T) {
			truth := limit - z*sigma
			p := least.Problem{Obs: make([]float64, n), Sigma: make([]float64, n), Limit: make([]bool, n)}
			rng := rand.New(rand.NewPCG(32, uint64(10*z+100)))
			for i := range n {
				p.Obs[i], p.Sigma[i] = truth+sigma*rng.NormFloat64(), sigma
				if p.Obs[i] < limit {
					p.Obs[i], p.Limit[i] = limit, true
				}
			}
			at := p.Solve(func(dst [][]float64, _ []float64) {
				for i := range dst[0] {
					dst[0][i] = truth
				}
			})
			// of a value chi-square scatters by no more than that of a datum, root of 2
			near(t, "mean excess", (at.ChiSq-float64(telling(&p, at)))/n, 0, 4*math.Sqrt2/math.Sqrt(n))
		})
	}
}
