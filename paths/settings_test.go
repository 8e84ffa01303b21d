package paths

import (
	"math"
	"strings"
	"testing"

	"bankfire/thermal"
)

// caStudy is Ca in an olivine that was stored along NNO, woken along QFM-1 and kept
// at a fixed fO2 in the end. Its law is calibrated from 900 to 1500 C.
const caStudy = `[conditions]
fO2 = "NNO"
pressure = "2 kbar"

[[path]]
name = "woken"
legs = [
  { name = "store", hold = "1000 C", for = "10 yr" },
  { name = "wake", hold = "1100 C", for = "1 yr", conditions = { fO2 = "QFM-1" } },
  { name = "rest", hold = "1050 C", for = "2 yr", conditions = { fO2 = "1e-6 Pa" } },
]

[[crystal]]
name = "OL-2"
mineral = "olivine"
shape = "slab"
zones = [ { name = "core", width = "90 um" }, { name = "skin", width = "40 um" } ]

[[crystal.element]]
name = "Ca"
law = "olivine-ca-coogan2005-a"
start = { zones = ["100 ppm", "70 ppm"], edge = "0 um" }
rim = { held = "skin" }
`

// coogan is D of Coogan and others 2005 along a at an fO2 in Pa, the buffers below as
// Frost 1991 lists them, at 2 kbar and in Pa.
func coogan(temp, log10FO2 float64) float64 {
	return 1.65e-11 * math.Pow(10, 0.31*(log10FO2+7)) * math.Exp(-193e3/(thermal.GasConstant*temp))
}

func nno(temp float64) float64 { return -24930/temp + 9.36 + 0.046*1999/temp + 5 }
func qfm(temp float64) float64 { return -25096.3/temp + 8.735 + 0.110*1999/temp + 5 }

// TestLegsOfTheirOwnConditions: G is the sum of what each leg does at its own fO2,
// calculated by hand, and so is what follows from it: shares, the temperature that
// stands in, and what an error of E does to G. An error of E leaves what the buffer
// adds to the apparent one alone: the middle of the range stays as it is.
func TestLegsOfTheirOwnConditions(t *testing.T) {
	const (
		tol   = 1e-11 // of ln G and of shares: rounding of numbers of size 50
		byE   = 1e-3  // differences over one standard deviation leave what the next derivative does
		sameG = 1e-8  // the stand-in temperature is found to 1e-6 K, where ln D changes by 1e-2 a kelvin
	)
	s := readStudy(t, caStudy, "none.csv", "x\n1\n")
	path := &s.Paths[0]
	c, err := Follow(t.Context(), s, path, nil)
	if err != nil {
		t.Fatal(err)
	}
	k := func(celsius float64) float64 { return celsius + thermal.ZeroCelsius }
	t1, t2, t3 := k(1000), k(1100), k(1050)
	parts := []float64{10 * year * coogan(t1, nno(t1)), year * coogan(t2, qfm(t2)-1), 2 * year * coogan(t3, -6)}
	g := parts[0] + parts[1] + parts[2]
	e := c.Elements[0]
	near(t, "ln G", e.LnG, math.Log(g), tol)
	for i, part := range parts {
		near(t, "share of "+e.Legs[i].Name, e.Legs[i].Share, part/g, tol)
	}
	law := s.Crystals[0].Elements[0].Law.Law
	for at := 0.0; at <= 13; at += 0.5 { // G grows without a step
		want := math.Min(at, 10)/10*parts[0] + math.Max(0, math.Min(at-10, 1))*parts[1] + math.Max(0, at-11)/2*parts[2]
		near(t, "G", math.Exp(law.LnIntegral(path.History, 0, at*year))/g, want/g, tol)
	}
	temp := standIn(law, path.History, e.LnG)
	same := 10*year*coogan(temp, nno(temp)) + year*coogan(temp, qfm(temp)-1) + 2*year*coogan(temp, -6)
	near(t, "G at the stand-in temperature", same/g, 1, sameG)

	p := &profile{element: &s.Crystals[0].Elements[0], path: path}
	middle, mean := (1/k(900)+1/k(1500))/2, 0.0
	for i, temp := range []float64{t1, t2, t3} {
		mean += parts[i] / g * (1/temp - middle)
	}
	const sigma = 11e3
	near(t, "derivative by E", p.byE(sigma)[0]*sigma, -mean/thermal.GasConstant*sigma, byE)

	if !e.GEnough || !strings.Contains(e.WhyG, "conditions of legs") {
		t.Errorf("G enough %v: %q", e.GEnough, e.WhyG)
	}
}
