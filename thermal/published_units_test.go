package thermal_test

import (
	"math"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/published"
)

// TestPublishedUnits holds the checks of constants and units.
func TestPublishedUnits(t *testing.T) {
	published.Run(t, "K01", publishedGasConstant)
	published.Run(t, "K02", publishedYear)
	published.Run(t, "K03", publishedUnits)
}

// CODATA 2018 and 2022, exact since the SI of 2019. The older values are those of CODATA 2014, 2010, 2002 (and 2006) and
// 1986; expressions of constants are exact, so small differences keep their digits.
func publishedGasConstant(t *testing.T, c *published.Check) {
	c.Program(t, "K01.01", thermal.GasConstant, c.Exact("K01.01"))
	c.Program(t, "K01.02", parsed(t, "1 eV", thermal.MolarEnergy)/1000, c.Exact("K01.02"))
	c.Program(t, "K01.03", thermal.GasConstant/parsed(t, "1 cal/mol", thermal.MolarEnergy), c.Exact("K01.03"))
	c.Formula(t, "K01.04", 8.3144598/thermal.GasConstant-1, c.Exact("K01.04"))
	c.Formula(t, "K01.05", 8.3144621/thermal.GasConstant-1, c.Exact("K01.05"))
	c.Formula(t, "K01.06", 8.314472/thermal.GasConstant-1, c.Exact("K01.06"))
	c.Formula(t, "K01.07", 8.314510/thermal.GasConstant-1, c.Exact("K01.07"))
	c.Formula(t, "K01.08", 8.314/thermal.GasConstant-1, c.Exact("K01.08"))
	const energyOverT = 300e3 / 1173.15 // J/(mol K)
	c.Formula(t, "K01.09", math.Expm1(energyOverT/thermal.GasConstant-energyOverT/8.314), c.Exact("K01.09"))
}

// Holden et al. (2011), Pure and Applied Chemistry 83, 1159-1162, for the annus; the others by definition. Only the
// first is ours.
func publishedYear(t *testing.T, c *published.Check) {
	const annus = 3.1556925445e7
	c.Program(t, "K02.01", parsed(t, "1 yr", thermal.Duration), c.Exact("K02.01"))
	c.Formula(t, "K02.02", annus, c.Exact("K02.02"))
	c.Formula(t, "K02.03", 365.2425*thermal.Day, c.Exact("K02.03"))
	c.Formula(t, "K02.04", 365*thermal.Day, c.Exact("K02.04"))
	c.Formula(t, "K02.05", annus/thermal.Year-1, c.Exact("K02.05"))
	c.Formula(t, "K02.06", 365*thermal.Day/thermal.Year-1, c.Exact("K02.06"))
}

// SI Brochure (9th edition, 2019); the thermochemical calorie.
func publishedUnits(t *testing.T, c *published.Check) {
	c.Program(t, "K03.01", parsed(t, "0 C", thermal.Temperature), c.Exact("K03.01"))
	c.Program(t, "K03.02", parsed(t, "1 kcal/mol", thermal.MolarEnergy), c.Exact("K03.02"))
	c.Program(t, "K03.03", parsed(t, "1 eV", thermal.MolarEnergy), c.Exact("K03.03"))
	c.Program(t, "K03.04", parsed(t, "1 µm²/s", thermal.Diffusivity), c.Exact("K03.04"))
	c.Program(t, "K03.05", parsed(t, "1 cm2/s", thermal.Diffusivity), c.Exact("K03.05"))
	c.Program(t, "K03.06", parsed(t, "1700 F", thermal.Temperature)-thermal.ZeroCelsius, c.Exact("K03.06"))
	c.Formula(t, "K03.07", math.Ln10, c.Exact("K03.07"))
}

func parsed(t *testing.T, text string, dim thermal.Dimension) float64 {
	t.Helper()
	value, err := thermal.ParseQuantity(text, dim)
	if err != nil {
		t.Fatal(err)
	}
	return value
}
