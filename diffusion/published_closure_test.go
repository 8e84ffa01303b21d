package diffusion

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/published"
)

// The cooling of checks E01 and E04: 1/T linear in time, and a rim linear in 1/T.
const (
	closureE    = 250e3 // J/mol
	closureD0   = 1e-7  // m2/s
	closureSize = 5e-4  // m
	closureLife = 4e12  // s
	hottest     = 1400.0
	coldest     = 700.0
)

// closureTau is the time in which D falls by a factor of e.
func closureTau() float64 {
	return closureLife * thermal.GasConstant / (closureE * (1/coldest - 1/hottest))
}

// closureHistory is the cooling as a table, linear between 2000 rows. Halfway
// between two of them it is too hot by 0.2 mK.
func closureHistory(tb testing.TB) *thermal.History {
	tb.Helper()
	const rows = 2000
	r := &thermal.Rows{Time: uniform(0, closureLife, rows), Temp: make([]float64, rows+1)}
	for i, t := range r.Time {
		r.Temp[i] = 1 / (1/hottest + (1/coldest-1/hottest)*t/closureLife)
	}
	return newHistory(tb, thermal.Leg{Kind: thermal.Table, Rows: r})
}

// closureRun runs the cooling in a crystal of a shape; the rim rises from 0 to 1.
func closureRun(tb testing.TB, shape Shape) solution {
	tb.Helper()
	h := closureHistory(tb)
	rim := func(at float64) float64 { temp, _ := h.At(at); return hottest/temp - 1 }
	p := &Problem{
		Shape: shape, Zones: []Zone{{Outer: closureSize}}, Law: NewLaw(closureD0, closureE),
		Outer: []Rim{{Kind: Prescribed, Given: &Given{At: rim}}},
	}
	return solve(tb, p, Options{}, h)
}

// closureG returns the closure function where the profile has the value c: the
// rim had it at the temperature Tc with E/(R Tc) = G + ln(tau D0/a^2).
func closureG(c float64) float64 {
	return closureE/thermal.GasConstant*(c+1)/hottest - math.Log(closureTau()*closureD0/closureSize/closureSize)
}

// E01: Dodson 1986. G is read off the profile that is left after cooling.
func closureFunction(t *testing.T, c *published.Check) {
	for name, shape := range shapes {
		s := closureRun(t, shape)
		for _, r := range c.Rows {
			switch {
			case !strings.HasSuffix(r.Quantity, name):
			case strings.HasPrefix(r.Quantity, "Gbar"):
				c.Program(t, r.Row, closureG(s.mean()), c.Solver(r.Row))
			default:
				x := numbers(t, published.Row{Quantity: strings.Replace(r.Quantity, ")", " ", 1)})[0]
				c.Program(t, r.Row, closureG(s.at(x*closureSize)), c.Solver(r.Row))
			}
		}
	}
}

// E02: Dodson 1973. A = exp(Gbar), read off the mean of the profile.
func closureConstants(t *testing.T, c *published.Check) {
	for i, shape := range []Shape{Slab, Cylinder, Ball} {
		row := rowID(c, i+1)
		c.Program(t, row, math.Exp(closureG(closureRun(t, shape).mean())), c.Solver(row))
	}
}

// E03: Dodson 1973, equation 23, by the iteration that it is meant for. The exact
// constant of the sphere is exp(gamma + 2 ln pi - 12 zeta'(2)/pi^2).
func closureTemperatures(t *testing.T, c *published.Check) {
	const (
		eulerGamma = 0.57721566490153286061 // Abramowitz and Stegun 1964, table 1.1
		zetaSlope2 = -0.93754825431584375370
	)
	sphere := math.Exp(eulerGamma + 2*math.Log(math.Pi) - 12*zetaSlope2/(math.Pi*math.Pi))
	for _, r := range c.Rows {
		var e, d0, a, rate float64
		var shape, constant string
		if _, err := fmt.Sscanf(r.Quantity, "Tc: E=%g, D0=%g, a=%g m, %g K/Myr, %s %s", &e, &d0, &a, &rate, &shape, &constant); err != nil {
			t.Fatalf("row %s: %v", r.Row, err)
		}
		factor := sphere
		if constant != "exact" {
			if _, err := fmt.Sscanf(constant, "A=%g", &factor); err != nil {
				t.Fatalf("row %s: %v", r.Row, err)
			}
		}
		rate /= 1e6 * thermal.Year
		temp, kelvins := 1000.0, e/thermal.GasConstant
		for range 50 {
			temp = kelvins / math.Log(factor*temp*temp*d0/(a*a*kelvins*rate))
		}
		c.Formula(t, r.Row, temp, c.Exact(r.Row))
	}
}

// E04: Dodson 1986; the whole chain of path, law, rim and shape.
func closureProfile(t *testing.T, c *published.Check) {
	tau := closureTau()
	c.Formula(t, "E04.01", tau, c.Exact("E04.01"))
	lnD := NewLaw(closureD0, closureE).LnD(hottest)
	c.Program(t, "E04.02", math.Exp(lnD)*tau/closureSize/closureSize, c.Exact("E04.02"))
	for name, shape := range shapes {
		s := closureRun(t, shape)
		for _, r := range c.Rows[2:] {
			if !strings.HasSuffix(r.Quantity, name) {
				continue
			}
			value := s.at(numbers(t, r)[0] * closureSize)
			tol := c.Solver(r.Row)
			if strings.HasPrefix(r.Quantity, "Tc") {
				// the tolerance is of the concentration 1400/Tc - 1
				value = hottest / (value + 1)
				tol.Abs *= value * value / hottest
			}
			c.Program(t, r.Row, value, tol)
		}
	}
}
