package traverse

import (
	"math"
	"testing"

	"bankfire/thermal/numeric"
	"bankfire/thermal/published"
)

func TestPublished(t *testing.T) {
	published.Run(t, "M01", gaussianSpot)
	published.Run(t, "M02", topHatSpot)
}

// fineFaces returns cells of 0.02 um over 100 um, with a face in the middle: a
// fiftieth of the narrowest spot below, about what a solver lays at a boundary.
func fineFaces() []float64 {
	faces := make([]float64, 5001)
	for i := range faces {
		faces[i] = float64(i) * 0.02e-6
	}
	return faces
}

// seen returns what a spot shows at x, from the middle face, of a profile whose
// integral is given, both in um.
func seen(t *testing.T, s Spot, x float64, integral func(x float64) float64) float64 {
	t.Helper()
	faces := fineFaces()
	cells := means(faces, func(r float64) float64 { return integral(r*1e6-50) * 1e-6 })
	return see(t, faces, false, s, []float64{50e-6 + x*1e-6}, cells)[0]
}

// step is the integral of a step from 1 down to 0 at x = 0.
func step(x float64) float64 { return math.Min(x, 0) }

// blurred is the integral of erfc(x/(2 sqrt(Dt)))/2, sqrt(Dt) = 1 um.
func blurred(x float64) float64 { return -numeric.Ierfc(x / 2) }

// M01: identities of Gaussian convolution, away from the ends of the crystal.
// The profiles' lengths are in um, so rows that are a length or its square are
// judged in um and um2, where the tolerance of 1e-4 means something.
func gaussianSpot(t *testing.T, c *published.Check) {
	spot, err := ParseSpot("1 um sigma")
	if err != nil {
		t.Fatal(err)
	}
	for row, x := range map[string]float64{"M01.01": 0, "M01.02": 0.5, "M01.03": 1, "M01.04": 2} {
		c.Program(t, row, seen(t, spot, x, step), c.Solver(row))
	}
	fwhm, err := ParseSpot("1 um fwhm")
	if err != nil {
		t.Fatal(err)
	}
	c.Program(t, "M01.05", 1e-6/fwhm.Width, c.Exact("M01.05"))
	c.Program(t, "M01.06", where(t, spot, 0.16)-where(t, spot, 0.84), c.Solver("M01.06"))

	z := math.Erfcinv(2 * seen(t, spot, 1, blurred)) // 1 um/(2 sqrt(apparent Dt))
	micro(t, c, "M01.07", square(1/(2*z)), 1e-12)

	k := 2 * math.Pi / 5
	c.Program(t, "M01.08", seen(t, spot, 0, func(x float64) float64 { return math.Sin(k*x) / k }), c.Solver("M01.08"))

	// The peak of a Gaussian falls as its standard deviation grows.
	bell := func(x float64) float64 { return 3 * math.Sqrt(math.Pi/2) * math.Erf(x/3/math.Sqrt2) }
	micro(t, c, "M01.09", 3/seen(t, Spot{Gaussian, 4e-6}, 0, bell), 1e-6)
}

// micro judges a value in um or um2 against a row in m or m2: to the row's
// absolute tolerance in um or um2.
func micro(t *testing.T, c *published.Check, row string, got, unit float64) {
	t.Helper()
	tol := c.Solver(row)
	tol.Abs *= unit
	c.Program(t, row, got*unit, tol)
}

// where returns the place, in um, at which a spot shows the value v of a step.
func where(t *testing.T, s Spot, v float64) float64 {
	t.Helper()
	x, err := numeric.Root(func(x float64) float64 { return seen(t, s, x, step) - v }, -3, 3, 1e-9)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// M02: mean of erfc(u/(2 sqrt(Dt)))/2 over a spot of width 4 sqrt(Dt), Crank
// (1975), chapter 2.
func topHatSpot(t *testing.T, c *published.Check) {
	spot, err := ParseSpot("4 um top-hat")
	if err != nil {
		t.Fatal(err)
	}
	for row, x := range map[string]float64{"M02.01": 0, "M02.02": 1, "M02.03": 3} {
		c.Program(t, row, seen(t, spot, x, blurred), c.Solver(row))
	}
}
