package thermal

import (
	"math"
	"testing"
)

// TestLongestAbove: the ends follow by hand from straight lines, and from ln for the relaxation.
func TestLongestAbove(t *testing.T) {
	hold := func(c, years float64) Leg { return Leg{Kind: Hold, T0: c + ZeroCelsius, For: years * Year} }
	ramp := func(c0, c1, years float64) Leg {
		return Leg{Kind: Ramp, T0: c0 + ZeroCelsius, T1: c1 + ZeroCelsius, For: years * Year}
	}
	rows := func(years, c []float64) Leg {
		r := &Rows{}
		for i := range years {
			r.Time, r.Temp = append(r.Time, years[i]*Year), append(r.Temp, c[i]+ZeroCelsius)
		}
		return Leg{Kind: Table, Rows: r}
	}
	relax := Leg{Kind: Relax, T0: 800 + ZeroCelsius, T1: 700 + ZeroCelsius, Tau: 10 * Year, For: 100 * Year}
	for _, test := range []struct {
		name       string
		legs       []Leg
		eruption   float64 // yr, 0 = the end
		start, end float64 // yr, above 750 C
	}{
		{"never", []Leg{hold(700, 10)}, 0, 0, 0},
		{"at it is not above", []Leg{hold(750, 10)}, 0, 0, 0},
		{"throughout", []Leg{hold(760, 10), hold(770, 5)}, 0, 0, 15},
		{"the longer of two", []Leg{hold(760, 3), hold(700, 1), hold(770, 5), hold(700, 9)}, 0, 4, 9},
		{"over the legs of a reheat", []Leg{ramp(700, 800, 2), hold(800, 3), relax}, 0, 1, 5 + 10*math.Ln2},
		{"a dip to it for a moment", []Leg{ramp(800, 750, 4), ramp(750, 800, 4)}, 0, 0, 8},
		{"a dip below it", []Leg{ramp(800, 700, 4), ramp(700, 800, 6)}, 0, 7, 10},
		{"cut by the eruption", []Leg{hold(760, 3), hold(700, 1), hold(770, 5)}, 6, 0, 3},
		{"within a table", []Leg{hold(700, 1), rows([]float64{0, 2, 4, 6, 6, 9, 10}, []float64{700, 800, 700, 760, 780, 760, 740})}, 0, 1 + 4 + 2*5./6, 1 + 9.5},
		{"a table cut by the eruption", []Leg{rows([]float64{0, 10}, []float64{740, 760})}, 7, 5, 7},
	} {
		t.Run(test.name, func(t *testing.T) {
			var h History
			if err := h.Set(test.legs); err != nil {
				t.Fatal(err)
			}
			if test.eruption > 0 {
				if err := h.SetEruption(test.eruption * Year); err != nil {
					t.Fatal(err)
				}
			}
			start, end := h.LongestAbove(750 + ZeroCelsius)
			const tol = 2e-8 // yr: what round-off of temperatures near 1000 K leaves where they change by some 10 K a year
			if !(math.Abs(start/Year-test.start) <= tol) || !(math.Abs(end/Year-test.end) <= tol) {
				t.Errorf("from %.12g to %.12g yr, want %.12g to %.12g", start/Year, end/Year, test.start, test.end)
			}
		})
	}
}

// TestLongestAboveOfOne: where there is one stretch, it is the time above.
func TestLongestAboveOfOne(t *testing.T) {
	s := Sheet{Magma: 1273, Host: 473, Thickness: 20, Position: 15, Kappa: 1e-6}
	var h History
	if err := h.Set([]Leg{{Kind: SheetCooling, Sheet: &s, For: 100 * Year}}); err != nil {
		t.Fatal(err)
	}
	for _, temp := range []float64{480, 500, 550, 600, 700, 1300} {
		start, end := h.LongestAbove(temp)
		if want := h.TimeAbove(temp); !(math.Abs(end-start-want) <= 1e-12*h.Life()) {
			t.Errorf("above %g K from %g to %g s, want %g s long", temp, start, end, want)
		}
	}
}
