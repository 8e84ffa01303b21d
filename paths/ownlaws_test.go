package paths

import (
	"testing"

	"bankfire/diffusion"
)

// Two elements that want amounts of diffusion apart by a factor of 20 agree if
// each law may deviate by itself, and cannot if they rest on one. Laws written
// with their elements are two, also where their errors are the same.
func TestWeighTellsLawsWithoutAKeyApart(t *testing.T) {
	const sigma, apart = 0.6, 20 // of log10 D; log10 20 is 1.3
	p := sharp()
	for _, test := range []struct {
		name, key string
		laws      int
		want      Verdict
	}{
		{"one law by name", "mine", 1, AtOdds},
		{"two laws without a name", "", 2, Reproduces},
	} {
		t.Run(test.name, func(t *testing.T) {
			s := p.study(nil, p.path(t, "as it was", 1))
			first := &s.Crystals[0].Elements[0]
			first.Law.Key, first.Law.Sigma = test.key, sigma
			second := *first
			second.Name, second.Law.Law = "Al", diffusion.NewLaw(7e-8/apart, 273e3)
			s.Crystals[0].Elements = append(s.Crystals[0].Elements, second)
			r := weighed(t, s)
			if got := r.Paths[0].Outcome.WithLaws.Verdict; len(r.Laws) != test.laws || got != test.want {
				t.Errorf("%d laws: %s with their errors, want %d: %s", len(r.Laws), got, test.laws, test.want)
			}
		})
	}
}
