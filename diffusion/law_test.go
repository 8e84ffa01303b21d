package diffusion

import (
	"math"
	"testing"

	"bankfire/thermal"
)

// TestLnIntegralAbove: along holds the parts of G are D x t, by hand, for the sum of both terms of a law.
func TestLnIntegralAbove(t *testing.T) {
	law := Law{Terms: []Arrhenius{
		NewLaw(1e-9, 250e3).Terms[0],
		NewLaw(1e-16, 100e3).Terms[0], // the larger one below 834 C
		NewLaw(0, 300e3).Terms[0],     // nothing
	}}
	d := func(temp float64) float64 {
		rt := thermal.GasConstant * temp
		return 1e-9*math.Exp(-250e3/rt) + 1e-16*math.Exp(-100e3/rt)
	}
	h := newHistory(t, thermal.Leg{Kind: thermal.Hold, For: 1e9, T0: 900}, thermal.Leg{Kind: thermal.Hold, For: 1e7, T0: 1200})
	for _, test := range []struct {
		name       string
		temp, want float64
	}{
		{"all", 800, 1e9*d(900) + 1e7*d(1200)},
		{"the hot leg", 900, 1e7 * d(1200)},
		{"none", 1200, 0},
	} {
		t.Run(test.name, func(t *testing.T) {
			const tol = 1e-12 // rounding of e/T of 33
			got, want := law.LnIntegralAbove(h, test.temp), math.Log(test.want)
			if !(math.Abs(got-want) <= tol) && got != want {
				t.Errorf("ln G above %g K: %.15g, want %.15g", test.temp, got, want)
			}
		})
	}
	if got := NewLaw(0, 300e3).LnIntegralAbove(h, 800); !math.IsInf(got, -1) {
		t.Errorf("where nothing diffuses: ln G %g", got)
	}
}
