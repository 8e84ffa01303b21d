package paths

import (
	"fmt"
	"math/rand/v2"
	"testing"

	"bankfire/paths/study"
	"bankfire/paths/traverse"
)

// A step much sharper than the spacing of the points says nothing of where it is
// until it lies between the right two: the fit looks everywhere.
func TestFreeOriginOfASharpStep(t *testing.T) {
	const most = 8 * um
	for _, origin := range []float64{-7.7 * um, 2 * um, 7.6 * um} {
		t.Run(fmt.Sprintf("%.1f um", origin/um), func(t *testing.T) {
			s, p := usualSlab(), usualProbe()
			s.reach, p.origin, p.spot = 0.05*um, origin, traverse.Spot{}
			p.from, p.to = p.from+0.2*um, p.to+0.2*um // no point on the step
			line := p.measure(rand.New(rand.NewPCG(31, 1)), s.seen)
			st := s.study(line, unknown, unknown)
			st.Crystals[0].Elements[0].Origin = study.Nuisance{Lo: -most, Hi: most}
			r := weighed(t, st)
			if r.Paths[0].Outcome.Verdict != Reproduces {
				t.Errorf("%s with chi-square %g, want reproduces", r.Paths[0].Outcome.Verdict, r.Paths[0].Outcome.Misfit)
			}
			for _, f := range r.Paths[0].Profiles[0].Free {
				if f.Name == "origin" {
					near(t, "origin", f.Value*um, origin, 0.6*um) // the spacing of the points
				}
			}
		})
	}
}
