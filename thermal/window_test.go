package thermal

import (
	"fmt"
	"math"
	"math/rand/v2"
	"sort"
	"testing"
)

// TestLnArrheniusInClosed compares with what can be said by hand: sums of holds.
func TestLnArrheniusInClosed(t *testing.T) {
	const e = 30000.0
	hold := func(temp, dt float64) float64 { return dt * math.Exp(-e/temp) }
	steps := []Leg{{Kind: Hold, For: 3, T0: 900, Setting: 1}, {Kind: Hold, For: 5, T0: 1000, Setting: 2}, {Kind: Hold, For: 7, T0: 950, Setting: 1}}
	rows := &Rows{Time: []float64{0, 3, 3, 8, 8, 15}, Temp: []float64{900, 900, 1000, 1000, 950, 950}}
	for _, test := range []struct {
		name   string
		legs   []Leg
		in     Window
		t0, t1 float64
		want   float64
	}{
		{"all", steps, Window{}, 0, 15, hold(900, 3) + hold(1000, 5) + hold(950, 7)},
		{"above a temperature", steps, Window{Above: 899}, 0, 15, hold(900, 3) + hold(1000, 5) + hold(950, 7)},
		{"a hold at the bound is not above it", steps, Window{Above: 900}, 0, 15, hold(1000, 5) + hold(950, 7)},
		{"but not hotter than it", steps, Window{Below: 950}, 0, 15, hold(900, 3) + hold(950, 7)},
		{"between", steps, Window{Above: 900, Below: 950}, 0, 15, hold(950, 7)},
		{"none", steps, Window{Above: 1000}, 0, 15, 0},
		{"one setting", steps, Window{Setting: 1}, 0, 15, hold(900, 3) + hold(950, 7)},
		{"part of it", steps, Window{Setting: 1}, 1, 10, hold(900, 2) + hold(950, 2)},
		{"a setting that no leg has", steps, Window{Setting: 3}, 0, 15, 0},
		{"one setting above a temperature", steps, Window{Setting: 1, Above: 920}, 0, 15, hold(950, 7)},
		{"steps of a table", []Leg{{Kind: Table, Rows: rows}}, Window{Above: 920}, 0, 15, hold(1000, 5) + hold(950, 7)},
		{"steps of a table, between", []Leg{{Kind: Table, Rows: rows}}, Window{Above: 920, Below: 960}, 0, 15, hold(950, 7)},
		{"a table cut short", []Leg{{Kind: Table, Rows: rows, For: 9}}, Window{Above: 920}, 0, 9, hold(1000, 5) + hold(950, 1)},
		{"part of a table", []Leg{{Kind: Table, Rows: rows}}, Window{Above: 920}, 5, 9, hold(1000, 3) + hold(950, 1)},
		{"a table never so hot", []Leg{{Kind: Table, Rows: rows}}, Window{Above: 1000}, 0, 15, 0},
	} {
		t.Run(test.name, func(t *testing.T) {
			closeTo(t, "ln", set(t, test.legs).LnArrheniusIn(e, 0, test.in, test.t0, test.t1), math.Log(test.want), 1e-14*e/900)
		})
	}
}

// TestLnArrheniusInGoesOnAfterEruption: cooling after it counts.
func TestLnArrheniusInGoesOnAfterEruption(t *testing.T) {
	h := set(t, []Leg{{Kind: Hold, For: 3, T0: 900}, {Kind: Hold, For: 5, T0: 1000}})
	if err := h.SetEruption(4); err != nil {
		t.Fatal(err)
	}
	closeTo(t, "ln of the time", h.LnArrheniusIn(0, 0, Window{Above: 950}, 0, h.Life()), math.Log(5), 1e-15)
}

// TestLnArrheniusInAgainstQuadrature: on random legs, and random parts of them, the integral in a window is that by gonum's
// Gauss-Legendre rule over the stretches that dense samples and bisection find.
func TestLnArrheniusInAgainstQuadrature(t *testing.T) {
	// As a share of the whole: what the quadrature leaves, see TestAgainstQuadrature, and what a crossing found by
	// bisection is off where the curve is flat.
	const tol = 1e-9
	r := rand.New(rand.NewPCG(2, 13))
	kinds := map[Kind]int{}
	for n := range 400 {
		l := randomLeg(r)
		e, k := between(r, -5000, 60000), r.IntN(2)
		lo, hi := l.Range()
		w := Window{Above: between(r, lo, hi)}
		if n%2 == 0 {
			w.Below = between(r, w.Above, hi)
		}
		if l.Kind != Hold && hi-lo < 1 {
			continue // far from a sheet, where rounding of the temperature decides when it is reached
		}
		h := set(t, []Leg{l})
		t0, t1 := 0.0, h.Life()
		if n%4 > 1 {
			t0 = between(r, 0, t1/2)
			t1 = between(r, t0, t1)
		}
		leg := &h.Legs()[0]
		whole := h.LnArrhenius(e, k, t0, t1)
		share := func(temp float64) (sum float64) {
			for _, part := range hotParts(leg, temp) {
				if a, b := math.Max(part[0], t0), math.Min(part[1], t1); a < b {
					sum += math.Exp(panels(leg, e, k, a, b) - whole)
				}
			}
			return sum
		}
		want := share(w.Above)
		if w.Below > 0 {
			want -= share(w.Below)
		}
		got := math.Exp(h.LnArrheniusIn(e, k, w, t0, t1) - whole)
		closeTo(t, fmt.Sprintf("%d: %v, e = %g, k = %d, %+v, %g to %g s", n, l, e, k, w, t0, t1), got, want, tol)
		if want > 0.01 && want < 0.99 {
			kinds[l.Kind]++
		}
	}
	for kind := Ramp; kind <= Table; kind++ {
		if kinds[kind] < 8 {
			t.Errorf("only %d of the legs of kind %s are split so that it matters", kinds[kind], kind)
		}
	}
}

