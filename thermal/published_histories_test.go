package thermal_test

import (
	"fmt"
	"math"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
	"bankfire/thermal/published"
)

// forever is beyond the end of every leg here, s.
const forever = 1e30

// TestPublishedHistories holds the checks of conductive and relaxing temperatures and of integrals along them.
func TestPublishedHistories(t *testing.T) {
	published.Run(t, "C01", checkDike)
	published.Run(t, "C02", checkLectureDike)
	published.Run(t, "C03", checkHalfSpace)
	published.Run(t, "C04", checkPeriodicSurface)
	published.Run(t, "C05", checkSolidification)
	published.Run(t, "C06", checkDikeIntegral)
	published.Run(t, "D01", checkRamps)
	published.Run(t, "D02", checkReciprocalRamps)
	published.Run(t, "D03", checkRelaxations)
	published.Run(t, "D04", checkOscillation)
	published.Run(t, "D05", checkDoubling)
	published.Run(t, "D06", checkAsymptotic)
	published.Run(t, "D07", checkAnneals)
	published.Run(t, "D08", checkRange)
}

// activation is e = E/R, K, for an energy in J/mol.
func activation(energy float64) float64 { return energy / thermal.GasConstant }

// dike is the intrusion of C01 at the distance x from its middle plane.
func dike(x float64) *thermal.Sheet {
	return &thermal.Sheet{Magma: 1473.15, Host: 473.15, Thickness: 2, Position: x, Kappa: 1e-6}
}

func checkDike(t *testing.T, c *published.Check) {
	row := 0
	for _, x := range []float64{0, 0.5, 1, 2} {
		for _, days := range []float64{1, 7, 30, 365.25} {
			row++
			id := fmt.Sprintf("C01.%02d", row)
			c.Program(t, id, dike(x).At(days*thermal.Day), c.Exact(id))
		}
	}
	leg := thermal.Leg{Kind: thermal.SheetCooling, For: 1e8, Sheet: dike(0)}
	c.Program(t, "C01.17", leg.TimeAbove((473.15+1473.15)/2), c.Exact("C01.17"))
	c.Program(t, "C01.18", dike(1).At(0), c.Exact("C01.18"))
}

func checkLectureDike(t *testing.T, c *published.Check) {
	s := thermal.Sheet{Magma: 1000 + thermal.ZeroCelsius, Host: thermal.ZeroCelsius, Thickness: 2, Kappa: 1e-6}
	c.Program(t, "C02.01", s.At(7*thermal.Day)-thermal.ZeroCelsius, c.Exact("C02.01"))
	c.Program(t, "C02.02", s.At(30.4375*thermal.Day)-thermal.ZeroCelsius, c.Exact("C02.02"))
	// The temperature near 373 K is known to 6e-14 K at best; that is 6e-16 of 100 C and far within the tolerance.
	c.Program(t, "C02.03", s.At(thermal.Year)-thermal.ZeroCelsius, c.Exact("C02.03"))
}

// checkHalfSpace: no leg of this kind; users bring it as a table.
func checkHalfSpace(t *testing.T, c *published.Check) {
	const surface, inside, kappa = 293.15, 1293.15, 1e-6
	row := 0
	for _, depth := range []float64{0.1, 1, 5} {
		for _, days := range []float64{1, 30, 365.25} {
			row++
			id := fmt.Sprintf("C03.%02d", row)
			temp := surface + (inside-surface)*math.Erf(depth/(2*math.Sqrt(kappa*days*thermal.Day)))
			c.Formula(t, id, temp, c.Exact(id))
		}
	}
	c.Formula(t, "C03.10", (inside-surface)/math.Sqrt(math.Pi*kappa*30*thermal.Day), c.Exact("C03.10"))
}

// checkPeriodicSurface: no leg of this kind; users bring it as a table.
func checkPeriodicSurface(t *testing.T, c *published.Check) {
	const kappa = 1e-6
	omega := 2 * math.Pi / thermal.Year
	depth := math.Sqrt(2 * kappa / omega)
	c.Formula(t, "C04.01", depth, c.Exact("C04.01"))
	c.Formula(t, "C04.02", math.Exp(-1/depth), c.Exact("C04.02"))
	c.Formula(t, "C04.03", 1/depth/omega/thermal.Day, c.Exact("C04.03"))
	c.Formula(t, "C04.04", 2*math.Pi*depth, c.Exact("C04.04"))
	c.Formula(t, "C04.05", math.Exp(-2*math.Pi), c.Exact("C04.05"))
}

