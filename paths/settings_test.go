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

	p := &profile{element: &s.Crystals[0].Elements[0], path: path, history: path.History}
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

// TestSwitchOnAPath: along a hot hold, a cooling through the switch and a cold hold,
// the shares of legs and the derivative by E are sums over many short times, the
// law of each chosen by its fO2; E is off from the middle of the range of the law
// that holds.
func TestSwitchOnAPath(t *testing.T) {
	const (
		n   = 200000
		tol = 1e-5 // one time on the wrong side of the switch
		byE = 1e-3 // differences over one standard deviation leave what the next derivative does
	)
	s := readStudy(t, `[conditions]
fO2 = "QFM"
pressure = "2 kbar"
[[path]]
name = "cooled"
legs = [
  { name = "hot", hold = "900 C", for = "1 yr" },
  { name = "slow", ramp = "650 C", for = "100 yr" },
  { name = "cold", hold = "650 C", for = "900 yr" },
]
[[crystal]]
name = "OL-1"
mineral = "olivine"
shape = "slab"
zones = [ { name = "core", width = "200 um" }, { name = "skin", width = "40 um" } ]
[[crystal.element]]
name = "Fe-Mg"
law = { above = "olivine-femg-dohmen2007-tamed", below = "olivine-femg-dohmen2007-ped", at = { fO2 = "1e-10 Pa" } }
start = { zones = ["90 Fo", "82 Fo"], edge = "0 um" }
rim = "sealed"
`, "none.csv", "x\n1\n")
	path := &s.Paths[0]
	e := &s.Crystals[0].Elements[0]
	k := func(celsius float64) float64 { return celsius + thermal.ZeroCelsius }
	mid := func(lo, hi float64) float64 { return (1/k(lo) + 1/k(hi)) / 2 }
	// of D at a temperature, the 1/T at which its law is known best
	d := func(temp float64) (d, middle float64) {
		energy := 7e-6 * (2e8 - 1e5)
		if log10FO2 := qfm(temp); log10FO2 > -10 {
			return math.Pow(10, -9.21+(log10FO2+7)/6) * math.Exp(-(201e3+energy)/(thermal.GasConstant*temp)), mid(900, 1300)
		}
		return math.Pow(10, -8.91) * math.Exp(-(220e3+energy)/(thermal.GasConstant*temp)), mid(700, 900)
	}
	h := path.History
	parts, byHand, cold := make([]float64, 3), 0.0, 0.0
	for i := range parts {
		from, to := h.Start(i), h.Start(i+1)
		for j := range n {
			temp, _ := h.At(from + (to-from)*(float64(j)+0.5)/n)
			here, middle := d(temp)
			here *= (to - from) / n
			parts[i] += here
			byHand -= here * (1/temp - middle) / thermal.GasConstant
			if temp < k(700) {
				cold += here
			}
		}
	}
	g := parts[0] + parts[1] + parts[2]
	shares := legShares(h, e.Law.Law)
	for i, part := range parts {
		near(t, "share of "+shares[i].Name, shares[i].Share, part/g, tol)
	}
	p := &profile{element: e, path: path, history: h}
	const sigma = 11e3
	near(t, "derivative by E", p.byE(sigma)[0]*sigma, byHand/g*sigma, byE)

	notes := strings.Join(outOfRange(e, h), "\n")
	want := "olivine-femg-dohmen2007-ped: " + percentText(cold/g) + " of the diffusion is done below its calibrated range of 700 to 900 C, down to 650 C"
	if !strings.Contains(notes, want) {
		t.Errorf("notes %q, want %q", notes, want)
	}
	if prior := lawPrior(&e.Law); prior.E != 11e3 || !strings.Contains(prior.Key, "tamed / ") {
		t.Errorf("prior %+v", prior)
	}
}
