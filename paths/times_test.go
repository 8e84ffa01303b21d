package paths

import (
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// A law of sigma 0.2, six times faster along c than across, with a factor of 10
// +- 3 of the user's, 30 deg from c (Crank 1975, The mathematics of diffusion,
// equation 2.45): D is 10 (3/4 + 1/24) of that along c, and ln D has the errors
// 0.2 ln 10 and 3/10.
func TestTimes(t *testing.T) {
	const promised = 0.01 // of shift factors
	text := strings.NewReplacer(`{ a = "across", b = "across", c = "along", normal`, `{ c = "along", ratio = 6, times = "10 +- 3", normal`).Replace(oblique)
	d := 10 * (0.75 + 0.25/6) * 7e-8 * math.Exp(-273e3/(thermal.GasConstant*(750+thermal.ZeroCelsius)))
	reach := 2 * math.Sqrt(d*1000*thermal.Year)
	r := weighed(t, readWith(t, text, func(x float64) float64 { return 60 + 30*math.Erf(x/reach) }))
	if o := r.Paths[0].Outcome; o.Verdict != Reproduces {
		t.Errorf("verdict %s", o.Verdict)
	} else {
		near(t, "shift factor", o.Shift, 1, promised)
	}
	if notes := r.Paths[0].Profiles[0].Notes; !slices.Contains(notes, "along: D times 10 +- 3, yours") {
		t.Errorf("notes %q", notes)
	}
	if len(r.Laws) != 1 || r.Laws[0].Key != "along" {
		t.Fatalf("laws %+v", r.Laws)
	}
	near(t, "error of ln D", r.Laws[0].LnD, math.Sqrt(math.Pow(0.2*math.Ln10, 2)+0.09), exact)
}
