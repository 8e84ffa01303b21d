package numeric_test

import (
	"fmt"
	"math"
	"testing"

	"bankfire/thermal/numeric"
	"bankfire/thermal/published"
)

func TestPublished(t *testing.T) {
	published.Run(t, "A01", errorFunction)
	published.Run(t, "A02", integralsOfErfc)
	published.Run(t, "A03", exponentialIntegral)
	published.Run(t, "A04", besselZeros)
	published.Run(t, "A05", transferRoots)
}

// Abramowitz and Stegun (1964), Table 7.1. The program calls the standard library's functions directly: for the cooling
// of a sheet, for the edges of zones, and in this package.
func errorFunction(t *testing.T, c *published.Check) {
	erf := map[string]float64{"A01.01": 0.1, "A01.02": 0.5, "A01.03": 1, "A01.04": 1.5, "A01.05": 2}
	for row, x := range erf {
		c.Program(t, row, math.Erf(x), c.Exact(row))
	}
	erfc := map[string]float64{"A01.06": 3, "A01.07": 5, "A01.08": 10, "A01.09": 26}
	for row, x := range erfc {
		c.Program(t, row, math.Erfc(x), c.Exact(row))
	}
}

// Crank (1975), Table 2.1; Carslaw and Jaeger (1959), Appendix II; Abramowitz and Stegun (1964), 7.2. The program has no
// use for the second integral.
func integralsOfErfc(t *testing.T, c *published.Check) {
	got := map[string]float64{
		"A02.01": numeric.Ierfc(0), "A02.02": numeric.Ierfc(0.5), "A02.03": numeric.Ierfc(1), "A02.04": numeric.Ierfc(2),
		"A02.08": numeric.ErfcScaled(1), "A02.09": numeric.ErfcScaled(5), "A02.10": numeric.ErfcScaled(30),
	}
	for row, value := range got {
		c.Program(t, row, value, c.Exact(row))
	}
	for row, x := range map[string]float64{"A02.05": 0, "A02.06": 0.5, "A02.07": 1} {
		c.Formula(t, row, i2erfc(x), c.Exact(row))
	}
}

// i2erfc is the second integral of erfc, (erfc(x) - 2 x ierfc(x))/4.
func i2erfc(x float64) float64 { return (math.Erfc(x) - 2*x*numeric.Ierfc(x)) / 4 }

// Abramowitz and Stegun (1964), Tables 5.1 and 5.2. The program has no use for Ei, and for E1 only in its scaled form.
func exponentialIntegral(t *testing.T, c *published.Check) {
	for row, x := range map[string]float64{"A03.01": 0.01, "A03.02": 0.5, "A03.03": 1, "A03.04": 2} {
		c.Program(t, row, numeric.E1Scaled(x)*math.Exp(-x), c.Exact(row))
	}
	for row, x := range map[string]float64{"A03.05": 10, "A03.06": 25, "A03.07": 60} {
		c.Program(t, row, x*numeric.E1Scaled(x), c.Exact(row))
	}
	for row, x := range map[string]float64{"A03.08": 0.5, "A03.09": 5} {
		c.Formula(t, row, ei(x), c.Exact(row))
	}
}

// ei is the exponential integral Ei(x) = gamma + ln x + sum_{k>=1} x^k/(k k!) for x up to 5, where 40 terms leave 1e-20:
// Abramowitz and Stegun (1964), 5.1.10.
func ei(x float64) float64 {
	const gamma = 0.57721566490153286061 // of Euler and Mascheroni: Table 1.1
	sum, power := gamma+math.Log(x), 1.0
	for k := 1.0; k <= 40; k++ {
		power *= x / k
		sum += power / k
	}
	return sum
}

// Abramowitz and Stegun (1964), Table 9.5: zeros of J0 (bracketed by McMahon's expansion, 9.5.12, to within 0.1), J1 at
// them, and the first zero of J1.
func besselZeros(t *testing.T, c *published.Check) {
	for n := 1; n <= 5; n++ {
		row := fmt.Sprintf("A04.%02d", n)
		c.Formula(t, row, j0Zero(t, n), c.Exact(row))
		row = fmt.Sprintf("A04.%02d", n+5)
		c.Formula(t, row, math.J1(j0Zero(t, n)), c.Exact(row))
	}
	c.Formula(t, "A04.11", j0Zero(t, 20), c.Exact("A04.11"))
	c.Formula(t, "A04.12", root(t, math.J1, 3, 4), c.Exact("A04.12"))
}

// j0Zero is the n-th positive zero of J0; 0 for n = 0.
func j0Zero(t *testing.T, n int) float64 {
	t.Helper()
	if n == 0 {
		return 0
	}
	near := (float64(n) - 0.25) * math.Pi
	return root(t, math.J0, near-0.1, near+0.1)
}

// Crank (1975), Tables 4.2, 5.2 and 6.2; Carslaw and Jaeger (1959), Appendix IV: the n-th positive root of each shape's
// equation, written without poles, between the ends where it must change sign.
func transferRoots(t *testing.T, c *published.Check) {
	shapes := []func(l float64, n int) float64{
		func(l float64, n int) float64 { // sheet: b tan b = L
			f := func(b float64) float64 { return b*math.Sin(b) - l*math.Cos(b) }
			return root(t, f, float64(n-1)*math.Pi, (float64(n)-0.5)*math.Pi)
		},
		func(l float64, n int) float64 { // cylinder: b J1 = L J0, between two zeros of J0, where J1 has opposite signs
			f := func(b float64) float64 { return b*math.J1(b) - l*math.J0(b) }
			return root(t, f, j0Zero(t, n-1), j0Zero(t, n))
		},
		func(l float64, n int) float64 { // sphere: b cot b + L - 1 = 0; b = 0 solves the form without poles and is left out
			f := func(b float64) float64 { return b*math.Cos(b) + (l-1)*math.Sin(b) }
			return root(t, f, math.Max(0.1, float64(n-1)*math.Pi), float64(n)*math.Pi)
		},
	}
	for i, row := range c.Rows { // shape by shape, then L = 0.1, 1, 10, then n = 1, 2, 3
		l := math.Pow10(i/3%3 - 1)
		c.Formula(t, row.Row, shapes[i/9](l, i%3+1), c.Exact(row.Row))
	}
}

func root(t *testing.T, f func(float64) float64, lo, hi float64) float64 {
	t.Helper()
	x, err := numeric.Root(f, lo, hi, 0)
	if err != nil {
		t.Fatal(err)
	}
	return x
}
