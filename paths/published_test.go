package paths

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"bankfire/paths/least"
	"bankfire/thermal/published"
	"gonum.org/v1/gonum/stat/distuv"
)

// The sources of the expected values stand beside them in testdata/checks.csv.
func TestPublished(t *testing.T) {
	// NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.4
	published.Run(t, "J01", func(t *testing.T, c *published.Check) {
		for _, row := range c.Rows {
			var p float64
			var nu int
			parse(t, row.Quantity, "chi2_{%f}(nu=%d)", &p, &nu)
			c.Program(t, row.Row, Critical(p, nu), c.Exact(row.Row))
		}
	})
	// Abramowitz and Stegun 1964, 26.4
	published.Run(t, "J02", func(t *testing.T, c *published.Check) {
		for _, row := range c.Rows {
			var x float64
			var nu int
			parse(t, row.Quantity, "Q(%f|%d)", &x, &nu)
			c.Program(t, row.Row, Tail(x, nu), c.Exact(row.Row))
		}
	})
	// Press et al. 1992, Numerical Recipes, 15.6; 68.3, 95.4 and 99.73 % are
	// exactly one, two and three standard deviations
	published.Run(t, "J03", func(t *testing.T, c *published.Check) {
		sigmas := map[float64]float64{68.3: 1, 95.4: 2, 99.73: 3}
		for _, row := range c.Rows {
			var p float64
			var n int
			parse(t, row.Quantity, "Delta chi2, %f %%, %d parameters", &p, &n)
			confidence := p / 100
			if s, ok := sigmas[p]; ok {
				confidence = math.Erf(s / math.Sqrt2)
			}
			c.Program(t, row.Row, Critical(confidence, n), c.Exact(row.Row))
		}
	})
	// NIST/SEMATECH e-Handbook, 1.3.6.7.2 and 1.3.6.7.1. Nothing in the program
	// rests on Student's t yet.
	published.Run(t, "J04", func(t *testing.T, c *published.Check) {
		for _, row := range c.Rows {
			if strings.HasPrefix(row.Quantity, "z") {
				c.Program(t, row.Row, math.Sqrt(Critical(0.95, 1)), c.Exact(row.Row))
				continue
			}
			var p, nu float64
			parse(t, row.Quantity, "t_{%f}(nu=%f)", &p, &nu)
			c.Formula(t, row.Row, distuv.StudentsT{Sigma: 1, Nu: nu}.Quantile(p), c.Exact(row.Row))
		}
	})
	// the definition of the weighted misfit
	published.Run(t, "J08", func(t *testing.T, c *published.Check) {
		f := least.Problem{Obs: []float64{0.02, -0.06, 0.01, 0}, Sigma: []float64{0.02, 0.03, 0.02, 0.05}}
		chi := f.Solve(func([][]float64, []float64) {}).ChiSq
		c.Program(t, "J08.01", chi, c.Exact("J08.01"))
		c.Program(t, "J08.02", Tail(chi, 4), c.Exact("J08.02"))
	})
}

func parse(t *testing.T, text, format string, into ...any) {
	t.Helper()
	if _, err := fmt.Sscanf(text, format, into...); err != nil {
		t.Fatalf("%q: %v", text, err)
	}
}