// checkSolidification: sheets are without latent heat; only the root finder is ours.
func checkSolidification(t *testing.T, c *published.Check) {
	const latent, heat, drop, half, kappa = 320e3, 1.2e3, 1000.0, 1.0, 0.5e-6
	lambda, err := numeric.Root(func(l float64) float64 {
		return math.Exp(-l*l)/(l*(1+math.Erf(l))) - latent*math.Sqrt(math.Pi)/(heat*drop)
	}, 0.1, 2, 0)
	if err != nil {
		t.Fatal(err)
	}
	c.Formula(t, "C05.01", lambda, c.Exact("C05.01"))
	c.Formula(t, "C05.02", half*half/(4*kappa*lambda*lambda)/thermal.Day, c.Exact("C05.02"))
}

func checkDikeIntegral(t *testing.T, c *published.Check) {
	e := activation(250e3)
	for i, x := range []float64{0, 0.9} {
		leg := thermal.Leg{Kind: thermal.SheetCooling, For: 30 * thermal.Day, Sheet: dike(x)}
		ln := leg.LnArrhenius(e, 0, 1, 30*thermal.Day)
		integral, standIn := fmt.Sprintf("C06.%02d", 2*i+1), fmt.Sprintf("C06.%02d", 2*i+2)
		c.Program(t, integral, math.Exp(ln), c.Exact(integral))
		c.Program(t, standIn, math.Exp(ln-lnHold(e, 1473.15)), c.Exact(standIn))
	}
}

// lnHold is the ln of the integral over one second at temp.
func lnHold(e, temp float64) float64 {
	leg := thermal.Leg{Kind: thermal.Hold, For: 1, T0: temp}
	return leg.LnArrhenius(e, 0, 0, forever)
}

func ramp(from, to, duration float64) thermal.Leg {
	return thermal.Leg{Kind: thermal.Ramp, For: duration, T0: from, T1: to}
}

func checkRamps(t *testing.T, c *published.Check) {
	for i, r := range []struct{ energy, from, to, duration float64 }{
		{250000, 1273.15, 1273.15, 86400},
		{250000, 1073.15, 1473.15, 3600},
		{250000, 1473.15, 1073.15, 3600},
		{250000, 1473.15, 293.15, 86400},
		{80000, 300, 1300, 3.15576e7},
		{400000, 1100, 1100.01, 1000},
		{500000, 273.15, 1500, 3.15576e13},
		{120000, 293.15, 293.15, 3.15576e13},
		{600000, 300, 600, 3.15576e13},
		{0, 300, 1300, 1000},
		{250000, 1173.15, 1173.1500001, 1e6},
	} {
		id := fmt.Sprintf("D01.%02d", i+1)
		leg := ramp(r.from, r.to, r.duration)
		c.Program(t, id, math.Exp(leg.LnArrhenius(activation(r.energy), 0, 0, forever)), c.Exact(id))
	}
}

// checkReciprocalRamps: no leg of this kind; a table of 2000 intervals, whose straight lines cut about 1e-6 of an e-fold
// off the curve, must meet the tolerance for solvers.
func checkReciprocalRamps(t *testing.T, c *published.Check) {
	for i, r := range []struct{ energy, from, to, duration float64 }{
		{250000, 1473.15, 1073.15, 3600},
		{250000, 1473.15, 673.15, 86400},
		{400000, 1400, 700, 3.15576e13},
	} {
		id := fmt.Sprintf("D02.%02d", i+1)
		leg := table(t, r.duration, 2000, func(t float64) float64 {
			return 1 / (1/r.from + (1/r.to-1/r.from)*t/r.duration)
		})
		c.Program(t, id, math.Exp(leg.LnArrhenius(activation(r.energy), 0, 0, forever)), c.Solver(id))
	}
}

// table is a table leg of n equal intervals along a curve.
func table(t *testing.T, duration float64, n int, curve func(t float64) float64) thermal.Leg {
	t.Helper()
	times, temps := make([]float64, n+1), make([]float64, n+1)
	for i := range times {
		times[i] = duration * float64(i) / float64(n)
		temps[i] = curve(times[i])
	}
	rows, err := thermal.TableFrom(times, temps, false)
	if err != nil {
		t.Fatal(err)
	}
	return thermal.Leg{Kind: thermal.Table, Rows: rows}
}

