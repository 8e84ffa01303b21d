package paths

import (
	"strings"
	"testing"
)

// A concentration below zero by more than the numerical error is measured and
// said; the same within the error is not.
func TestBelowZero(t *testing.T) {
	c := sharp()
	s := c.study(nil, c.path(t, "as it was", 1))
	p, r, err := audited(&element{crystal: &s.Crystals[0], element: &s.Crystals[0].Elements[0]}, &s.Paths[0], 0)
	if err != nil {
		t.Fatal(err)
	}
	if r.BelowZero != 0 || !r.Settled {
		t.Fatalf("a sound path is %g below zero, settled %t", r.BelowZero, r.Settled)
	}
	a := amounts{scale: 1, values: []float64{-3, 5}} // the core is at -3 ppm
	if got := p.belowZero([]float64{0}, a); !(got > 2.9 && got <= 3) {
		t.Errorf("a core at -3 ppm is %g below zero", got)
	}
	r.BelowZero, r.Settled = 3, false
	notes := strings.Join(r.notes(&s.Paths[0]), "\n")
	for _, want := range []string{"3 ppm below zero", "did not settle"} {
		if !strings.Contains(notes, want) {
			t.Errorf("notes %q lack %q", notes, want)
		}
	}
}
