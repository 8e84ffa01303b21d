package least_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/paths/least"
)

// edge is an error-function step as a fit meets it: two plateaux and a tilt
// enter linearly, place and width of the step do not.
func edge(n, bent int) (*least.Problem, least.Model) {
	rng := rand.New(rand.NewPCG(7, 60))
	p := &least.Problem{Linear: []least.Prior{least.None, {Mean: 20, Sigma: 2}, least.None}}
	for i := range n {
		x := float64(i)/float64(n-1) - 0.5
		p.Sigma = append(p.Sigma, 1)
		p.Obs = append(p.Obs, 100-80*step(x, 0.03, 0.1)+3*x+rng.NormFloat64())
	}
	p.Bent = []least.Bent{
		{Prior: least.None, Lo: -0.2, Hi: 0.2, Starts: []float64{0}},
		{Prior: least.None, Lo: 0.01, Hi: 0.5, Starts: []float64{0.2}},
	}[:bent]
	return p, func(dst [][]float64, bent []float64) {
		at, width := 0.03, 0.1
		if len(bent) == 2 {
			at, width = bent[0], bent[1]
		}
		for i := range n {
			x := float64(i)/float64(n-1) - 0.5
			s := step(x, at, width)
			dst[0][i], dst[1][i], dst[2][i], dst[3][i] = 0, 1-s, s, x
		}
	}
}

func step(x, at, width float64) float64 { return math.Erfc((at-x)/width) / 2 }

func BenchmarkSolve(b *testing.B) {
	for _, bent := range []int{0, 2} {
		name := fmt.Sprintf("linear=3/data=60/bent=%d", bent)
		if bent == 0 {
			name = "linear=3/data=60"
		}
		b.Run(name, func(b *testing.B) {
			p, model := edge(60, bent)
			b.ReportAllocs()
			for b.Loop() {
				p.Solve(model)
			}
		})
	}
}
