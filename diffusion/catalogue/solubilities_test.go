package catalogue

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// The constants and the table are those of the project's notes on Ti in quartz,
// which evaluate the formulas as printed by a script of their own: ppm of Ti at
// aTiO2 = 1 to one decimal, at the pressure of the row, kbar; Wark and Watson at
// 10 kbar only.
func TestSolubilityTable(t *testing.T) {
	const (
		tenth = 0.0501 // half a unit of the last digit
		// The notes take R = 8.3145, 5e-6 more, of which the exponent of Thomas makes
		// seven times as much, and molar masses of 79.866 and 60.084, 2e-5 more.
		constants = 5e-5
	)
	keys := [4]string{"ti-quartz-wark2006", "ti-quartz-thomas2010", "ti-quartz-huang2012", "ti-quartz-zhang2020"}
	for _, row := range []struct {
		c, kbar float64
		ppm     [4]float64
	}{
		{700, 1, [4]float64{66.2, 412.6, 124.7, 205.1}},
		{700, 2, [4]float64{66.2, 332.8, 81.2, 145.2}},
		{700, 5, [4]float64{66.2, 174.5, 38.2, 84.9}},
		{700, 10, [4]float64{66.2, 59.5, 18.0, 52.7}},
		{750, 1, [4]float64{102.4, 602.5, 185.9, 287.8}},
		{750, 2, [4]float64{102.4, 491.1, 123.6, 207.2}},
		{750, 5, [4]float64{102.4, 265.8, 60.4, 124.4}},
		{750, 10, [4]float64{102.4, 95.5, 29.5, 79.1}},
		{800, 1, [4]float64{151.9, 849.3, 267.0, 391.3}},
		{800, 2, [4]float64{151.9, 698.8, 181.0, 286.1}},
		{800, 5, [4]float64{151.9, 389.2, 91.4, 175.9}},
		{800, 10, [4]float64{151.9, 146.7, 46.1, 114.2}},
		{900, 1, [4]float64{302.5, 1545.4, 502.3, 668.7}},
		{900, 2, [4]float64{302.5, 1292.9, 351.9, 502.1}},
		{900, 5, [4]float64{302.5, 757.1, 188.4, 321.8}},
		{900, 10, [4]float64{302.5, 310.2, 100.8, 216.7}},
	} {
		for i, key := range keys {
			at := saturated(t, key, Conditions{Pressure: row.kbar * 1e8, ATiO2: 1})
			got := at.PPM(celsius(row.c))
			if diff := got - row.ppm[i]; !(math.Abs(diff) <= tenth+constants*got) {
				t.Errorf("%s at %g C, %g kbar: %.3f ppm, want %g", key, row.c, row.kbar, got, row.ppm[i])
			}
		}
	}
}

func saturated(t *testing.T, key string, c Conditions) Content {
	t.Helper()
	s, err := FindSolubility(key)
	if err != nil {
		t.Fatal(err)
	}
	at, err := s.At(c)
	if err != nil {
		t.Fatal(err)
	}
	return at
}

// Ferry and Watson (2007), evaluated by hand at 800 C and activities of 0.5 and 0.6:
//
//	log10 Ti = 5.711 - 4800/1073.15 - log10 0.5 + log10 0.6 = 1.31737.
func TestTitaniumInZircon(t *testing.T) {
	const byHand, digits = 20.7668, 2e-4
	got := saturated(t, "ti-zircon-ferry2007", Conditions{ASiO2: 0.5, ATiO2: 0.6}).PPM(celsius(800))
	if !(math.Abs(got-byHand) <= digits) {
		t.Errorf("%.5f ppm, want %g", got, byHand)
	}
}

// What every relation promises: words, activities as factors, and a slope that is
// the derivative.
func TestSolubilities(t *testing.T) {
	const (
		h        = 0.01 // K, of the central difference
		relative = 1e-6 // h^2/6 times the third derivative is far below it, its rounding 1e-16/(h slope) too
		linear   = 1e-3 // the mole fraction is a few thousandths, and the mass of the mineral hardly changes
	)
	all := Solubilities()
	if !slices.IsSortedFunc(all, func(a, b Solubility) int { return strings.Compare(a.Key, b.Key) }) {
		t.Error("not sorted by key")
	}
	for _, s := range all {
		t.Run(s.Key, func(t *testing.T) {
			if !strings.HasPrefix(s.Key, strings.ToLower(s.Element)+"-"+s.Mineral+"-") || s.Citation == "" {
				t.Errorf("relation %+v", s)
			}
			known, _, _ := strings.Cut(s.Confidence, ":")
			if known != "confirmed" && known != "memory" || (known == "confirmed") != (s.Cautions() == nil) {
				t.Errorf("confidence %q, cautions %q", s.Confidence, s.Cautions())
			}
			if s.TMax < s.TMin || s.PMax < s.PMin || s.RangeKnown() != (s.TMax > s.TMin) {
				t.Errorf("ranges %g to %g K, %g to %g Pa", s.TMin, s.TMax, s.PMin, s.PMax)
			}
			at := saturated(t, s.Key, Conditions{Pressure: 2e8, ATiO2: 1, ASiO2: 1})
			temp := celsius(750)
			slope := (math.Log(at.PPM(temp+h)) - math.Log(at.PPM(temp-h))) / (2 * h)
			if got := at.Slope(temp); !(math.Abs(got/slope-1) <= relative) {
				t.Errorf("slope %g, want %g", got, slope)
			}
			half := saturated(t, s.Key, Conditions{Pressure: 2e8, ATiO2: 0.5, ASiO2: 1})
			if got := half.PPM(temp) / at.PPM(temp); !(math.Abs(got/0.5-1) <= linear) {
				t.Errorf("half the activity gives %g of the content", got)
			}
			if a, ok := at.Exponential(); ok != !s.Moles || ok && math.Exp(a.LnA-a.E/temp) != at.PPM(temp) {
				t.Errorf("exponential %v %v", a, ok)
			}
		})
	}
}

func TestSolubilityWrong(t *testing.T) {
	for _, test := range []struct {
		key   string
		c     Conditions
		field string
	}{
		{"ti-quartz-huang2012", Conditions{Pressure: 2e8}, ATiO2},
		{"ti-quartz-huang2012", Conditions{ATiO2: 1}, Pressure},
		{"ti-quartz-huang2012", Conditions{ATiO2: 0, Pressure: 2e8}, ATiO2},
		{"ti-quartz-thomas2010", Conditions{ATiO2: 1, Pressure: math.NaN()}, Pressure},
		{"ti-zircon-ferry2007", Conditions{ATiO2: 1}, ASiO2},
	} {
		s, err := FindSolubility(test.key)
		if err != nil {
			t.Fatal(err)
		}
		_, err = s.At(test.c)
		var in *thermal.InputError
		if !errors.As(err, &in) || in.Field != test.field || in.Remedy == "" {
			t.Errorf("%s at %v: error %v, want one of %s", test.key, test.c, err, test.field)
		}
	}
	_, err := FindSolubility("ti-quartz-huang")
	var in *thermal.InputError
	if !errors.As(err, &in) || !strings.Contains(in.Remedy, "ti-quartz-huang2012") {
		t.Errorf("error %v, want one that names the nearest key", err)
	}
}