func checkRelaxations(t *testing.T, c *published.Check) {
	for i, r := range []struct{ energy, from, ambient, efold, duration float64 }{
		{250000, 1473.15, 1073.15, 3600, 7200},
		{250000, 1473.15, 293.15, 86400, 864000},
		{250000, 973.15, 1473.15, 600, 3600},
		{120000, 1373.15, 573.15, 3.15576e9, 3.15576e10},
	} {
		integral, end := fmt.Sprintf("D03.%02d", 2*i+1), fmt.Sprintf("D03.%02d", 2*i+2)
		leg := thermal.Leg{Kind: thermal.Relax, For: r.duration, T0: r.from, T1: r.ambient, Tau: r.efold}
		c.Program(t, integral, math.Exp(leg.LnArrhenius(activation(r.energy), 0, 0, forever)), c.Exact(integral))
		c.Program(t, end, leg.At(r.duration), c.Exact(end))
	}
}

// checkOscillation: no leg of this kind; a table of 1000 intervals a period, sixteen times what the check asks for.
func checkOscillation(t *testing.T, c *published.Check) {
	const mean = 1173.15
	for i, r := range []struct{ energy, amplitude float64 }{{250000, 50}, {250000, 5}, {500000, 100}} {
		factor, temp := fmt.Sprintf("D04.%02d", 2*i+1), fmt.Sprintf("D04.%02d", 2*i+2)
		leg := table(t, 1, 1000, func(t float64) float64 { return mean + r.amplitude*math.Sin(2*math.Pi*t) })
		e := activation(r.energy)
		ln := leg.LnArrhenius(e, 0, 0, 1)
		c.Program(t, factor, math.Exp(ln-lnHold(e, mean)), c.Solver(factor))
		c.Program(t, temp, -e/ln, c.Solver(temp))
	}
}

// checkDoubling: the rule of thumb lives here, the exact rise is that at which the program's integral has doubled.
func checkDoubling(t *testing.T, c *published.Check) {
	for i, r := range []struct{ energy, temp float64 }{
		{250000, 1273.15}, {250000, 873.15}, {148000, 1173.15}, {85000, 298.15},
	} {
		rule, exact := fmt.Sprintf("D05.%02d", 2*i+1), fmt.Sprintf("D05.%02d", 2*i+2)
		e := activation(r.energy)
		c.Formula(t, rule, r.temp*r.temp*math.Ln2/e, c.Exact(rule))
		rise, err := numeric.Root(func(rise float64) float64 {
			return lnHold(e, r.temp+rise) - lnHold(e, r.temp) - math.Ln2
		}, 0, 200, 0)
		if err != nil {
			t.Fatal(err)
		}
		c.Program(t, exact, rise, c.Exact(exact))
	}
}

func checkAsymptotic(t *testing.T, c *published.Check) {
	for i, r := range []struct{ energy, from, to, duration float64 }{
		{250000, 1473.15, 293.15, 86400}, {400000, 1400, 700, 3.15576e13},
	} {
		id := func(n int) string { return fmt.Sprintf("D06.%02d", 4*i+n) }
		e, leg := activation(r.energy), ramp(r.from, r.to, r.duration)
		ln := leg.LnArrhenius(e, 0, 0, forever)
		hold := math.Exp(ln - lnHold(e, r.from))
		lead := r.from * r.from / e * r.duration / (r.from - r.to)
		c.Program(t, id(1), math.Exp(ln), c.Exact(id(1)))
		c.Formula(t, id(2), lead/hold, c.Exact(id(2)))
		c.Formula(t, id(3), lead/hold*(1-2*r.from/e), c.Exact(id(3)))
		c.Program(t, id(4), hold, c.Exact(id(4)))
	}
}

func checkAnneals(t *testing.T, c *published.Check) {
	const d0, hour = 1e-8, 3600.0
	e := activation(250e3)
	var h thermal.History
	if err := h.Set([]thermal.Leg{
		{Kind: thermal.Hold, For: hour, T0: 1373.15}, {Kind: thermal.Hold, For: 24 * hour, T0: 1273.15},
	}); err != nil {
		t.Fatal(err)
	}
	ln := h.LnArrhenius(e, 0, 0, h.Life())
	c.Program(t, "D07.01", math.Exp(math.Log(d0)+ln), c.Exact("D07.01"))
	c.Program(t, "D07.02", math.Exp(ln-lnHold(e, 1373.15))/hour, c.Exact("D07.02"))
}

func checkRange(t *testing.T, c *published.Check) {
	for i, temp := range []float64{1700, 300, 150, 77} {
		id := fmt.Sprintf("D08.%02d", i+1)
		c.Program(t, id, lnHold(activation(600e3), temp)/math.Ln10, c.Exact(id))
	}
}
