package catalogue

import (
	"errors"
	"math"
	"testing"

	"bankfire/thermal"
)

// sameLaw is what round-off may leave of ln D.
const sameLaw = 1e-10

// By hand from the formulas of Huebner & Sato 1970 and Frost 1991 as the
// project's notes have them, in bar, plus 5: NNO at 1000 K and 1 bar is
// -24.93 + 9.36 = -15.57, and 2000 bar more add 0.046 x 2000/1000 = 0.092; QFM is
// -25.0963 + 8.735 = -16.3613, and 0.220 more.
func TestBuffers(t *testing.T) {
	for _, test := range []struct {
		name             string
		offset, pressure float64
		want             float64
	}{
		{"NNO", 0, 1e5, -15.57 + 5},
		{"NNO", 0.3, 2001e5, -15.57 + 0.092 + 0.3 + 5},
		{"QFM", 0, 1e5, -16.3613 + 5},
		{"FMQ", -1, 2001e5, -16.3613 + 0.22 - 1 + 5},
	} {
		b, ok := FindBuffer(test.name)
		if !ok {
			t.Fatalf("no %s", test.name)
		}
		got := b.Fugacity(test.offset, test.pressure).Log10(1000)
		if !(math.Abs(got-test.want) <= sameLaw) {
			t.Errorf("%s%+g at %g Pa: log10 fO2 %g, want %g", test.name, test.offset, test.pressure, got, test.want)
		}
		if cautions := b.Cautions(); len(cautions) != 1 {
			t.Errorf("%s: cautions %q", test.name, cautions)
		}
	}
	if _, ok := FindBuffer("nno"); ok {
		t.Error("found a buffer of no known name")
	}
}

// TestLawAlong compares a law along a buffer with the law at the fO2 that the
// buffer has at each temperature, which is another road to it.
func TestLawAlong(t *testing.T) {
	b, _ := FindBuffer("NNO")
	const pressure = 3e8
	f := b.Fugacity(0.7, pressure)
	for _, key := range []string{"olivine-ca-coogan2005-a", "olivine-ni-petry2004", "orthopyroxene-femg-dohmen2016"} {
		row, err := Find(key)
		if err != nil {
			t.Fatal(err)
		}
		along, err := row.LawAlong(Conditions{Pressure: pressure, FO2: 1}, f)
		if err != nil {
			t.Fatal(err)
		}
		for _, temp := range []float64{900, 1200, 1600} {
			here, err := row.Law(Conditions{Pressure: pressure, FO2: math.Pow(10, f.Log10(temp))})
			if err != nil {
				t.Fatal(err)
			}
			if diff := along.LnD(temp) - here.LnD(temp); !(math.Abs(diff) <= sameLaw) {
				t.Errorf("%s at %g K: off by %g", key, temp, diff)
			}
		}
	}
}

func TestLawAlongNeeds(t *testing.T) {
	row, _ := Find("olivine-ni-petry2004")
	_, err := row.LawAlong(nil, Fugacity{})
	var in *thermal.InputError
	if !errors.As(err, &in) || in.Field != Pressure {
		t.Errorf("error %v, want that pressure is not given", err)
	}
	if _, err := row.LawAlong(Conditions{Pressure: 1e5}, Fugacity{Const: math.NaN()}); !errors.As(err, &in) || in.Field != FO2 {
		t.Errorf("error %v, want one of fO2", err)
	}
	plain, _ := Find("quartz-ti-cherniak2007")
	along, err := plain.LawAlong(Conditions{FO2: -1}, Fugacity{Const: 3})
	law, _ := plain.Law(nil)
	if err != nil || along.Terms[0] != law.Terms[0] {
		t.Errorf("a law without fO2: %v, %v", along, err)
	}
}
