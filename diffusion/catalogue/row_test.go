package catalogue

import (
	"errors"
	"math"
	"slices"
	"testing"

	"bankfire/thermal"
)

func find(t *testing.T, key string) *Row {
	t.Helper()
	row, err := Find(key)
	if err != nil {
		t.Fatal(err)
	}
	return row
}

func TestNeeds(t *testing.T) {
	for _, test := range []struct {
		key  string
		want []string
	}{
		{"quartz-ti-cherniak2007", nil},
		{"plagioclase-sr-giletti1994", []string{XAn}},
		{"plagioclase-mg-faak2013", []string{ASiO2}},
		{"garnet-fe-ganguly1998", []string{Pressure}},
		{"olivine-ca-coogan2005-a", []string{FO2}},
		{"olivine-femg-dohmen2007-tamed", []string{Pressure, FO2, XFe}},
	} {
		t.Run(test.key, func(t *testing.T) {
			if got := find(t, test.key).Needs(); !slices.Equal(got, test.want) {
				t.Errorf("needs %q, want %q", got, test.want)
			}
		})
	}
}

func TestMissingCondition(t *testing.T) {
	all := Conditions{Pressure: 1e5, FO2: 1e-7, XAn: 0.5, XFe: 0.1, ASiO2: 1}
	for _, r := range All() {
		for _, name := range r.Needs() {
			c := Conditions{}
			for n, x := range all {
				if n != name {
					c[n] = x
				}
			}
			var in *thermal.InputError
			if law, err := r.Law(c); !errors.As(err, &in) || in.Field != name || law.Terms != nil {
				t.Errorf("%s without %s: %v, %v", r.Key, name, law, err)
			}
		}
		if _, err := r.Law(all); err != nil {
			t.Errorf("%s: %v", r.Key, err)
		}
	}
}

func TestImpossibleConditions(t *testing.T) {
	row := find(t, "quartz-ti-cherniak2007")
	for _, test := range []struct {
		name string
		x    float64
		bad  bool
	}{
		{Pressure, -1, true}, {Pressure, 0, false}, {Pressure, math.Inf(1), true},
		{FO2, 0, true}, {FO2, 1e-300, false}, {FO2, math.NaN(), true},
		{XAn, -0.01, true}, {XAn, 0, false}, {XAn, 1, false}, {XAn, 1.01, true}, {XAn, math.NaN(), true},
		{XFe, 50, true}, {ASiO2, 0, true}, {ASiO2, 1.2, false}, {ASiO2, 11, true}, {Pressure, 2e12, true}, {FO2, 2e12, true}, {ASiO2, math.Inf(1), true},
	} {
		_, err := row.Law(Conditions{test.name: test.x})
		var in *thermal.InputError
		if test.bad != (errors.As(err, &in) && in.Field == test.name) {
			t.Errorf("%s = %g: %v", test.name, test.x, err)
		}
	}
}

func TestUnknownConditionPanics(t *testing.T) {
	defer func() {
		if recover() == nil {
			t.Error("no panic")
		}
	}()
	Conditions{"fo2": 1}.Check()
}

func TestExtrapolation(t *testing.T) {
	row := find(t, "quartz-ti-jollands2020") // 900 to 1490 C
	for _, test := range []struct {
		name                 string
		lo, hi, below, above float64 // C, C, K, K
	}{
		{"inside", 1000, 1200, 0, 0},
		{"the ends", 900, 1490, 0, 0},
		{"below", 690, 780, 210, 0},
		{"above", 1500, 1510, 0, 20},
		{"both", 800, 1500, 100, 10},
	} {
		t.Run(test.name, func(t *testing.T) {
			below, above := row.Extrapolation(celsius(test.lo), celsius(test.hi))
			const roundOff = 1e-9
			if !(math.Abs(below-test.below) <= roundOff && math.Abs(above-test.above) <= roundOff) {
				t.Errorf("got %g below and %g above, want %g and %g", below, above, test.below, test.above)
			}
		})
	}
	unknown := find(t, "plagioclase-sr-giletti1994")
	if below, above := unknown.Extrapolation(300, 2000); unknown.RangeKnown() || below != 0 || above != 0 {
		t.Errorf("without a range: %g below, %g above", below, above)
	}
}

func TestMiddle(t *testing.T) {
	// 900 and 1490 C: 1/T is 8.52405e-4 and 5.67166e-4 1/K by hand, the mean 7.09786e-4, T = 1408.88 K.
	temp, ok := find(t, "quartz-ti-jollands2020").Middle()
	if !ok || !(math.Abs(temp-1408.88) <= 0.02) {
		t.Errorf("middle is %g K, %v", temp, ok)
	}
	if _, ok := find(t, "plagioclase-sr-giletti1994").Middle(); ok {
		t.Error("a middle without a range")
	}
}

func TestCommand(t *testing.T) {
	for _, test := range []struct{ key, want string }{
		{"quartz-ti-cherniak2007", "bankfire laws quartz-ti-cherniak2007"},
		{"plagioclase-sr-giletti1994", "bankfire laws plagioclase-sr-giletti1994 --XAn 0.5"},
		{"olivine-femg-dohmen2007-tamed", `bankfire laws olivine-femg-dohmen2007-tamed --pressure "2 kbar" --fO2 "1e-7 Pa" --XFe 0.1`},
	} {
		t.Run(test.key, func(t *testing.T) {
			if got := find(t, test.key).Command(); got != test.want {
				t.Errorf("got %s, want %s", got, test.want)
			}
		})
	}
}
