package diffusion

import (
	"math"
	"testing"
)

// TestOwnTable compares the polynomials with the function that they stand for,
// within the values stated and beyond, and wants them in use where it is smooth
// but nowhere near a kink or a jump.
func TestOwnTable(t *testing.T) {
	for _, test := range []struct {
		name  string
		own   func(c float64) float64
		least int // panels in use
	}{
		{"1", func(float64) float64 { return 1 }, ownPanels},
		{"exp(3.4 C)", growing(3.4), ownPanels},
		{"exp(-3.4 C)", growing(-3.4), ownPanels},
		{"exp(50 C)", growing(50), 0},
		{"C^1.5", power(1.5), ownPanels * 3 / 4}, // towards 0 no polynomial is near enough
		{"kink", func(c float64) float64 { return 1 + math.Abs(c-0.3) }, ownPanels - 2},
		{"jump", func(c float64) float64 { return math.Floor(2.7*c) + 1 }, ownPanels - 3},
		{"NaN above 0.5", func(c float64) float64 { return math.Sqrt(0.5 - c) }, ownPanels / 5},
	} {
		p := slabOf(testSize, nothing, 1, 0, 1)
		table := (&Problem{Zones: p.Zones, Own: test.own}).layOwn([]float64{0, 1})
		used := 0
		for _, f := range table.panels {
			if !math.IsNaN(f[0]) {
				used++
			}
		}
		if used < test.least {
			t.Errorf("%s: %d panels are in use, want %d", test.name, used, test.least)
		}
		r := source(59, used)
		for range 5000 {
			c, got := []float64{1.5*r.Float64() - 0.25}, []float64{0}
			table.look(got, c)
			want := test.own(max(c[0], 0))
			if !(math.Abs(got[0]-want) <= 2*ownError*want) && !(math.IsNaN(want) && math.IsNaN(got[0])) { // between the places that were tried
				t.Fatalf("%s: %.17g at %g, want %.17g", test.name, got[0], c[0], want)
			}
		}
	}
}
