package paths

import (
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/paths/least"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"gonum.org/v1/gonum/mat"
)

// The runs test is right at its level for independent errors, and as rarely
// wrong for errors that overlapping spots have correlated and where limits, whose
// residuals have one sign, stand among the data.
func TestRunsOfRandomResiduals(t *testing.T) {
	const repeats, points = 2000, 60
	line := &traverse.Traverse{Spot: traverse.Spot{Kind: traverse.Gaussian, Width: 1 * um}}
	for i := range points {
		line.Position = append(line.Position, float64(i)*0.7*um)
	}
	white, err := overlapWhite(&study.Element{Traverse: line})
	if err != nil || white == nil {
		t.Fatalf("white %v, %v", white, err)
	}
	var root mat.TriDense
	if err := root.InverseTri(white); err != nil {
		t.Fatal(err)
	}
	limits := make([]bool, points)
	for i := range points / 3 {
		limits[i] = true
	}
	for _, test := range []struct {
		name  string
		white *mat.TriDense
		limit []bool
	}{{"independent", nil, nil}, {"overlapping", white, nil}, {"limits", nil, limits}} {
		t.Run(test.name, func(t *testing.T) {
			rng := rand.New(rand.NewPCG(31, 7))
			few := 0
			for range repeats {
				r := mat.NewVecDense(points, nil)
				for i := range points {
					r.SetVec(i, rng.NormFloat64())
				}
				if test.white != nil {
					r.MulVec(&root, mat.VecDenseCopyOf(r))
				}
				at := least.Solution{Residuals: r.RawVector().Data}
				for i, limit := range test.limit {
					if limit {
						at.Residuals[i] = -math.Abs(at.Residuals[i])
					}
				}
				if runsProbability(independent(&least.Problem{White: test.white, Limit: test.limit}, at)) < fewRuns {
					few++
				}
			}
			// binomial: the level, or less since runs are whole numbers, and three
			// standard deviations
			if most := repeats*fewRuns + 3*math.Sqrt(repeats*fewRuns); !(float64(few) <= most) {
				t.Errorf("%d of %d random residuals are called not random, want at most %.0f", few, repeats, most)
			}
		})
	}
}
