package thermal

import (
	"fmt"
	"math"
	"testing"
)

// TestSheetLimits: at the first instant the inside is magma, the contact the mean, the outside host; a million cooling
// times later all is host.
func TestSheetLimits(t *testing.T) {
	const ulp = 2.3e-13 // of 1000 K
	for x, want := range map[float64]float64{0: 1273.15, 9.999: 1273.15, -9.999: 1273.15, 10: 823.15, -10: 823.15, 10.001: 373.15, 1e6: 373.15} {
		s := Sheet{Magma: 1273.15, Host: 373.15, Thickness: 20, Position: x, Kappa: 1e-6}
		closeTo(t, fmt.Sprintf("x = %g, t = 0", x), s.At(0), want, ulp)
		closeTo(t, fmt.Sprintf("x = %g, before", x), s.At(-1), want, ulp)
		closeTo(t, fmt.Sprintf("x = %g, just after", x), s.At(1e-9), want, 1e-12)
		closeTo(t, fmt.Sprintf("x = %g, long after", x), s.At(4e8*1e12), 373.15, 1) // 900 K x 2a/sqrt(4 pi kappa t)
	}
}

// TestSheetPeak: outside, the slope changes sign at the peak; the wave reaches x at about x^2/(2 kappa) far away.
func TestSheetPeak(t *testing.T) {
	for _, x := range []float64{10.01, 11, 15, 40, 1000} {
		s := Sheet{Magma: 1273.15, Host: 373.15, Thickness: 20, Position: x, Kappa: 1e-6}
		peak := s.peak()
		before, at, after := s.At(peak*0.999), s.At(peak), s.At(peak*1.001)
		if !(before < at && at > after) {
			t.Errorf("x = %g: %g K, %g K at the peak, %g K", x, before, at, after)
		}
	}
	far := Sheet{Magma: 1273.15, Host: 373.15, Thickness: 1, Position: 1000, Kappa: 1e-6}
	// a plane source: sqrt(2 kappa t) = x, with corrections of the order (a/x)^2
	closeTo(t, "far peak", far.peak(), 1e6/2e-6, 1e-6*1e6/2e-6)
}

// TestSheetMirrored: both sides of the middle plane are alike.
func TestSheetMirrored(t *testing.T) {
	for _, x := range []float64{0.3, 10, 17} {
		right := Leg{Kind: SheetCooling, For: 1e9, Sheet: &Sheet{1273.15, 373.15, 20, x, 1e-6}}
		left := Leg{Kind: SheetCooling, For: 1e9, Sheet: &Sheet{1273.15, 373.15, 20, -x, 1e-6}}
		if a, b := right.LnArrhenius(3e4, 0, 0, 1e9), left.LnArrhenius(3e4, 0, 0, 1e9); a != b {
			t.Errorf("x = %g: ln of the integral %g on the right, %g on the left", x, a, b)
		}
		if a, b := right.TimeAbove(700), left.TimeAbove(700); a != b {
			t.Errorf("x = %g: above 700 K for %g s on the right, %g s on the left", x, a, b)
		}
	}
}

// TestSheetAboveHost: however long it takes, an intrusion never falls to its host, and its host is never below itself.
func TestSheetAboveHost(t *testing.T) {
	for _, x := range []float64{0, 10, 12, 500} {
		l := Leg{Kind: SheetCooling, For: 1e12, Sheet: &Sheet{1273.15, 373.15, 20, x, 1e-6}}
		closeTo(t, fmt.Sprintf("x = %g, above the host", x), l.TimeAbove(373.15), 1e12, 0)
		closeTo(t, fmt.Sprintf("x = %g, above less", x), l.TimeAbove(300), 1e12, 0)
		closeTo(t, fmt.Sprintf("x = %g, above the magma", x), l.TimeAbove(1273.15), 0, 0)
		_, hi := l.Range()
		closeTo(t, fmt.Sprintf("x = %g, above the highest", x), l.TimeAbove(hi), 0, 0)
		if just := l.TimeAbove(math.Nextafter(hi, 0)); !(just >= 0 && just < 1e12) {
			t.Errorf("x = %g: %g s above less than an ulp below the highest", x, just)
		}
	}
}