// TestWindowsAddUp: whatever the bounds, settings and times, windows that leave no gap add up to the whole integral.
func TestWindowsAddUp(t *testing.T) {
	const tol = 1e-11 // of the whole: sheets, see LnArrhenius, whose quadrature depends on where it starts
	r := rand.New(rand.NewPCG(2, 14))
	for n := range 100 {
		h := randomHistory(t, r)
		legs := append([]Leg(nil), h.Legs()...)
		for i := range legs {
			legs[i].Setting = 1 + r.IntN(3)
		}
		h = set(t, legs)
		e := between(r, 0, 60000)
		lo, hi := h.Range()
		bounds := []float64{0, between(r, lo, hi), between(r, lo, hi), between(r, lo, hi), 0}
		sort.Float64s(bounds[1:4])
		t0 := between(r, 0, h.Life()/2)
		t1 := between(r, t0, h.Life())
		whole, sum := h.LnArrhenius(e, 0, t0, t1), 0.0
		for setting := range 4 {
			for i := range 4 {
				w := Window{Setting: setting, Above: bounds[i], Below: bounds[i+1]}
				if part := math.Exp(h.LnArrheniusIn(e, 0, w, t0, t1) - whole); setting > 0 {
					sum += part
				}
			}
		}
		closeTo(t, fmt.Sprintf("path %d: sum of all shares", n), sum, 1, tol)
		if got := h.LnArrheniusIn(e, 0, Window{Above: hi}, 0, h.Life()); !math.IsInf(got, -1) {
			t.Errorf("path %d: ln %g above its highest temperature", n, got)
		}
	}
}

// TestPasses: just before and just after each time named the path is on different sides of the temperature, unless a leg
// or a row ends there; and between two breaks or passages it is on one.
func TestPasses(t *testing.T) {
	const near = 1e-9 // of the path's life, where the temperature has not yet gone far
	r := rand.New(rand.NewPCG(2, 15))
	crossed := 0
	for n := range 60 {
		h := randomHistory(t, r)
		lo, hi := h.Range()
		temp := between(r, lo, hi)
		times := h.Passes(nil, temp)
		breaks := h.Breaks(nil)
		crossed += len(times)
		all := append(append([]float64(nil), times...), breaks...)
		sort.Float64s(all)
		for i := 1; i < len(all); i++ {
			a, b := all[i-1], all[i]
			if b-a < near*h.Life() {
				continue
			}
			early, _ := h.At(a + (b-a)*1e-3)
			late, _ := h.At(a + (b-a)*0.999)
			if (early > temp) != (late > temp) {
				t.Errorf("path %d: passes %g K between %g and %g s, from %g to %g K", n, temp, a, b, early, late)
			}
		}
	}
	if crossed < 60 {
		t.Errorf("only %d passages", crossed)
	}
}

// TestHolds: a temperature at a bound is at or below it.
func TestHolds(t *testing.T) {
	w := Window{Setting: 2, Above: 900, Below: 1000}
	for _, test := range []struct {
		setting int
		temp    float64
		want    bool
	}{{2, 950, true}, {2, 900, false}, {2, 1000, true}, {2, 1000.1, false}, {1, 950, false}, {0, 950, false}} {
		if got := w.Holds(test.setting, test.temp); got != test.want {
			t.Errorf("setting %d, %g K: %t, want %t", test.setting, test.temp, got, test.want)
		}
	}
	if !(Window{}).Holds(7, 1e4) {
		t.Error("the zero window does not hold everywhere")
	}
}

// TestSettings: all legs that a spec becomes have its setting, also when it is repeated, and the path says it at any time.
func TestSettings(t *testing.T) {
	cold := Spec{Kind: SpecHold, Temp: 900, For: 10, Setting: 1}
	hot := Spec{Kind: SpecReheat, Temp: 1000, Rise: 1, Dwell: 2, Efold: 1, For: 5, Setting: 2}
	h := built(t, cold, Spec{Kind: SpecRepeat, Times: 2, Legs: []Spec{hot, cold}, Setting: 9}, Spec{Kind: SpecRamp, Temp: 800, For: 10})
	var got []int
	for _, l := range h.Legs() {
		got = append(got, l.Setting)
	}
	if want := []int{1, 2, 2, 2, 1, 2, 2, 2, 1, 0}; fmt.Sprint(got) != fmt.Sprint(want) {
		t.Errorf("settings %v, want %v", got, want)
	}
	for _, test := range []struct {
		at   float64
		want int
	}{{-1, 1}, {0, 1}, {9.9, 1}, {10, 2}, {14.9, 2}, {15, 1}, {25, 2}, {40, 0}, {50, 0}, {99, 0}} {
		if got := h.Setting(test.at); got != test.want {
			t.Errorf("setting %d at %g s, want %d", got, test.at, test.want)
		}
	}
}
