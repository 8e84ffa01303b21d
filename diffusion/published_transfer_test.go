package diffusion

import (
	"math"
	"strings"
	"testing"

	"bankfire/thermal/published"
)

// exchanging returns a rim with k = h D at every temperature, h in 1/m, so that
// along any path the integral of D dt is enough, as the closed forms want it.
func exchanging(h, value float64) []Rim {
	d := testLaw.Terms[0]
	return []Rim{{Kind: Transfer, Value: value, Rate: Arrhenius{LnA: math.Log(h) + d.LnA, E: d.E}}}
}

// B12: Crank 1975, equations 3.35 and 3.37. The rim is the outer one of a crystal
// 8 sqrt(G) wide, in 400 cells: the last row counts a content times five.
func exchangingHalfSpace(t *testing.T, c *published.Check) {
	const size, root = testSize, testSize / 8
	for _, r := range c.Rows {
		in := numbers(t, r)
		h := in[len(in)-1] / root
		p := slabOf(size, nothing, nothing, 0)
		p.Outer = exchanging(h, 1)
		s := both(t, root*root, Options{Cells: 400}, fixed(p))
		if strings.HasPrefix(r.Quantity, "Mt/") {
			judge(t, c, r.Row, s, func(s solution) float64 { return content(s.plan, s.c) * h })
			continue
		}
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(size - 2*in[0]*root) })
	}
}

// B13: Crank 1975, equations 4.50, 4.53, 5.46, 5.49, 6.40 and 6.43.
func exchangingSurface(t *testing.T, c *published.Check) {
	for _, r := range c.Rows {
		in := numbers(t, r)
		p := slabOf(testSize, nothing, nothing, 1)
		p.Shape = shapes[strings.Fields(r.Quantity)[0]]
		p.Outer = exchanging(in[0]/testSize, 0)
		s := both(t, in[1]*testSize*testSize, Options{}, fixed(p))
		if strings.HasSuffix(r.Quantity, "Mt/Minf") {
			judge(t, c, r.Row, s, func(s solution) float64 { return 1 - s.mean() })
			continue
		}
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[2] * testSize) })
	}
}
