package catalogue

import (
	"math"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/thermal"
	"bankfire/thermal/published"
)

func TestPublished(t *testing.T) {
	published.Run(t, "L03", printedTable)
	published.Run(t, "L05", errorsOfTime)
}

// printedTable evaluates D at each temperature of the textbook table, reading
// "C in gamma-Fe, D0=2.3e-5, Q=148 kJ/mol, 900 C" as a user would write it.
func printedTable(t *testing.T, c *published.Check) {
	for _, row := range c.Rows {
		parts := strings.Split(row.Quantity, ", ")
		if len(parts) != 4 {
			t.Fatalf("row %s: %q", row.Row, row.Quantity)
		}
		d0 := quantity(t, strings.TrimPrefix(parts[1], "D0=")+" m2/s", thermal.Diffusivity)
		energy := quantity(t, strings.TrimPrefix(parts[2], "Q="), thermal.MolarEnergy)
		temp := quantity(t, parts[3], thermal.Temperature)
		c.Program(t, row.Row, math.Exp(diffusion.NewLaw(d0, energy).LnD(temp)), c.Exact(row.Row))
	}
}

func quantity(t *testing.T, text string, dim thermal.Dimension) float64 {
	t.Helper()
	x, err := thermal.ParseQuantity(text, dim)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// errorsOfTime: what an error of temperature or of D does to a time t that goes
// with 1/D.
func errorsOfTime(t *testing.T, c *published.Check) {
	const temp = 1373.15
	law := diffusion.NewLaw(1, 300e3)
	slope := -law.Terms[0].E / (temp * temp) // d ln t/dT = -E/(R T^2)
	c.Formula(t, "L05.01", slope, c.Exact("L05.01"))
	c.Program(t, "L05.02", math.Exp(law.LnD(temp)-law.LnD(temp-10)), c.Exact("L05.02"))
	c.Formula(t, "L05.03", math.Pow(10, 0.25), c.Exact("L05.03"))
}
