package paths

import (
	"math"
	"testing"

	"bankfire/paths/study"
)

// A path that the user rules out has no numbers, not even zeros, which would be
// read as a perfect misfit; the others are judged as without it.
func TestWeighOfABarredPath(t *testing.T) {
	p := sharp()
	s := p.study(nil, p.path(t, "as it was", 1), p.path(t, "ten times as long", 0.1))
	s.Limits = study.Limits{Life: [2]float64{0, 2 * s.Paths[0].History.Life()}}
	r := weighed(t, s)
	o := &r.Paths[1].Outcome
	if o.Verdict != Barred || len(r.Paths[1].Barred) != 1 || len(r.Paths[1].Profiles) != 0 {
		t.Errorf("%s for %q with %d profiles, want barred with none", o.Verdict, r.Paths[1].Barred, len(r.Paths[1].Profiles))
	}
	for name, x := range map[string]float64{
		"shift": o.Shift, "68 %, lower": o.Shift68[0], "68 %, upper": o.Shift68[1], "95 %, lower": o.Shift95[0], "95 %, upper": o.Shift95[1],
		"tail": o.Tail, "misfit": o.Misfit, "above": o.Above,
	} {
		if !math.IsNaN(x) {
			t.Errorf("%s of a path that was not run is %g", name, x)
		}
	}
	if v := r.Paths[0].Outcome.Verdict; v != Reproduces {
		t.Errorf("the other path: %s, want reproduces", v)
	}
}
