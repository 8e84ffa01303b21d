package catalogue

import (
	"math"
	"testing"

	"bankfire/thermal"
)

// within fails unless got lies between lo and hi, ends included.
func within(t *testing.T, what string, got, lo, hi float64) {
	t.Helper()
	if !(got >= lo && got <= hi) {
		t.Errorf("%s is %.4g, want %.4g to %.4g", what, got, lo, hi)
	}
}

// TestStatements compares the laws with what papers say about them in words.
// "About" a number with one or two digits is read as within 10 %, "about ten
// times" as within a factor of 2, unless said otherwise.
func TestStatements(t *testing.T) {
	// Cherniak, Watson & Wark 2007, abstract: in 1 Myr about 500 um at 800 C and about 15 um at 600 C.
	t.Run("reach of Ti in quartz in a million years", func(t *testing.T) {
		reach := func(c float64) float64 {
			return math.Sqrt(2 * diffusivity(t, "quartz-ti-cherniak2007", nil, celsius(c)) * 1e6 * thermal.Year)
		}
		within(t, "reach at 800 C, m", reach(800), 450e-6, 550e-6)
		within(t, "reach at 600 C, m", reach(600), 13.5e-6, 16.5e-6)
	})
	// Common practice: the two laws are said to differ by about 1200 at 750 C. Jollands et al. 2020, abstract: two to three
	// orders of magnitude lower than thought before, here over the temperatures both were measured at, 900 to 1150 C.
	t.Run("two laws of Ti in quartz", func(t *testing.T) {
		ratio := func(c float64) float64 {
			return diffusivity(t, "quartz-ti-cherniak2007", nil, celsius(c)) / diffusivity(t, "quartz-ti-jollands2020", nil, celsius(c))
		}
		within(t, "ratio at 750 C", ratio(750), 1150, 1250)
		for c := 900.0; c <= 1150; c += 50 {
			within(t, "ratio where both were measured", ratio(c), 100, 1000)
		}
	})
	// Nat. Commun. 14, 4277 (2023): a profile of 1 um takes of the order of 100 years at 800 C.
	t.Run("a micrometre of Ti in quartz in a century", func(t *testing.T) {
		d := diffusivity(t, "quartz-ti-jollands2020", nil, celsius(800))
		within(t, "width of the profile, m", 4*math.Sqrt(d*100*thermal.Year), 1e-6/math.Sqrt(10), 1e-6*math.Sqrt(10))
	})
	// Watson, Cherniak & Holycross 2015, abstract: P about ten times slower than Ca in olivine near the basalt liquidus.
	t.Run("P and Ca in olivine", func(t *testing.T) {
		c := Conditions{FO2: 1e-7}
		ratio := diffusivity(t, "olivine-ca-coogan2005-c", c, celsius(1200)) / diffusivity(t, "olivine-p-watson2015", nil, celsius(1200))
		within(t, "Ca to P", ratio, 5, 20)
	})
	// Wang et al. 2004, abstract: 1e-16 m2/s with water at 1100 C, 300 MPa and Ni-NiO, about ten times the dry value, which
	// is thus 1e-17 and lies between the axes (a is 6 times slower than c, Dohmen & Chakraborty 2007). The axes by hand:
	// 8.4e-18 and 5.1e-17.
	t.Run("Fe-Mg in olivine at a buffer", func(t *testing.T) {
		temp := celsius(1100)
		nickel := math.Pow(10, -24930/temp+9.36+0.046*(3000-1)/temp) * thermal.Bar // P in bar
		d := diffusivity(t, "olivine-femg-dohmen2007-tamed", Conditions{Pressure: 3e8, FO2: nickel, XFe: 0.13}, temp)
		within(t, "D along c, m2/s", d, 5.05e-17, 5.15e-17)
		within(t, "dry value, m2/s", 1e-17, d/6, d)
	})
	// Brady & Yund 1983, abstract: Na-K 2 to 4e-17 cm2/s at 600 C. Schaffer et al. 2014, abstract: (001) about one order faster.
	t.Run("Na-K in alkali feldspar", func(t *testing.T) {
		slow := func(c float64) float64 { return diffusivity(t, "kfeldspar-nak-schaffer2014-010or92", nil, celsius(c)) }
		fast := diffusivity(t, "kfeldspar-nak-schaffer2014-001or92", nil, celsius(900))
		within(t, "D at 600 C, m2/s", slow(600), 2e-21, 4e-21)
		within(t, "(001) to (010) at 900 C", fast/slow(900), 5, 20)
	})
	// Cherniak, Watson & Thomas 2009, abstract: He in zircon nearly two orders faster along c.
	t.Run("He in zircon along c", func(t *testing.T) {
		temp := celsius(300)
		ratio := diffusivity(t, "zircon-he-cherniak2009-parc", nil, temp) / diffusivity(t, "zircon-he-cherniak2009-perpc", nil, temp)
		within(t, "ratio", ratio, 30, 100)
	})
	t.Run("Mg in anorthite by four laws", magnesiumInAnorthite)
	t.Run("Fe-Mg in orthopyroxene by three laws", orthopyroxene)
	t.Run("closure of Pb in rutile", closureOfRutile)
}

