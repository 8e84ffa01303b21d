package paths

import (
	"testing"
)

// A traverse that asks for a negative plateau gets one of zero, which costs no
// degree of freedom, and is told where to look.
func TestNoConcentrationIsNegative(t *testing.T) {
	p := sharp()
	p.core, p.mantle = 40, -6 // nothing measures this, but a background taken off twice does
	r := weighed(t, p.study(nil, p.path(t, "as it was", 1)))
	path := &r.Paths[0]
	for _, f := range path.Profiles[0].Free {
		if f.Value < 0 {
			t.Errorf("%s comes out at %g", f.Name, f.Value)
		}
		if f.Name == "mantle" && !f.AtEnd {
			t.Errorf("mantle at %g is not said to be at the end of its range", f.Value)
		}
	}
	if want := p.points - 1; path.Outcome.Degrees != want {
		t.Errorf("%d degrees of freedom, want %d: the core is fitted, the mantle held", path.Outcome.Degrees, want)
	}
	if !(path.Outcome.Misfit > 1) {
		t.Errorf("chi-square %g of a plateau that cannot be", path.Outcome.Misfit)
	}
}
