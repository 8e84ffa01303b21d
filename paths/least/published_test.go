package least_test

import (
	"math"
	"strconv"
	"strings"
	"testing"

	"bankfire/paths/least"
	"bankfire/thermal/published"
	"gonum.org/v1/gonum/mat"
)

// The nonlinear regressions of the Statistical Reference Datasets of the
// National Institute of Standards and Technology, with b1 as linear value and
// the others bent, from both official starts (of which b1 needs none). The
// ranges are wide: every start must come home by its own steps.
func TestPublished(t *testing.T) {
	published.Run(t, "J05", func(t *testing.T, c *published.Check) {
		r := regression{x: numbers(t, c, "x:"), y: numbers(t, c, "y:"), curve: growth, slopes: growthSlopes}
		r.bent = []least.Bent{bent(1e-9, 1, 1e-4, 5e-4)}
		r.judge(t, c, []string{"J05.01", "J05.02"}, "J05.05", "J05.06", []string{"J05.03", "J05.04"})
		got := r.fit(t, 1)
		covariance := r.covariance(got)
		c.Formula(t, "J05.07", covariance.At(0, 1)/math.Sqrt(covariance.At(0, 0)*covariance.At(1, 1)), c.Exact("J05.07"))
	})
	published.Run(t, "J06", func(t *testing.T, c *published.Check) {
		r := regression{x: numbers(t, c, "x:"), y: numbers(t, c, "y:"), curve: growth, slopes: growthSlopes}
		r.bent = []least.Bent{bent(1e-6, 1e3, 1, 0.75)}
		r.judge(t, c, []string{"J06.01", "J06.02"}, "J06.05", "J06.06", []string{"J06.03", "J06.04"})
	})
	published.Run(t, "J07", func(t *testing.T, c *published.Check) {
		x := fill(16, func(i int) float64 { return 50 + 5*float64(i) }) // 50 55 ... 125
		r := regression{x: x, y: numbers(t, c, "y:"), curve: viscosity, slopes: viscositySlopes}
		r.bent = []least.Bent{bent(0, 1e6, 4e5, 4000), bent(0, 1e5, 25000, 250)}
		r.judge(t, c, []string{"J07.01", "J07.02", "J07.03"}, "J07.07", "J07.08", []string{"J07.04", "J07.05", "J07.06"})
	})
}

// numbers reads the numbers of a check's inputs from a label on, "x: 1 2 | y: 3 4".
func numbers(t *testing.T, c *published.Check, label string) []float64 {
	t.Helper()
	_, text, found := strings.Cut(c.Rows[0].Inputs, label)
	text, _, _ = strings.Cut(text, "|")
	if !found || strings.TrimSpace(text) == "" {
		t.Fatalf("no %s in %q", label, c.Rows[0].Inputs)
	}
	var v []float64
	for word := range strings.FieldsSeq(text) {
		x, err := strconv.ParseFloat(word, 64)
		must(t, err)
		v = append(v, x)
	}
	return v
}

// regression is y = b1 curve(x, b2...).
type regression struct {
	x, y   []float64
	curve  func(x float64, b []float64) float64
	slopes func(x float64, b []float64) []float64 // of the curve by b2...
	bent   []least.Bent
}

// growth is 1 - exp(-b2 x), viscosity exp(b2/(x + b3)).
func growth(x float64, b []float64) float64         { return -math.Expm1(-b[0] * x) }
func growthSlopes(x float64, b []float64) []float64 { return []float64{x * math.Exp(-b[0]*x)} }

func viscosity(x float64, b []float64) float64 { return math.Exp(b[0] / (x + b[1])) }
func viscositySlopes(x float64, b []float64) []float64 {
	v := viscosity(x, b)
	return []float64{v / (x + b[1]), -v * b[0] / square(x+b[1])}
}

// fit fits from one of the starts.
func (r *regression) fit(t *testing.T, start int) least.Solution {
	t.Helper()
	p := least.Problem{Obs: r.y, Sigma: ones(len(r.y)), Linear: none(1)}
	for _, b := range r.bent {
		b.Starts = b.Starts[start : start+1]
		p.Bent = append(p.Bent, b)
	}
	got := p.Solve(func(dst [][]float64, b []float64) {
		clear(dst[0])
		for i, x := range r.x {
			dst[1][i] = r.curve(x, b)
		}
	})
	if !got.Settled {
		t.Errorf("from start %d: not settled", start+1)
	}
	return got
}

// covariance is that of b1, b2...: the residual variance times the inverse of
// the product of slopes, which here are those of the formula.
func (r *regression) covariance(got least.Solution) *mat.Dense {
	n, k := len(r.x), 1+len(got.Bent)
	a := mat.NewDense(n, k, nil)
	for i, x := range r.x {
		a.Set(i, 0, r.curve(x, got.Bent))
		for j, s := range r.slopes(x, got.Bent) {
			a.Set(i, 1+j, got.Linear[0]*s)
		}
	}
	var qr mat.QR
	qr.Factorize(a)
	var upper, inverse, c mat.Dense
	qr.RTo(&upper)
	if err := inverse.Inverse(upper.Slice(0, k, 0, k)); err != nil {
		panic(err)
	}
	c.Mul(&inverse, inverse.T())
	c.Scale(got.ChiSq/float64(n-k), &c)
	return &c
}

// judge compares both fits with the certified values. The standard deviations
// of b and the residual one are formulas of this test.
func (r *regression) judge(t *testing.T, c *published.Check, values []string, rss, residual string, sd []string) {
	t.Helper()
	first := r.fit(t, 0)
	for j, b := range append(first.Linear, first.Bent...) {
		row := c.Row(values[j])
		near(t, "from start 1, "+row.Quantity, b/row.Expected, 1, c.Exact(values[j]).Rel)
	}
	got := r.fit(t, 1)
	for j, b := range append(got.Linear, got.Bent...) {
		c.Program(t, values[j], b, c.Exact(values[j]))
	}
	c.Program(t, rss, got.ChiSq, c.Exact(rss))
	c.Formula(t, residual, math.Sqrt(got.ChiSq/float64(len(r.x)-len(values))), c.Exact(residual))
	covariance := r.covariance(got)
	for j, row := range sd {
		c.Formula(t, row, math.Sqrt(covariance.At(j, j)), c.Exact(row))
	}
}
