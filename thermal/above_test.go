package thermal

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// TestLnArrheniusAboveClosed compares with what can be said by hand: sums of holds.
func TestLnArrheniusAboveClosed(t *testing.T) {
	const e = 30000.0
	hold := func(temp, dt float64) float64 { return dt * math.Exp(-e/temp) }
	steps := []Leg{{Kind: Hold, For: 3, T0: 900}, {Kind: Hold, For: 5, T0: 1000}, {Kind: Hold, For: 7, T0: 950}}
	rows := &Rows{Time: []float64{0, 3, 3, 8, 8, 15}, Temp: []float64{900, 900, 1000, 1000, 950, 950}}
	for _, test := range []struct {
		name string
		legs []Leg
		temp float64
		want float64
	}{
		{"all", steps, 899, hold(900, 3) + hold(1000, 5) + hold(950, 7)},
		{"a hold at the temperature is not above it", steps, 900, hold(1000, 5) + hold(950, 7)},
		{"the hottest", steps, 999, hold(1000, 5)},
		{"none", steps, 1000, 0},
		{"steps of a table", []Leg{{Kind: Table, Rows: rows}}, 920, hold(1000, 5) + hold(950, 7)},
		{"a table cut short", []Leg{{Kind: Table, Rows: rows, For: 9}}, 920, hold(1000, 5) + hold(950, 1)},
		{"a table never so hot", []Leg{{Kind: Table, Rows: rows}}, 1000, 0},
	} {
		t.Run(test.name, func(t *testing.T) {
			closeTo(t, "ln", set(t, test.legs).LnArrheniusAbove(e, 0, test.temp), math.Log(test.want), 1e-14*e/900)
		})
	}
}

// TestLnArrheniusAboveGoesOnAfterEruption: cooling after it counts.
func TestLnArrheniusAboveGoesOnAfterEruption(t *testing.T) {
	h := set(t, []Leg{{Kind: Hold, For: 3, T0: 900}, {Kind: Hold, For: 5, T0: 1000}})
	if err := h.SetEruption(4); err != nil {
		t.Fatal(err)
	}
	closeTo(t, "ln of the time", h.LnArrheniusAbove(0, 0, 950), math.Log(5), 1e-15)
}

// TestLnArrheniusAboveAgainstQuadrature: on random legs the integral above a temperature is that by gonum's Gauss-Legendre
// rule over the stretches that dense samples and bisection find.
func TestLnArrheniusAboveAgainstQuadrature(t *testing.T) {
	// As a share of the whole: what the quadrature leaves, see TestAgainstQuadrature, and what a crossing found by
	// bisection is off where the curve is flat.
	const tol = 1e-9
	r := rand.New(rand.NewPCG(2, 13))
	kinds := map[Kind]int{}
	for n := range 250 {
		l := randomLeg(r)
		e, k := between(r, -5000, 60000), r.IntN(2)
		lo, hi := l.Range()
		temp := between(r, lo, hi)
		if l.Kind != Hold && hi-lo < 1 {
			continue // far from a sheet, where rounding of the temperature decides when it is reached
		}
		h := set(t, []Leg{l})
		whole, want := h.LnArrhenius(e, k, 0, h.Life()), 0.0
		leg := &h.Legs()[0]
		for _, part := range hotParts(leg, temp) {
			want += math.Exp(panels(leg, e, k, part[0], part[1]) - whole)
		}
		got := math.Exp(h.LnArrheniusAbove(e, k, temp) - whole)
		closeTo(t, fmt.Sprintf("%d: %v, e = %g, k = %d, above %g K", n, l, e, k, temp), got, want, tol)
		if want > 0.01 && want < 0.99 {
			kinds[l.Kind]++
		}
	}
	for kind := Ramp; kind <= Table; kind++ {
		if kinds[kind] < 5 {
			t.Errorf("only %d of the legs of kind %s are split so that it matters", kinds[kind], kind)
		}
	}
}

// TestLnArrheniusAboveFalls: from the whole integral to nothing, never rising, the parts of a path adding up.
func TestLnArrheniusAboveFalls(t *testing.T) {
	const tol = 1e-11 // of the whole: sheets, see LnArrhenius, whose quadrature depends on where it starts
	r := rand.New(rand.NewPCG(2, 14))
	for n := range 60 {
		h := randomHistory(t, r)
		e := between(r, 0, 60000)
		lo, hi := h.Range()
		whole := h.LnArrhenius(e, 0, 0, h.Life())
		closeTo(t, fmt.Sprintf("path %d: above less than its lowest temperature", n), h.LnArrheniusAbove(e, 0, lo-1), whole, tol)
		if got := h.LnArrheniusAbove(e, 0, hi); !math.IsInf(got, -1) {
			t.Errorf("path %d: ln %g above its highest temperature", n, got)
		}
		last := 1.0
		for i := range 100 {
			temp := lo + (hi-lo)*float64(i)/100
			share := math.Exp(h.LnArrheniusAbove(e, 0, temp) - whole)
			if !(share <= last+tol) {
				t.Errorf("path %d: rises from %g to %g at %g K", n, last, share, temp)
			}
			last = share
		}
	}
}