// magnesiumInAnorthite: Costa et al. 2003 made their law at An95 from the mean of
// the two axes of LaTourrette & Wasserburg 1998; Van Orman et al. 2014 found
// agreement with them, taken as a factor of 1.5.
func magnesiumInAnorthite(t *testing.T) {
	an95 := Conditions{XAn: 0.95}
	for c := 1200.0; c <= 1400; c += 100 {
		log := func(key string) float64 { return math.Log10(diffusivity(t, key, an95, celsius(c))) }
		mean := (log("plagioclase-mg-latourrette1998-b") + log("plagioclase-mg-latourrette1998-c")) / 2
		within(t, "2003 law to the mean of the axes", log("plagioclase-mg-costa2003")-mean, -0.01, 0.01)
		within(t, "2014 law to the mean of the axes", log("plagioclase-mg-vanorman2014")-mean, -math.Log10(1.5), math.Log10(1.5))
	}
}

// orthopyroxene: three studies of Fe-Mg at Fs9, 1000 C and fO2 1e-7 Pa agree
// within a factor of 1.5.
func orthopyroxene(t *testing.T) {
	c := Conditions{FO2: 1e-7, XFe: 0.09}
	d := diffusivity(t, "orthopyroxene-femg-fsdependence", c, celsius(1000))
	for _, key := range []string{"orthopyroxene-femg-ganguly1994", "orthopyroxene-femg-dohmen2016"} {
		within(t, key, diffusivity(t, key, c, celsius(1000))/d, 1/1.5, 1.5)
	}
}

// closureOfRutile: Cherniak 2000, abstract, has Pb close near 600 C in grains of
// about 100 um. Dodson 1973, Contrib. Mineral. Petrol. 40, 259-274: a ball of radius
// a cooling at a rate s closes at
//
//	E/(R Tc) = ln(A D0 R Tc^2 / (a^2 E s)),  A = 55.
//
// At 10 C/Myr a radius of 50 um gives 607 C and one of 100 um 642 C by hand.
func closureOfRutile(t *testing.T) {
	law := lawAt(t, find(t, "rutile-pb-cherniak2000"), nil).Terms[0]
	closure := func(a float64) float64 {
		const rate = 10 / (1e6 * thermal.Year)
		temp := celsius(600)
		for range 50 {
			temp = law.E / (math.Log(55*temp*temp/(a*a*law.E*rate)) + law.LnA)
		}
		return temp - thermal.ZeroCelsius
	}
	within(t, "50 um, C", closure(50e-6), 606.5, 607.5)
	within(t, "100 um, C", closure(100e-6), 641.5, 642.5)
}
