package paths

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"bankfire/paths/study"
)

// What a profile cannot know is said in a sentence, and its shift factor has no
// limit on that side.
func TestKnowing(t *testing.T) {
	rng := func() *rand.Rand { return rand.New(rand.NewPCG(41, 1)) }
	fine, homogenised := drawFine(reproduces)(rng()).study, drawHomogenised(reproduces)(rng()).study
	flat := drawHomogenised(reproduces)(rng()).study
	flat.Crystals[0].Elements[0].Start.Zones = []study.Plateau{unknown, unknown}
	resolved := drawFree(usualProbe())(rng()).study
	edged := drawFree(usualProbe())(rng()).study // whose edge may have been as wide from the start
	edged.Crystals[0].Elements[0].Start.Edge = study.Nuisance{Lo: 0, Hi: 14 * um}
	const (
		upper = "this profile fits without any diffusion, start edge and spot included: it gives only an upper limit on the amount of diffusion"
		lower = "this profile fits after diffusion without end: it gives only a lower limit on the amount of diffusion"
		none  = "no information: this profile fits without any diffusion as well as after diffusion without end"
	)
	for _, test := range []struct {
		name         string
		study        *study.Study
		sentence     string // "" if there is none
		below, above bool   // whether the shift factor has a limit there
	}{
		{"a profile that is resolved", resolved, "", true, true},
		{"finer than its spot", fine, upper, false, true},
		{"as wide as its start may have been", edged, upper, false, true},
		{"homogenised", homogenised, lower, true, false},
		{"flat, and nothing known of the start", flat, none, false, false},
	} {
		t.Run(test.name, func(t *testing.T) {
			r := weighed(t, test.study)
			o := &r.Paths[0].Outcome
			if o.Verdict != Reproduces {
				t.Errorf("%s, want that the truth reproduces", o.Verdict)
			}
			if below, above := o.Shift95[0] > 0, !math.IsInf(o.Shift95[1], 1); below != test.below || above != test.above {
				t.Errorf("shift factor from %g to %g, want a limit below: %v, above: %v", o.Shift95[0], o.Shift95[1], test.below, test.above)
			}
			if !(o.Shift95[0] <= 1 && 1 <= o.Shift95[1]) {
				t.Errorf("shift factor from %g to %g does not hold the truth", o.Shift95[0], o.Shift95[1])
			}
			all := strings.Join(r.Own[0].Findings, "\n")
			for _, sentence := range []string{upper, lower, none} {
				if got, want := strings.Contains(all, sentence), sentence == test.sentence; got != want {
					t.Errorf("findings %q; %q among them: %v, want %v", all, sentence, got, want)
				}
			}
		})
	}
}
